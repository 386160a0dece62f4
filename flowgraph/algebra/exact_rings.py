"""The exact rings in which a diagram is solved: polynomials in w = z^-1 and in all that may vary.

For every symbolic denominator d of a coefficient the ring has a letter 1/d, so that solving never
leaves polynomials; `cleared` takes those letters out again. Work is limited by counted steps, not
by a clock.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from typing import cast

from flint import fmpq, fmpq_mpoly, fmpq_mpoly_ctx, fmpq_poly, fmpz_mpoly

from flowgraph.algebra.rational_functions import RationalFunction, polynomials_in, symbolic_valuation
from flowgraph.algebra.ring import ExactRing, Operators, Polynomial
from flowgraph.algebra.valuation import Valuation
from flowgraph.diagram.diagram import Coefficient
from flowgraph.diagram.expression import Expression

WORK_LIMIT = 4_000_000
"""Products of terms after which an exact solution is given up: about half a second."""

TERM_LIMIT = 100_000
"""Terms of one polynomial after which an exact solution is given up."""


class TooLarge(ArithmeticError):
    """The exact solution would take more than the stated work."""


class NumberPolynomials(Operators[fmpq_poly]):
    """Polynomials in w with rational coefficients, for diagrams in which nothing varies."""

    invertible = False

    def __init__(self, value: Valuation[RationalFunction]) -> None:
        self.zero = fmpq_poly([])
        self.one = fmpq_poly([1])
        self._value = value
        self._work = 0

    def coefficient(self, expression: Expression) -> fmpq_poly:
        value = self._value(expression)
        if not value.upper:
            return self.zero
        return fmpq_poly([fmpq(int(value.upper.leading_coefficient()), int(value.lower.leading_coefficient()))])

    def late(self, samples: int) -> fmpq_poly:
        self._work += samples
        if self._work > WORK_LIMIT:
            raise TooLarge
        return self.one.left_shift(samples)

    def times(self, left: fmpq_poly, right: fmpq_poly) -> fmpq_poly:
        self._work += len(left) + len(right)
        if self._work > WORK_LIMIT:
            raise TooLarge
        return left * right

    def quotient(self, upper: fmpq_poly, lower: fmpq_poly) -> fmpq_poly:
        return upper // lower

    def cleared(self, *polynomials: fmpq_poly) -> tuple[fmpq_poly, ...]:
        return polynomials


class SymbolPolynomials(Operators[fmpq_mpoly]):
    """Polynomials in w and in all that varies, with rational coefficients."""

    invertible = False

    def __init__(self, value: Valuation[RationalFunction], expressions: Iterable[Expression]) -> None:
        values = [value(expression) for expression in expressions]
        self.symbols = tuple(sorted({name for known in values for name in _symbols(known)}))
        lowers = {str(known.lower): known.lower for known in values if not known.lower.is_constant()}
        self._inverse = {text: f"1/({text})" for text in sorted(lowers)}
        self._lowers = [lowers[text] for text in self._inverse]
        self._letters = (*self.symbols, *self._inverse.values(), "w")
        self._ring = fmpq_mpoly_ctx.get(self._letters, "degrevlex")
        self._integers = polynomials_in(self.symbols)
        self._value = value
        self._work = 0
        self.zero = self._ring.from_dict({})
        self.one = self._ring.from_dict({(0,) * len(self._letters): 1})

    def coefficient(self, expression: Expression) -> fmpq_mpoly:
        value = self._value(expression)
        whole = value.lower.leading_coefficient() if value.lower.is_constant() else 1
        tail = [0] * (len(self._inverse) + 1)
        if not value.lower.is_constant():
            tail[list(self._inverse).index(str(value.lower))] = 1
        upper = value.upper.project_to_context(self._integers)
        return self._ring.from_dict(
            {(*powers, *tail): fmpq(int(factor), int(whole)) for powers, factor in upper.to_dict().items()}
        )

    def late(self, samples: int) -> fmpq_mpoly:
        return self._ring.from_dict({(*[0] * (len(self._letters) - 1), samples): 1})

    def times(self, left: fmpq_mpoly, right: fmpq_mpoly) -> fmpq_mpoly:
        self._work += len(left) * len(right)
        if self._work > WORK_LIMIT:
            raise TooLarge
        product = left * right
        if len(product) > TERM_LIMIT:
            raise TooLarge
        return product

    def quotient(self, upper: fmpq_mpoly, lower: fmpq_mpoly) -> fmpq_mpoly:
        self._work += len(upper)
        if self._work > WORK_LIMIT:
            raise TooLarge
        return upper // lower

    def cleared(self, *polynomials: fmpq_mpoly) -> tuple[fmpq_mpoly, ...]:
        """The polynomials times one product of denominators, without the letters 1/d."""
        if not self._inverse:
            return polynomials
        first = len(self.symbols)
        highest = [0] * len(self._inverse)
        for polynomial in polynomials:
            for at in range(len(highest)):
                highest[at] = max(highest[at], polynomial.degrees()[first + at] if polynomial else 0)
        return tuple(self._cleared(polynomial, highest) for polynomial in polynomials)

    def _cleared(self, polynomial: fmpq_mpoly, highest: list[int]) -> fmpq_mpoly:
        """Each letter 1/d to the power k becomes d to the power highest - k."""
        first, count = len(self.symbols), len(self._inverse)
        by_powers: dict[tuple[int, ...], dict[tuple[int, ...], fmpq]] = {}
        for powers, factor in polynomial.to_dict().items():
            kept = (*powers[:first], *[0] * count, powers[-1])
            by_powers.setdefault(tuple(powers[first : first + count]), {})[kept] = factor
        total = self.zero
        for inverse_powers, terms in sorted(by_powers.items()):
            part = self._ring.from_dict(terms)
            for lower, most, power in zip(self._lowers, highest, inverse_powers, strict=True):
                for _ in range(most - power):
                    part = self.times(part, self._embedded(lower))
            total = total + part
        return total

    def _embedded(self, lower: fmpz_mpoly) -> fmpq_mpoly:
        tail = (0,) * (len(self._inverse) + 1)
        terms = lower.project_to_context(self._integers).to_dict()
        return self._ring.from_dict({(*powers, *tail): factor for powers, factor in terms.items()})


def _symbols(value: RationalFunction) -> list[str]:
    """The symbols that a value really reads."""
    names: list[str] = []
    for polynomial in (value.upper, value.lower):
        unused = set(polynomial.unused_gens())
        names.extend(name for name in polynomial.context().names() if name not in unused)
    return names


SYMBOL_LIMIT = 400


def exact_ring(coefficients: Mapping[str, Coefficient], expressions: list[Expression]) -> ExactRing[Polynomial]:
    """The smallest exact ring that holds all the expressions. Raises TooLarge beyond SYMBOL_LIMIT symbols."""
    value = symbolic_valuation(coefficients)
    symbols: set[str] = set()
    for expression in expressions:
        symbols.update(_symbols(value(expression)))
        if len(symbols) > SYMBOL_LIMIT:
            raise TooLarge
    # The two rings have their own element types; the callers never mix elements of different rings.
    return cast(ExactRing[Polynomial], SymbolPolynomials(value, expressions) if symbols else NumberPolynomials(value))
