"""The Diagram: an immutable, flat network of elements with its ports, coefficients and claims."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from fractions import Fraction
from math import prod

from flowgraph.diagram.claim import Claim
from flowgraph.diagram.elements import Adder, Delay, Element, Gain, Input, Output
from flowgraph.diagram.expression import Expression, Name, Negative, Number, Power, Product, Quotient, Sum
from flowgraph.source.span import NOWHERE, Span


@dataclass(frozen=True, slots=True)
class Coefficient:
    """A named coefficient: open (value None), valued, or following others (value names them).

    `given` marks one whose value came with a use (`with b0 = 1/2`): it is that expression exactly,
    whereas a value written where the coefficient is defined may be any other in a proof.
    """

    name: str
    value: Expression | None = None
    given: bool = False
    span: Span = field(default=NOWHERE, compare=False, repr=False)


@dataclass(frozen=True, slots=True)
class Use:
    """A diagram used inside another: its elements stand in the user's under `path` + '.' + name.

    `diagram` is the used diagram as it stands by itself (its claims are proved there, once);
    `bindings` gives each of its coefficients that the use gave, in the user's terms.
    """

    path: str
    diagram: Diagram
    bindings: Mapping[str, Expression]
    span: Span = field(default=NOWHERE, compare=False, repr=False)


@dataclass(frozen=True, slots=True)
class Diagram:
    """Elements by name, in the order of the file; everything used is already spelled out.

    Wires are resolved: every `Signal` names an element in `elements`. `outputs` are ports; a port
    and the element it shows may share a name. Rows keep the order of drawing lines of the file.
    """

    name: str
    elements: Mapping[str, Element]
    outputs: Mapping[str, Output]
    coefficients: Mapping[str, Coefficient] = field(default_factory=dict)
    claims: tuple[Claim, ...] = ()
    rate: Fraction | None = None
    rows: tuple[tuple[str, ...], ...] = ()
    title: str = ""
    version: str = ""
    notes: tuple[str, ...] = ()
    uses: tuple[Use, ...] = field(default=(), compare=False)
    span: Span = field(default=NOWHERE, compare=False, repr=False)

    def inputs(self) -> list[Input]:
        """The input ports in the order of the file."""
        return [element for element in self.elements.values() if isinstance(element, Input)]

    def delays(self) -> list[Delay]:
        """The delays in the order of the file."""
        return [element for element in self.elements.values() if isinstance(element, Delay)]


@dataclass(frozen=True, slots=True)
class Counts:
    """What a diagram costs: memory cells, multiplies and two-input adds a sample."""

    cells: int
    multiplies: int
    adds: int


def count(diagram: Diagram) -> Counts:
    """Cells, multiplies and adds as drawn. A factor of +-1 or +-2^k made of numbers is no multiply.

    A coefficient always counts, unless a use gave it a number: then it is that number.
    """
    given = given_numbers(diagram)
    # By identity: lines inside a repeat share the expressions that do not change with it.
    multiplies: dict[int, bool] = {}

    def needs_multiply(coefficient: Expression) -> bool:
        known = multiplies.get(id(coefficient))
        if known is None:
            number = given.get(coefficient.name) if isinstance(coefficient, Name) else None
            known = multiplies[id(coefficient)] = is_multiply(number or coefficient)
        return known

    cells = products = adds = 0
    for element in diagram.elements.values():
        match element:
            case Delay(length=length):
                cells += length
            case Gain(coefficient=coefficient):
                products += needs_multiply(coefficient)
            case Adder(terms=terms):
                adds += len(terms) - 1
                products += sum([needs_multiply(term.coefficient) for term in terms if term.coefficient is not None])
            case Input():
                pass
    return Counts(cells, products, adds)


def given_numbers(diagram: Diagram) -> dict[str, Expression]:
    """The coefficients that a use gave a number: each is that number, whatever else may vary."""
    return {
        name: Number(value)
        for name, coefficient in diagram.coefficients.items()
        if coefficient.given and coefficient.value and (value := number_value(coefficient.value)) is not None
    }


def is_multiply(coefficient: Expression) -> bool:
    """Whether a coefficient needs a multiplier: not when it is +-2^k made of numbers alone."""
    value = number_value(coefficient)
    return not value or not (_is_power_of_two(abs(value.numerator)) and _is_power_of_two(value.denominator))


def _is_power_of_two(whole: int) -> bool:
    return whole & (whole - 1) == 0


def number_value(expression: Expression) -> Fraction | None:
    """The value of an expression made of numbers and whole powers alone, else None."""
    match expression:
        case Number(value):
            return value
        case Negative(inner):
            value_inside = number_value(inner)
            return None if value_inside is None else -value_inside
        case Sum(parts) | Product(parts):
            values = [number_value(part) for part in parts]
            known = [value for value in values if value is not None]
            if len(known) < len(values):
                return None
            return sum(known, Fraction(0)) if isinstance(expression, Sum) else prod(known, start=Fraction(1))
        case Quotient(upper, lower):
            above, below = number_value(upper), number_value(lower)
            return above / below if above is not None and below else None
        case Power(base, exponent) if exponent.denominator == 1:
            value_inside = number_value(base)
            if value_inside is None or (value_inside == 0 and exponent < 0):
                return None
            return Fraction(value_inside**exponent.numerator)
        case _:
            return None
