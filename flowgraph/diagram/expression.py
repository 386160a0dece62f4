"""Exact expressions: coefficients, ratios in z^-1 and the right sides of difference equations.

One small tree serves all three. Numbers are exact rationals in the base units hertz and second; a
number remembers the unit it was written in only so that it can be printed back. Brackets nest at
most 64 deep in a file and long sums and products are flat, so walking a tree by recursion is safe.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from fractions import Fraction
from typing import Literal, TypeAlias

FunctionName: TypeAlias = Literal["sqrt", "sin", "cos", "tan", "exp"]


@dataclass(frozen=True, slots=True)
class Number:
    """`value` is in base units (48 kHz is 48000, 250 ms is 1/4); `unit` is as written, or empty."""

    value: Fraction
    unit: str = ""


@dataclass(frozen=True, slots=True)
class Name:
    """A coefficient by its full name (`r`, `low.b0`, `h[3]`); in a ratio also the letter `z`."""

    name: str


@dataclass(frozen=True, slots=True)
class Pi:
    """The number pi."""


@dataclass(frozen=True, slots=True)
class Sum:
    """Two or more terms, in the order written; a subtracted term is a `Negative`."""

    terms: tuple[Expression, ...]


@dataclass(frozen=True, slots=True)
class Product:
    """Two or more factors, in the order written."""

    factors: tuple[Expression, ...]


@dataclass(frozen=True, slots=True)
class Negative:
    """Minus the inner expression."""

    inner: Expression


@dataclass(frozen=True, slots=True)
class Quotient:
    """`upper` divided by `lower`."""

    upper: Expression
    lower: Expression


@dataclass(frozen=True, slots=True)
class Power:
    """`base` to a whole power; only `root_of_ten` has another exponent, and there base is a number."""

    base: Expression
    exponent: Fraction


@dataclass(frozen=True, slots=True)
class Function:
    """sqrt, sin, cos, tan or exp of an expression."""

    name: FunctionName
    argument: Expression


@dataclass(frozen=True, slots=True)
class Sample:
    """`signal[n - late]`, in difference equations only."""

    signal: str
    late: int


Expression: TypeAlias = Number | Name | Pi | Sum | Product | Negative | Quotient | Power | Function | Sample

ONE = Number(Fraction(1))
ZERO = Number(Fraction(0))


def children(expression: Expression) -> tuple[Expression, ...]:
    """The expressions directly inside this one, in the order written."""
    match expression:
        case Sum(terms):
            return terms
        case Product(factors):
            return factors
        case Negative(inner):
            return (inner,)
        case Quotient(upper, lower):
            return (upper, lower)
        case Power(base, _):
            return (base,)
        case Function(_, argument):
            return (argument,)
        case _:
            return ()


def names_in(expression: Expression) -> set[str]:
    """The coefficient names an expression reads (and `z` where it stands for the delay)."""
    found: set[str] = set()
    waiting = [expression]
    while waiting:
        inner = waiting.pop()
        if isinstance(inner, Name):
            found.add(inner.name)
        waiting.extend(children(inner))
    return found


def rename(expression: Expression, new_names: Mapping[str, str]) -> Expression:
    """The same expression with coefficient names replaced where `new_names` has them."""
    return substitute(expression, {name: Name(new_name) for name, new_name in new_names.items()})


def substitute(expression: Expression, values: Mapping[str, Expression]) -> Expression:
    """The expression with `values[name]` in place of each name that `values` has."""
    match expression:
        case Name(name):
            return values.get(name, expression)
        case Sum(terms):
            return Sum(tuple(substitute(term, values) for term in terms))
        case Product(factors):
            return Product(tuple(substitute(factor, values) for factor in factors))
        case Negative(inner):
            return Negative(substitute(inner, values))
        case Quotient(upper, lower):
            return Quotient(substitute(upper, values), substitute(lower, values))
        case Power(base, exponent):
            return Power(substitute(base, values), exponent)
        case Function(name, argument):
            return Function(name, substitute(argument, values))
        case _:
            return expression
