"""Exact values of expressions and their powers of seconds, kept within bounds."""

from __future__ import annotations

from collections.abc import Mapping
from fractions import Fraction

from flowgraph.diagram.expression import (
    Expression,
    Function,
    Name,
    Negative,
    Number,
    Pi,
    Power,
    Product,
    Quotient,
    Sample,
    Sum,
    children,
)
from flowgraph.text.exact import SECONDS, TooLargeError, exact_power, within_bits

FEW = 1000
"""The most parts of an expression whose value is found beside that of its line."""


class UnequalPowersError(ValueError):
    """Quantities that cannot be combined: hertz added to a plain number, the sine of a time."""


class InexactError(ValueError):
    """An expression without a value as a fraction: it reads something open, or a root, sine ..."""


def value_of(expression: Expression, known: Mapping[str, Fraction]) -> Fraction:
    """The exact value where every name is in `known`. Raises InexactError, TooLargeError, ZeroDivisionError."""
    match expression:
        case Number(value):
            return value
        case Name(name) if name in known:
            return known[name]
        case Sum(terms):
            total = Fraction(0)
            for term in terms:
                total = within_bits(total + value_of(term, known))
            return total
        case Product(factors):
            product = Fraction(1)
            for factor in factors:
                product = within_bits(product * value_of(factor, known))
            return product
        case Negative(inner):
            return -value_of(inner, known)
        case Quotient(upper, lower):
            return within_bits(value_of(upper, known) / value_of(lower, known))
        case Power(base, exponent) if exponent.denominator == 1:
            return exact_power(value_of(base, known), exponent.numerator)
        case _:
            raise InexactError("no exact value")


def plain_value(expression: Expression) -> Fraction | None:
    """The exact value of an expression made of a few numbers alone; None for every other.

    Divisors within divisors are each looked at, so what is long is left to the look at the whole line.
    """
    waiting, parts = [expression], 0
    while waiting:
        parts += 1
        if parts > FEW:
            return None
        waiting.extend(children(waiting.pop()))
    try:
        return value_of(expression, {})
    except (InexactError, TooLargeError, ZeroDivisionError):
        return None


def seconds_of(expression: Expression, known: Mapping[str, Fraction | None]) -> Fraction | None:
    """The power of seconds of a quantity: -1 for a frequency, 0 for a plain number, None where an open name decides.

    Raises UnequalPowersError where quantities of unequal powers are added, or one stands where only a number may.
    """
    match expression:
        case Number(_, unit):
            return Fraction(SECONDS.get(unit, 0))
        case Name(name):
            return known.get(name)
        case Sum(terms):
            return _common([seconds_of(term, known) for term in terms])
        case Product(factors):
            powers = [seconds_of(factor, known) for factor in factors]
            return sum((power for power in powers if power is not None), Fraction(0)) if None not in powers else None
        case Negative(inner):
            return seconds_of(inner, known)
        case Quotient(upper, lower):
            above, below = seconds_of(upper, known), seconds_of(lower, known)
            return None if above is None or below is None else above - below
        case Power(base, exponent):
            inside = seconds_of(base, known)
            return None if inside is None else inside * exponent
        case Function(name, argument):
            inside = seconds_of(argument, known)
            if name == "sqrt":
                return None if inside is None else inside / 2
            if inside:
                raise UnequalPowersError(f"{name} takes a plain number, and this is {quantity(inside)}")
            return Fraction(0)
        case Pi() | Sample():
            return Fraction(0)


def _common(powers: list[Fraction | None]) -> Fraction | None:
    """The one power that all terms of a sum have."""
    told = [power for power in powers if power is not None]
    for power in told:
        if power != told[0]:
            raise UnequalPowersError(f"{quantity(told[0])} and {quantity(power)} do not add")
    return told[0] if told else None


def quantity(power: Fraction) -> str:
    """A power of seconds in words."""
    named = {Fraction(0): "a plain number", Fraction(-1): "a frequency", Fraction(1): "a time"}
    return named.get(power) or f"a quantity in s^{power if power.denominator == 1 else f'({power})'}"


def as_expression(value: Fraction, power: Fraction) -> Expression:
    """A fixed value as an expression that keeps its power of seconds."""
    if power == 0:
        return Number(value)
    if power in (-1, 1):
        return Number(value, "Hz" if power == -1 else "s")
    return Product((Number(value), Power(Number(Fraction(1), "s"), power)))
