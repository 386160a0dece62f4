"""What a coefficient expression is worth, in whatever arithmetic is asked for.

A name varies in a proof when it is open or has a value of its own; one that follows others, or was
given by a use, is replaced by its expression. pi and each value of sqrt, sin, cos, tan and exp is a
free symbol, named by its function and the canonical form of its argument.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from fractions import Fraction
from typing import Generic, Protocol, TypeVar

from flowgraph.diagram.diagram import Coefficient
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
    names_in,
)

T = TypeVar("T")


class Arithmetic(Protocol[T]):
    """The operations an expression is valued with."""

    def number(self, value: Fraction) -> T: ...
    def symbol(self, name: str) -> T: ...
    def pi(self) -> T: ...
    def function(self, function: Function, argument: T) -> T: ...
    def root_of(self, base: T, exponent: Fraction) -> T: ...
    def add(self, left: T, right: T) -> T: ...
    def multiply(self, left: T, right: T) -> T: ...
    def divide(self, upper: T, lower: T) -> T: ...


class Valuation(Generic[T]):
    """Values of expressions in one arithmetic; names that follow others are valued once."""

    def __init__(self, arithmetic: Arithmetic[T], coefficients: Mapping[str, Coefficient], *, at_values: bool) -> None:
        self._arithmetic = arithmetic
        self._coefficients = coefficients
        self._at_values = at_values
        self._named: dict[str, T] = {}
        self._known: dict[Expression, T] = {}

    def __call__(self, expression: Expression) -> T:
        known = self._known.get(expression)
        if known is None:
            for name in following_order(self._coefficients, names_in(expression), at_values=self._at_values):
                if name not in self._named:
                    self._named[name] = self._value_of_name(name)
            known = self._known[expression] = self._value(expression)
        return known

    def _value_of_name(self, name: str) -> T:
        followed = followed_expression(self._coefficients, name, at_values=self._at_values)
        return self._arithmetic.symbol(name) if followed is None else self._value(followed)

    def _value(self, expression: Expression) -> T:
        arithmetic = self._arithmetic
        match expression:
            case Number(value):
                return arithmetic.number(value)
            case Name(name):
                return self._named[name]
            case Pi():
                return arithmetic.pi()
            case Sum(parts):
                total = self._value(parts[0])
                for part in parts[1:]:
                    total = arithmetic.add(total, self._value(part))
                return total
            case Product(parts):
                product = self._value(parts[0])
                for part in parts[1:]:
                    product = arithmetic.multiply(product, self._value(part))
                return product
            case Negative(inner):
                return arithmetic.multiply(arithmetic.number(Fraction(-1)), self._value(inner))
            case Quotient(upper, lower):
                return arithmetic.divide(self._value(upper), self._value(lower))
            case Power(base, exponent) if exponent.denominator == 1:
                return self._power(self._value(base), exponent.numerator)
            case Power(base, exponent):
                return arithmetic.root_of(self._value(base), exponent)
            case Function(_, argument):
                return arithmetic.function(expression, self._value(argument))
            case Sample():
                raise ValueError("a sample is no coefficient")

    def _power(self, base: T, exponent: int) -> T:
        """By squaring; a negative power is one over the positive one."""
        result = self._arithmetic.number(Fraction(1))
        remaining, square = abs(exponent), base
        while remaining:
            if remaining & 1:
                result = self._arithmetic.multiply(result, square)
            remaining >>= 1
            if remaining:
                square = self._arithmetic.multiply(square, square)
        return result if exponent >= 0 else self._arithmetic.divide(self._arithmetic.number(Fraction(1)), result)


def followed_expression(coefficients: Mapping[str, Coefficient], name: str, *, at_values: bool) -> Expression | None:
    """The expression that stands for a name: None when the name itself may take any value."""
    coefficient = coefficients.get(name)
    if coefficient is None or coefficient.value is None:
        return None
    if at_values or coefficient.given or names_in(coefficient.value):
        return coefficient.value
    return None


def following_order(coefficients: Mapping[str, Coefficient], names: Iterable[str], *, at_values: bool) -> list[str]:
    """The names and all that they follow, each after those it follows."""
    order: list[str] = []
    done: set[str] = set()
    for first in sorted(names):
        walk = [(first, False)]
        while walk:
            name, entered = walk.pop()
            if entered:
                order.append(name)
            elif name not in done:
                done.add(name)
                walk.append((name, True))
                followed = followed_expression(coefficients, name, at_values=at_values)
                if followed is not None:
                    walk.extend((inner, False) for inner in sorted(names_in(followed)))
    return order
