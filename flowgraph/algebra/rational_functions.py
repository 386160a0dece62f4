"""Coefficient expressions as exact rational functions in lowest terms, over the integers.

A value is a pair of polynomials (FLINT) in just the symbols it reads, so that a diagram with very
many named coefficients costs no more than its single expressions do.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from fractions import Fraction

from flint import fmpz_mpoly, fmpz_mpoly_ctx

from flowgraph.algebra.valuation import Valuation
from flowgraph.diagram.diagram import Coefficient
from flowgraph.diagram.expression import Function


class Undefined(ZeroDivisionError):
    """A division by something that is zero for every value of the coefficients."""


@dataclass(frozen=True, slots=True)
class RationalFunction:
    """`upper / lower` in lowest terms; the leading coefficient of `lower` is positive."""

    upper: fmpz_mpoly
    lower: fmpz_mpoly


def polynomials_in(symbols: tuple[str, ...]) -> fmpz_mpoly_ctx:
    """The ring of integer polynomials in the given symbols (sorted by name)."""
    return fmpz_mpoly_ctx.get(symbols, "degrevlex")


def joined(left: fmpz_mpoly, right: fmpz_mpoly) -> tuple[fmpz_mpoly, fmpz_mpoly]:
    """Both polynomials in one ring that has the symbols of either."""
    here, there = left.context(), right.context()
    if here is there:
        return left, right
    together = polynomials_in(tuple(sorted({*here.names(), *there.names()})))
    return left.project_to_context(together), right.project_to_context(together)


def lowest_terms(upper: fmpz_mpoly, lower: fmpz_mpoly) -> RationalFunction:
    if not lower:
        raise Undefined("a coefficient divides by zero whatever its values")
    upper, lower = joined(upper, lower)
    shared = upper.gcd(lower)
    if lower.leading_coefficient() < 0:
        shared = -shared
    return RationalFunction(upper // shared, lower // shared)


class RationalFunctionArithmetic:
    """Values expressions by exact rational functions."""

    def number(self, value: Fraction) -> RationalFunction:
        constants = polynomials_in(())
        upper: dict[tuple[int, ...], int] = {(): value.numerator} if value else {}
        lower: dict[tuple[int, ...], int] = {(): value.denominator}
        return RationalFunction(constants.from_dict(upper), constants.from_dict(lower))

    def symbol(self, name: str) -> RationalFunction:
        ring = polynomials_in((name,))
        return RationalFunction(ring.from_dict({(1,): 1}), ring.from_dict({(0,): 1}))

    def pi(self) -> RationalFunction:
        return self.symbol("pi")

    def function(self, function: Function, argument: RationalFunction) -> RationalFunction:
        return self.symbol(f"{function.name}({canonical_text(argument)})")

    def root_of(self, base: RationalFunction, exponent: Fraction) -> RationalFunction:
        return self.symbol(f"({canonical_text(base)})^({exponent})")

    def add(self, left: RationalFunction, right: RationalFunction) -> RationalFunction:
        a, d = joined(left.upper, right.lower)
        b, c = joined(left.lower, right.upper)
        ad, cb = joined(a * d, b * c)
        return lowest_terms(ad + cb, b.project_to_context(ad.context()) * d.project_to_context(ad.context()))

    def multiply(self, left: RationalFunction, right: RationalFunction) -> RationalFunction:
        a, c = joined(left.upper, right.upper)
        b, d = joined(left.lower, right.lower)
        return lowest_terms(a * c, b * d)

    def divide(self, upper: RationalFunction, lower: RationalFunction) -> RationalFunction:
        return self.multiply(upper, lowest_terms(lower.lower, lower.upper))


def canonical_text(value: RationalFunction) -> str:
    """A text that two values share exactly when they are equal."""
    upper, lower = str(value.upper), str(value.lower)
    return upper if lower == "1" else f"({upper})/({lower})"


def symbolic_valuation(coefficients: Mapping[str, Coefficient]) -> Valuation[RationalFunction]:
    """Values expressions as rational functions of everything that may vary in a proof."""
    return Valuation(RationalFunctionArithmetic(), coefficients, at_values=False)
