"""What a proof rests on: coefficient values that it leaves out because a denominator vanishes there."""

from __future__ import annotations

from collections.abc import Iterable, Mapping

from flowgraph.algebra.valuation import followed_expression, following_order
from flowgraph.diagram.diagram import Coefficient, number_value
from flowgraph.diagram.expression import (
    ONE,
    Expression,
    Function,
    Name,
    Negative,
    Power,
    Product,
    Quotient,
    Sum,
    children,
    names_in,
)
from flowgraph.text.print_expression import print_expression


def conditions(coefficients: Mapping[str, Coefficient], expressions: Iterable[Expression]) -> tuple[str, ...]:
    """`d <> 0` for every symbolic denominator d, and what a function needs, each once, in the order met."""
    found: dict[str, None] = {}
    written = list(expressions)
    names = {name for expression in written for name in names_in(expression)}
    for name in following_order(coefficients, names, at_values=False):
        followed = followed_expression(coefficients, name, at_values=False)
        if followed is not None:
            written.append(followed)
    for expression in written:
        waiting = [expression]
        while waiting:
            part = waiting.pop()
            for needed in _needs(part):
                found[needed] = None
            waiting.extend(reversed(children(part)))
    return tuple(found)


def _needs(part: Expression) -> list[str]:
    match part:
        case Quotient(_, lower):
            return _not_zero(lower)
        case Power(base, exponent) if exponent < 0:
            return _not_zero(base)
        case Function("sqrt", argument) if (number_value(argument) or -1) < 0:
            return [f"{print_expression(argument)} >= 0"]
        case Function("tan", argument):
            return [f"cos({print_expression(argument)}) <> 0"]
        case _:
            return []


def _not_zero(lower: Expression) -> list[str]:
    """A denominator in z is not zero where its first coefficient is not."""
    _, first = _first_coefficient(lower)
    while isinstance(first, Negative):
        first = first.inner
    return [] if number_value(first) else [f"{print_expression(first)} <> 0"]


def _first_coefficient(ratio: Expression) -> tuple[int, Expression]:
    """The lowest power of z^-1 in a ratio in z, and its coefficient."""
    if not reads_z(ratio):
        return 0, ratio
    match ratio:
        case Negative(inner):
            late, first = _first_coefficient(inner)
            return late, Negative(first)
        case Sum(terms):
            parts = [_first_coefficient(term) for term in terms]
            earliest = min(late for late, _ in parts)
            kept = tuple(first for late, first in parts if late == earliest)
            return earliest, kept[0] if len(kept) == 1 else Sum(kept)
        case Product(factors):
            parts = [_first_coefficient(factor) for factor in factors]
            kept = tuple(first for _, first in parts if first != ONE)
            late = sum(late for late, _ in parts)
            return late, ONE if not kept else kept[0] if len(kept) == 1 else Product(kept)
        case Quotient(upper, lower):
            late, first = _first_coefficient(upper)
            late_below, below = _first_coefficient(lower)
            return late - late_below, first if below == ONE else Quotient(first, below)
        case Power(base, exponent):
            late, first = _first_coefficient(base)
            return late * exponent.numerator, first if first == ONE else Power(first, exponent)
        case _:
            return -1, ONE


def reads_z(expression: Expression) -> bool:
    """Whether an expression reads z anywhere."""
    waiting = [expression]
    while waiting:
        part = waiting.pop()
        if part == Name("z"):
            return True
        waiting.extend(children(part))
    return False
