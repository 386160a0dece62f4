"""Signed, scaled signals: the terms of adders and gains, and how they multiply and add up.

Numbers without a unit are worked out; everything else stays an expression, in the order written.
"""

from __future__ import annotations

from collections.abc import Iterable
from fractions import Fraction
from typing import NamedTuple, TypeVar

from flowgraph.diagram.diagram import is_multiply, number_value
from flowgraph.diagram.elements import Adder, Element, Gain, Signal, Term
from flowgraph.diagram.expression import ONE, ZERO, Expression, Negative, Number, Product, Sum, children
from flowgraph.source.span import NOWHERE, Span

R = TypeVar("R")


class Weight(NamedTuple):
    """What a signal is multiplied by: a sign and a coefficient (None is 1)."""

    negative: bool = False
    coefficient: Expression | None = None


UNIT = Weight()


def terms_of(element: Element) -> list[tuple[Signal, Weight]] | None:
    """The signals whose weighted sum an adder or gain is, in the order written; None for other elements."""
    match element:
        case Adder(terms=terms):
            return [(term.signal, Weight(term.negative, term.coefficient)) for term in terms]
        case Gain(coefficient=coefficient, signal=signal):
            return [(signal, simplified(Weight(False, coefficient)))]
        case _:
            return None


def element_of(name: str, terms: list[tuple[Signal, Weight]], span: Span = NOWHERE) -> Adder | Gain:
    """The adder with these terms, or the gain where there is only one. No signal may stand twice."""
    if len(terms) == 1:
        [(signal, weight)] = terms
        return Gain(name, expression_of(weight), signal, span)
    return Adder(name, tuple(Term(signal, weight.negative, weight.coefficient) for signal, weight in terms), span)


def collected(terms: Iterable[tuple[R, Weight]]) -> list[tuple[R, Weight]]:
    """Each signal once, at its first place, its weights added up; what comes to 0 is left out.

    Where nothing would be left, the first signal stays with the weight 0.
    """
    weights: dict[R, list[Weight]] = {}
    for signal, weight in terms:
        weights.setdefault(signal, []).append(weight)
    totals = [(signal, total(found)) for signal, found in weights.items()]
    kept = [(signal, weight) for signal, weight in totals if weight.coefficient != ZERO]
    return kept or totals[:1]


def multiplies_in(terms: Iterable[tuple[R, Weight]]) -> int:
    """How many of the terms need a multiplier."""
    return sum(weight.coefficient is not None and is_multiply(weight.coefficient) for _, weight in terms)


def product(outer: Weight, inner: Weight) -> Weight:
    """The weight of a signal that passes `inner` and then `outer`."""
    negative = outer.negative != inner.negative
    factors = [found for found in (outer.coefficient, inner.coefficient) if found is not None]
    return simplified(Weight(negative, _product(factors) if factors else None))


def total(weights: list[Weight]) -> Weight:
    """The sum of weights; the coefficient is 0 where they cancel as they are written."""
    if len(weights) == 1:
        return simplified(weights[0])
    times: dict[Expression, Fraction] = {}
    for weight in weights:
        for factor, number in _parts(weight):
            times[factor] = times.get(factor, Fraction(0)) + number
    parts = [_multiple(factor, number) for factor, number in times.items() if number]
    parts.sort(key=lambda part: isinstance(part, Negative))
    return simplified(Weight(False, ZERO if not parts else parts[0] if len(parts) == 1 else Sum(tuple(parts))))


def _parts(weight: Weight) -> list[tuple[Expression, Fraction]]:
    """The summands of a weight, each as an expression and the number it is multiplied by."""
    negative, coefficient = simplified(weight)
    summands = coefficient.terms if isinstance(coefficient, Sum) else (ONE if coefficient is None else coefficient,)
    parts: list[tuple[Expression, Fraction]] = []
    for summand in summands:
        inner_negative, inner = simplified(Weight(negative, summand))
        number, rest = Fraction(1), ONE if inner is None else inner
        value = _plain_number(rest)
        if value is not None:
            number, rest = value, ONE
        elif isinstance(rest, Product) and (value := _plain_number(rest.factors[0])) is not None:
            number, rest = value, _product(list(rest.factors[1:]))
        parts.append((rest, -number if inner_negative else number))
    return parts


def simplified(weight: Weight) -> Weight:
    """The same weight with its sign outside and without a coefficient of 1."""
    negative, coefficient = weight
    while isinstance(coefficient, Negative):
        negative, coefficient = not negative, coefficient.inner
    value = None if coefficient is None else _plain_number(coefficient)
    if value is None:
        return Weight(negative, coefficient)
    if value == 0:
        return Weight(False, ZERO)
    if value < 0:
        negative, coefficient = not negative, Number(-value)
    return Weight(negative, None if abs(value) == 1 else coefficient)


def expression_of(weight: Weight) -> Expression:
    """The weight as one expression."""
    coefficient = ONE if weight.coefficient is None else weight.coefficient
    if not weight.negative:
        return coefficient
    value = _plain_number(coefficient)
    return Negative(coefficient) if value is None else Number(-value)


def _product(factors: list[Expression]) -> Expression:
    number = Fraction(1)
    others: list[Expression] = []
    for factor in factors:
        value = _plain_number(factor)
        if value is not None:
            number *= value
        elif isinstance(factor, Product):
            others.extend(factor.factors)
        else:
            others.append(factor)
    if not others or number == 0:
        return Number(number)
    if number != 1:
        others.insert(0, Number(number))
    return others[0] if len(others) == 1 else Product(tuple(others))


def _multiple(factor: Expression, number: Fraction) -> Expression:
    scaled = _product([Number(abs(number)), factor])
    return Negative(scaled) if number < 0 else scaled


def _plain_number(expression: Expression) -> Fraction | None:
    """The value of an expression of numbers alone, none of them with a unit (units must stay to be checked)."""
    waiting = [expression]
    while waiting:
        inner = waiting.pop()
        if isinstance(inner, Number) and inner.unit:
            return None
        waiting.extend(children(inner))
    return number_value(expression)
