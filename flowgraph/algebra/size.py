"""How large a polynomial identity is: its degree and the height of its numbers, bounded from above.

From these follows how unlikely it is that two different behaviours agree at a random point modulo a
random prime (Schwartz 1980, Zippel 1979).
"""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction
from math import floor, log2

from flowgraph.algebra.solve import wires
from flowgraph.algebra.valuation import Valuation
from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.elements import Delay, Input
from flowgraph.diagram.expression import Expression, Function


@dataclass(frozen=True, slots=True)
class Size:
    """Bounds for a quotient of polynomials: degrees, and bits of the sum of absolute coefficients."""

    upper_degree: int
    lower_degree: int
    upper_bits: int
    lower_bits: int


class SizeArithmetic:
    """Values expressions by their size."""

    def number(self, value: Fraction) -> Size:
        return Size(0, 0, value.numerator.bit_length(), value.denominator.bit_length())

    def symbol(self, name: str) -> Size:
        return Size(1, 0, 1, 1)

    def pi(self) -> Size:
        return self.symbol("pi")

    def function(self, function: Function, argument: Size) -> Size:
        return self.symbol(function.name)

    def root_of(self, base: Size, exponent: Fraction) -> Size:
        return self.symbol("root")

    def add(self, left: Size, right: Size) -> Size:
        return Size(
            max(left.upper_degree + right.lower_degree, right.upper_degree + left.lower_degree),
            left.lower_degree + right.lower_degree,
            max(left.upper_bits + right.lower_bits, right.upper_bits + left.lower_bits) + 1,
            left.lower_bits + right.lower_bits,
        )

    def multiply(self, left: Size, right: Size) -> Size:
        return Size(
            left.upper_degree + right.upper_degree,
            left.lower_degree + right.lower_degree,
            left.upper_bits + right.upper_bits,
            left.lower_bits + right.lower_bits,
        )

    def divide(self, upper: Size, lower: Size) -> Size:
        turned = Size(lower.lower_degree, lower.upper_degree, lower.lower_bits, lower.upper_bits)
        return self.multiply(upper, turned)


@dataclass(frozen=True, slots=True)
class Extent:
    """Degree and bits of a determinant or response, in w and all symbols together."""

    degree: int
    bits: int

    def __add__(self, other: Extent) -> Extent:
        return Extent(self.degree + other.degree, self.bits + other.bits)


def extent_of_diagram(diagram: Diagram) -> Extent:
    """Bounds for every response of a diagram, numerator or denominator: one row after the other."""
    size = Valuation(SizeArithmetic(), diagram.coefficients, at_values=False)
    total = Extent(0, 0)
    for element in diagram.elements.values():
        if isinstance(element, Input):
            continue
        for term in wires(element):
            expressions: list[Expression] = [] if term.coefficient is None else [term.coefficient]
            source = diagram.elements[term.signal.name]
            if isinstance(source, Delay):
                expressions.extend(source.starts[: term.signal.tap])
            sizes = [size(expression) for expression in expressions]
            total += Extent(
                term.signal.tap + sum(known.upper_degree + known.lower_degree for known in sizes),
                1 + sum(known.upper_bits + known.lower_bits for known in sizes),
            )
    return total


def error_below(extent: Extent, draws: int) -> int:
    """k such that an identity test at `draws` points and primes errs with probability below 2^-k.

    One draw errs where the point is a root (at most degree / 2^60 of them) or where the prime divides
    the difference: an integer of B bits has at most B / 60 divisors among the more than 2^54 primes
    between 2^60 and 2^61.
    """
    chance = (extent.degree + 1) / 2.0**60 + (extent.bits / 60 + 1) / 2.0**54
    return max(0, floor(-draws * log2(chance)))
