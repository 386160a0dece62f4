"""Anything that answers inputs: a diagram, or a ratio in z^-1 that a claim states."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from hashlib import sha256
from typing import Protocol, TypeVar

from flowgraph.algebra.ring import Ring
from flowgraph.algebra.size import Extent, SizeArithmetic, extent_of_diagram
from flowgraph.algebra.solve import solve
from flowgraph.algebra.valuation import Valuation
from flowgraph.diagram.diagram import Coefficient, Diagram
from flowgraph.diagram.elements import expressions_of
from flowgraph.diagram.expression import (
    Expression,
    Name,
    Negative,
    Power,
    Product,
    Quotient,
    Sum,
    children,
)

R = TypeVar("R")
Pair = tuple[str, str]
"""An output and a source: an input, or solve.STARTS."""


class Behaviour(Protocol):
    """Responses over any ring, and how large they can be."""

    def expressions(self) -> list[Expression]: ...
    def responses(self, ring: Ring[R], pairs: list[Pair]) -> dict[Pair, tuple[R, list[R]]]: ...
    def extent(self) -> Extent: ...
    def fingerprint(self) -> str: ...


@dataclass(frozen=True, slots=True)
class DiagramBehaviour:
    """What a diagram does."""

    diagram: Diagram

    def expressions(self) -> list[Expression]:
        """All coefficients and starting contents, each once, in the order of the file."""
        elements = self.diagram.elements.values()
        return list(dict.fromkeys(expression for element in elements for expression in expressions_of(element)))

    def responses(self, ring: Ring[R], pairs: list[Pair]) -> dict[Pair, tuple[R, list[R]]]:
        solution = solve(self.diagram, ring, dict.fromkeys(output for output, _ in pairs))
        return {(output, source): solution.pair(output, source, ring) for output, source in pairs}

    def extent(self) -> Extent:
        return extent_of_diagram(self.diagram)

    def fingerprint(self) -> str:
        digest = sha256()
        for element in self.diagram.elements.values():
            digest.update(repr(element).encode())
        for output in self.diagram.outputs.values():
            digest.update(repr(output).encode())
        return digest.hexdigest()


@dataclass(frozen=True, slots=True)
class RatioBehaviour:
    """`ratio` in z, `late` samples later, as the response of every pair asked for."""

    ratio: Expression
    late: int
    coefficients: Mapping[str, Coefficient]

    def expressions(self) -> list[Expression]:
        """The largest parts of the ratio that do not read z."""
        found: dict[Expression, None] = {}
        with_z = parts_with_z(self.ratio)
        waiting = [self.ratio]
        while waiting:
            part = waiting.pop()
            if id(part) not in with_z:
                found[part] = None
            else:
                waiting.extend(children(part))
        return list(found)

    def responses(self, ring: Ring[R], pairs: list[Pair]) -> dict[Pair, tuple[R, list[R]]]:
        upper, lower = ratio_in(self.ratio, ring, parts_with_z(self.ratio))
        return dict.fromkeys(pairs, (ring.times(upper, ring.late(self.late)), [lower]))

    def extent(self) -> Extent:
        size = Valuation(SizeArithmetic(), self.coefficients, at_values=False)(self.ratio)
        degree = size.upper_degree + size.lower_degree + self.late + _late_bound(self.ratio)
        return Extent(degree, size.upper_bits + size.lower_bits)

    def fingerprint(self) -> str:
        return sha256(repr((self.ratio, self.late)).encode()).hexdigest()


def _late_bound(expression: Expression) -> int:
    """The powers of z in an expression, added up: what they can add to a degree."""
    total = 0
    waiting = [expression]
    while waiting:
        part = waiting.pop()
        if isinstance(part, Power):
            total += abs(part.exponent.numerator)
        waiting.extend(children(part))
    return total


def parts_with_z(expression: Expression) -> set[int]:
    """The identities of all parts of an expression that read z, found in one walk."""
    found: set[int] = set()
    walk = [(expression, False)]
    while walk:
        part, entered = walk.pop()
        if entered:
            if part == Name("z") or any(id(inner) in found for inner in children(part)):
                found.add(id(part))
        else:
            walk.append((part, True))
            walk.extend((inner, False) for inner in children(part))
    return found


def ratio_in(expression: Expression, ring: Ring[R], with_z: set[int]) -> tuple[R, R]:
    """Numerator and denominator of a ratio in z over a ring that knows w = z^-1.

    `with_z` are the parts_with_z of the ratio.
    """
    if id(expression) not in with_z:
        return ring.coefficient(expression), ring.one
    match expression:
        case Name():
            return ring.one, ring.late(1)
        case Sum(terms):
            upper, lower = ratio_in(terms[0], ring, with_z)
            for term in terms[1:]:
                other_upper, other_lower = ratio_in(term, ring, with_z)
                if other_lower == lower:
                    upper = ring.plus(upper, other_upper)
                else:
                    upper = ring.plus(ring.times(upper, other_lower), ring.times(other_upper, lower))
                    lower = ring.times(lower, other_lower)
            return upper, lower
        case Product(factors):
            upper, lower = ratio_in(factors[0], ring, with_z)
            for factor in factors[1:]:
                other_upper, other_lower = ratio_in(factor, ring, with_z)
                upper, lower = ring.times(upper, other_upper), ring.times(lower, other_lower)
            return upper, lower
        case Negative(inner):
            upper, lower = ratio_in(inner, ring, with_z)
            return ring.minus(ring.zero, upper), lower
        case Quotient(above, below):
            upper, lower = ratio_in(above, ring, with_z)
            other_upper, other_lower = ratio_in(below, ring, with_z)
            if other_upper == ring.zero:
                raise ZeroDivisionError("the ratio divides by zero")
            return ring.times(upper, other_lower), ring.times(lower, other_upper)
        case Power(base, exponent):
            return _power(ratio_in(base, ring, with_z), exponent.numerator, base, ring)
        case _:
            raise ValueError(f"no ratio in z: {expression}")


def _power(value: tuple[R, R], exponent: int, base: Expression, ring: Ring[R]) -> tuple[R, R]:
    if base == Name("z"):
        late = ring.late(abs(exponent))
        return (late, ring.one) if exponent < 0 else (ring.one, late)
    upper, lower = value
    result_upper, result_lower = ring.one, ring.one
    for _ in range(abs(exponent)):
        result_upper, result_lower = ring.times(result_upper, upper), ring.times(result_lower, lower)
    return (result_upper, result_lower) if exponent >= 0 else (result_lower, result_upper)
