"""What a proof rests on: coefficient values that it leaves out because a denominator vanishes there."""

from __future__ import annotations

from collections.abc import Iterable, Mapping

from flowgraph.algebra.valuation import followed_expression, following_order
from flowgraph.diagram.diagram import Coefficient, number_value
from flowgraph.diagram.expression import ZERO, Expression, Function, Power, Quotient, children, names_in
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
        case Quotient(_, lower) if number_value(lower) is None and "z" not in names_in(lower):
            return [f"{print_expression(lower)} <> 0"]
        case Power(base, exponent) if exponent < 0 and number_value(base) is None and "z" not in names_in(base):
            return [f"{print_expression(base)} <> 0"]
        case Function("sqrt", argument) if number_value(argument) is None:
            return [f"{print_expression(argument)} >= 0"]
        case Function("tan", argument):
            return [f"cos({print_expression(argument)}) <> 0"]
        case _:
            return []


def constant_term_condition(ratio: Expression) -> tuple[str, ...]:
    """For ratios whose outermost denominator starts with a symbol: that symbol must not be 0."""
    if not isinstance(ratio, Quotient):
        return ()
    constant = _at_infinity(ratio.lower)
    return () if constant is None else (f"{print_expression(constant)} <> 0",)


def _at_infinity(lower: Expression) -> Expression | None:
    """The part of a denominator without z, when it is one symbolic term of a sum; else None."""
    terms = [part for part in children(lower) if "z" not in names_in(part)]
    if len(terms) != 1 or number_value(terms[0]) is not None or terms[0] == ZERO:
        return None
    return terms[0]
