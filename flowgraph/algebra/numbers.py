"""A diagram at the numbers of its file: every coefficient replaced by its value."""

from __future__ import annotations

from dataclasses import dataclass, replace
from fractions import Fraction

from flowgraph.algebra.values import Values
from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.elements import with_expressions
from flowgraph.diagram.expression import Expression, Number


@dataclass(frozen=True, slots=True)
class Numbered:
    """A diagram whose coefficients are numbers; not exact where one was rounded to a double."""

    diagram: Diagram
    exact: bool


def numbered(diagram: Diagram) -> Numbered:
    """The diagram at the values of the file.

    Coefficients that are no rational numbers (sqrt, cos ..) are taken as the nearest double, and
    `exact` says so. Raises OpenCoefficientError where one has no value, NoExactValueError where it
    is not a finite real number.
    """
    values = Values(diagram.coefficients)
    known: dict[Expression, Number] = {}
    exact = True

    def number(expression: Expression) -> Number:
        nonlocal exact
        if expression not in known:
            rational = values.is_rational(expression)
            exact = exact and rational
            known[expression] = Number(values.fraction(expression) if rational else Fraction(values.double(expression)))
        return known[expression]

    elements = {name: with_expressions(element, number) for name, element in diagram.elements.items()}
    return Numbered(replace(diagram, elements=elements, coefficients={}), exact)
