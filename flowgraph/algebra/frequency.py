"""The gain at one frequency, as a certified enclosure, and exactly where a limit is met."""

from __future__ import annotations

from contextlib import suppress
from dataclasses import dataclass
from fractions import Fraction

from flint import acb, arb, ctx, fmpq, fmpq_poly, fmpz_poly

from flowgraph.algebra.behaviour import DiagramBehaviour
from flowgraph.algebra.exact_rings import TooLarge
from flowgraph.algebra.numbers import numbered
from flowgraph.algebra.ring import Operators
from flowgraph.algebra.transfer import NumberTransfer, number_transfers
from flowgraph.algebra.values import Values, ball_of
from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.expression import Expression

BITS = (128, 256, 1024, 4096)
"""Precisions tried one after the other until a limit is separated from the gain."""


MOST_DECIBELS = 100_000
"""Limits beyond this are not looked at for being met exactly: 10^10000 is no gain."""


class _PointOnCircle(Operators[acb]):
    """Certified balls at w = exp(-2 pi i turn): a field as long as no pivot encloses zero."""

    invertible = True

    def __init__(self, values: Values, turn: Fraction, bits: int) -> None:
        self.zero = acb(0)
        self.one = acb(1)
        self._values = values
        self._turn = turn
        self._bits = bits

    def coefficient(self, expression: Expression) -> acb:
        return acb(self._values.ball(expression, self._bits))

    def late(self, samples: int) -> acb:
        # exp_pi_i is exp(pi i x); whole turns are taken off exactly.
        angle = -2 * self._turn * samples % 2
        return acb(ball_of(angle)).exp_pi_i()

    def quotient(self, upper: acb, lower: acb) -> acb:
        if lower.contains(acb(0)):
            raise ZeroDivisionError("a pole lies at this frequency, or too close to tell")
        return upper / lower


@dataclass(frozen=True, slots=True)
class ResponseAt:
    """One response of a diagram at one frequency, `turn` = frequency / rate turns a sample.

    `transfer` is the response in lowest terms where all coefficients are fractions, else None.
    """

    diagram: Diagram
    output: str
    source: str
    turn: Fraction
    transfer: NumberTransfer | None

    def has_pole(self) -> bool | None:
        """Whether the response is infinite there; None where it is not told."""
        if self.transfer is None:
            return None
        return not (self.transfer.denominator % _cyclotomic(self.turn))

    def squared_gain(self, bits: int) -> arb:
        """|H|^2 enclosed with `bits` bits; not finite where a pole is not excluded."""
        with ctx.workprec(bits):
            ring = _PointOnCircle(Values(self.diagram.coefficients), self.turn, bits)
            if self.transfer is not None:
                value = _at(self.transfer.numerator, ring.late(1)) / _at(self.transfer.denominator, ring.late(1))
            else:
                pair = (self.output, self.source)
                try:
                    upper, lowers = DiagramBehaviour(self.diagram).responses(ring, [pair])[pair]
                    value = ring.quotient(upper, ring.one)
                except ZeroDivisionError:
                    return arb("nan")
                for lower in lowers:
                    value = value / lower
            return value.real * value.real + value.imag * value.imag

    def side_of(self, decibels: Fraction) -> int | None:
        """1 where the gain is above a limit, -1 below, 0 exactly on it, None where it is not told."""
        if self.has_pole():
            return 1
        if self._meets(decibels):
            return 0
        for bits in BITS:
            gain = self.squared_gain(bits)
            with ctx.workprec(bits):
                bound = arb(10) ** ball_of(decibels / 10)
                if gain > bound:
                    return 1
                if gain < bound:
                    return -1
        return None

    def _meets(self, decibels: Fraction) -> bool:
        """Whether a limit is met exactly, which only a whole multiple of 10 dB can be.

        With q the denominator of `turn`, w is a primitive q-th root of unity, whose minimal
        polynomial is cyclotomic: |H|^2 = limit is divisibility of N N* - limit D D* by it.
        """
        if self.transfer is None or (decibels / 10).denominator != 1 or abs(decibels) > MOST_DECIBELS:
            return False
        limit = Fraction(10) ** int(decibels / 10)
        upper, lower = self.transfer.numerator, self.transfer.denominator
        degree = max(upper.degree(), lower.degree(), 0)
        difference = upper * _reversed(upper, degree) - fmpq(limit.numerator, limit.denominator) * lower * _reversed(
            lower, degree
        )
        return not (difference % _cyclotomic(self.turn))

    def decibels(self) -> str:
        """The gain for reading."""
        if self.has_pole():
            return "infinite: a pole lies at this frequency"
        if self._meets(Fraction(0)):
            return "0 dB"
        gain = self.squared_gain(BITS[1])
        with ctx.workprec(BITS[1]):
            if not gain.is_finite():
                return "not told"
            if not gain.contains(0):
                return f"{round(float(_in_decibels(gain).mid()), 9):.9g} dB"
            if self.transfer is not None and not self.transfer.numerator % _cyclotomic(self.turn):
                return "zero"
            return f"below {float(_in_decibels(gain.upper()).mid()):.0f} dB"


def response_at(diagram: Diagram, output: str, source: str, turn: Fraction) -> ResponseAt:
    """The response at `turn` turns a sample. Raises OpenCoefficientError where a coefficient has no value."""
    numbers = numbered(diagram)
    transfer = None
    if numbers.exact:
        with suppress(TooLarge):
            transfer = number_transfers(numbers.diagram).transfers[(output, source)]
    return ResponseAt(diagram, output, source, turn, transfer)


def _in_decibels(squared: arb) -> arb:
    return squared.log() / arb(10).log() * 10


def _cyclotomic(turn: Fraction) -> fmpq_poly:
    return fmpq_poly(fmpz_poly.cyclotomic(turn.denominator))


def _at(polynomial: fmpq_poly, w: acb) -> acb:
    total = acb(0)
    for value in reversed(polynomial.coeffs()):
        total = total * w + acb(arb(value))
    return total


def _reversed(polynomial: fmpq_poly, degree: int) -> fmpq_poly:
    """w^degree p(1/w): the conjugate of p on the unit circle, times a power of w."""
    coefficients = polynomial.coeffs()
    return fmpq_poly([*[fmpq(0)] * (degree + 1 - len(coefficients)), *coefficients[::-1]])
