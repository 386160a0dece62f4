"""Coefficients as doubles: the whole expression in front of a signal, rounded once."""

from __future__ import annotations

from collections.abc import Callable

from flowgraph.algebra.values import NoExactValueError, OpenCoefficientError, Values
from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.expression import Expression
from flowgraph.source.diagnostic import Diagnostic, Refused
from flowgraph.source.span import Span


def round_coefficients(diagram: Diagram) -> Callable[[Expression, Span], float]:
    """A function that gives the double nearest to a coefficient expression of `diagram`.

    That function raises Refused, with a finding at the place given, where the expression reads an
    open coefficient, has no value, or lies outside the range of doubles.
    """
    values = Values(diagram.coefficients)
    known: dict[int, tuple[Expression, float]] = {}

    def nearest(expression: Expression, span: Span) -> float:
        found = known.get(id(expression))
        if found is None:
            found = known[id(expression)] = (expression, _rounded(values, expression, span))
        return found[1]

    return nearest


def _rounded(values: Values, expression: Expression, span: Span) -> float:
    try:
        return values.double(expression)
    except OpenCoefficientError as error:
        raise Refused([_open(error.name, span)]) from error
    except NoExactValueError as error:
        raise Refused([_no_double(str(error), span)]) from error
    except OverflowError as error:
        raise Refused([_no_double("the value lies outside the range of doubles", span)]) from error


def _no_double(why: str, span: Span) -> Diagnostic:
    return Diagnostic("coefficient-value", f"this coefficient cannot be a double: {why}", span)


def _open(name: str, span: Span) -> Diagnostic:
    return Diagnostic(
        "open-coefficient",
        f"the coefficient {name} is open, so nothing can be computed with it",
        span,
        help=f"give it a value: `coef {name} = 0.5` in the file, or --with {name}=0.5",
    )
