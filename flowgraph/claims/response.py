"""Impulse responses and answers to starting contents, sample by sample, in fractions or in balls."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, replace
from fractions import Fraction
from math import isfinite
from typing import Generic, Protocol, Self, TypeVar

from flint import arb, ctx, nmod

from flowgraph.algebra.behaviour import Behaviour, DiagramBehaviour, RatioBehaviour, parts_with_z, ratio_in
from flowgraph.algebra.residues import ResidueArithmetic, drawn_prime
from flowgraph.algebra.solve import STARTS
from flowgraph.algebra.valuation import Valuation
from flowgraph.algebra.values import NoExactValueError, Values
from flowgraph.diagram.diagram import Coefficient, Diagram
from flowgraph.diagram.elements import Delay
from flowgraph.diagram.expression import Expression, Name, Power, children
from flowgraph.diagram.simulate import Operand, simulate

BITS = 512


class Quantity(Operand, Protocol):
    """A fraction or a ball."""

    def __truediv__(self, other: Self, /) -> Self: ...


Q = TypeVar("Q", bound=Quantity)


@dataclass(frozen=True, slots=True)
class Numbers(Generic[Q]):
    """Values of expressions as quantities, and when two of them certainly differ."""

    value: Callable[[Expression], Q]
    zero: Q
    one: Q
    differ: Callable[[Q, Q], bool]
    said: Callable[[Q], str]


def fractions_at(coefficients: Mapping[str, Coefficient]) -> Numbers[Fraction]:
    """Exact fractions at the values of the coefficients."""
    return Numbers(Values(coefficients).fraction, Fraction(0), Fraction(1), lambda a, b: a != b, str)


def balls_at(coefficients: Mapping[str, Coefficient]) -> Numbers[arb]:
    """Certified balls at the values of the coefficients; they differ when they do not touch."""
    values = Values(coefficients)

    def value(expression: Expression) -> arb:
        ball = values.ball(expression, BITS)
        if not ball.is_finite():
            raise NoExactValueError("a coefficient is not a real number, or not finite")
        return ball

    return Numbers(value, arb(0), arb(1), lambda a, b: not a.overlaps(b), _said_ball)


def _said_ball(ball: arb) -> str:
    """Twelve digits of the middle, which may lie far outside the doubles."""
    if ball.contains(0):
        return "0"
    middle = float(ball.mid())
    return f"{middle:.12g}" if isfinite(middle) and middle else str(ball.mid().str(12, radius=False))


def first_difference(
    left: Behaviour, right: Behaviour, pair: tuple[str, str], numbers: Numbers[Q], samples: int
) -> tuple[int, str, str] | None:
    """The first of `samples` samples at which the responses certainly differ, with both values."""
    with ctx.workprec(BITS):
        length = min(16, samples)
        while True:
            mine = series(left, pair, numbers, length)
            other = series(right, pair, numbers, length)
            for n, (value, other_value) in enumerate(zip(mine, other, strict=True)):
                if numbers.differ(value, other_value):
                    return n, numbers.said(value), numbers.said(other_value)
            if length >= samples:
                return None
            length = min(8 * length, samples)


def series(behaviour: Behaviour, pair: tuple[str, str], numbers: Numbers[Q], samples: int) -> list[Q]:
    """The response of one output to a unit pulse at one input, or to the starting contents alone."""
    output, source = pair
    match behaviour:
        case DiagramBehaviour(diagram):
            alone = diagram if source == STARTS else _at_rest(diagram)
            pulse = {} if source == STARTS else {source: [numbers.one]}
            one_port = replace(alone, outputs={output: alone.outputs[output]})
            return simulate(one_port, numbers.value, pulse, samples, numbers.zero)[output]
        case RatioBehaviour(ratio, late, _):
            return _ratio_series(ratio, late, numbers, samples)
        case _:
            raise TypeError(f"no response is known for {behaviour}")


def _at_rest(diagram: Diagram) -> Diagram:
    """The diagram with all cells empty."""
    elements = {
        name: replace(element, starts=()) if isinstance(element, Delay) else element
        for name, element in diagram.elements.items()
    }
    return replace(diagram, elements=elements)


class _Polynomials(Generic[Q]):
    """Polynomials in w as tuples of quantities, rising powers, cut off at `length`."""

    invertible = False

    def __init__(self, numbers: Numbers[Q], length: int) -> None:
        self.numbers = numbers
        self.length = length
        self.zero: tuple[Q, ...] = ()
        self.one: tuple[Q, ...] = (numbers.one,)

    def coefficient(self, expression: Expression) -> tuple[Q, ...]:
        return (self.numbers.value(expression),)

    def late(self, samples: int) -> tuple[Q, ...]:
        if samples >= self.length:
            return (self.numbers.zero,)  # cut off, which is not the same as zero
        return (*[self.numbers.zero] * samples, self.numbers.one)

    def plus(self, left: tuple[Q, ...], right: tuple[Q, ...]) -> tuple[Q, ...]:
        shorter, longer = sorted((left, right), key=len)
        return (*[a + b for a, b in zip(shorter, longer, strict=False)], *longer[len(shorter) :])

    def minus(self, left: tuple[Q, ...], right: tuple[Q, ...]) -> tuple[Q, ...]:
        return self.plus(left, tuple(self.numbers.zero - value for value in right))

    def times(self, left: tuple[Q, ...], right: tuple[Q, ...]) -> tuple[Q, ...]:
        if not left or not right:
            return ()
        product = [self.numbers.zero] * min(len(left) + len(right) - 1, self.length)
        for i, a in enumerate(left):
            if a == self.numbers.zero:
                continue  # long delays are almost all zeros
            for j, b in enumerate(right[: self.length - i]):
                product[i + j] = product[i + j] + a * b
        return tuple(product)

    def quotient(self, upper: tuple[Q, ...], lower: tuple[Q, ...]) -> tuple[Q, ...]:
        raise TypeError("ratios are kept as numerator and denominator")


def _ratio_series(ratio: Expression, late: int, numbers: Numbers[Q], samples: int) -> list[Q]:
    """The first samples of a ratio in w, by long division.

    Powers of w common to both sides are taken off so that the division can begin; what is left of a
    denominator without a constant term raises ZeroDivisionError.
    """
    most = samples + powers_of_z(ratio)
    length = samples
    with_z = parts_with_z(ratio)
    while True:
        upper, lower = ratio_in(ratio, _Polynomials(numbers, length), with_z)
        skipped = next((at for at, value in enumerate(lower) if numbers.differ(value, numbers.zero)), None)
        if length >= (most if skipped is None else skipped + samples):
            break
        length = min(2 * length, most) if skipped is None else skipped + samples
    if skipped is None:
        raise ZeroDivisionError("the denominator of the ratio is zero")
    if any(numbers.differ(value, numbers.zero) for value in upper[:skipped]):
        raise ZeroDivisionError("the ratio is not causal")
    upper, lower = upper[skipped:], lower[skipped:]
    feedback = [(k, value) for k, value in enumerate(lower) if k and value != numbers.zero]
    response: list[Q] = []
    for n in range(max(0, samples - late)):
        value = upper[n] if n < len(upper) else numbers.zero
        for k, factor in feedback:
            if k > n:
                break
            value = value - factor * response[n - k]
        response.append(value / lower[0])
    return [numbers.zero] * min(late, samples) + response


def powers_of_z(ratio: Expression) -> int:
    """A bound for the degree of a ratio in z: its powers multiplied down, added along."""
    match ratio:
        case Name("z"):
            return 1
        case Power(base, exponent):
            return abs(exponent.numerator) * powers_of_z(base)
        case _:
            return sum(powers_of_z(part) for part in children(ratio))


def check_causal(ratio: Expression, coefficients: Mapping[str, Coefficient]) -> None:
    """Raises ZeroDivisionError, with the reason, for a ratio that no diagram can have at any values."""
    prime = drawn_prime("causal")
    residue = Valuation(ResidueArithmetic(prime, "causal"), coefficients, at_values=False)

    def value(expression: Expression) -> nmod:
        try:
            return nmod(residue(expression), prime)
        except ZeroDivisionError:
            raise ZeroDivisionError("the ratio divides by zero") from None

    _ratio_series(ratio, 0, Numbers(value, nmod(0, prime), nmod(1, prime), lambda a, b: a != b, str), 1)
