"""Whether two behaviours are equal for every value of the coefficients.

Exactly where the polynomials stay small enough, else by an identity test: both are valued at random
points modulo random 61-bit primes, and the answer carries the bound of its error.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from hashlib import sha256
from typing import Literal, TypeVar

from flowgraph.algebra.behaviour import Behaviour, DiagramBehaviour
from flowgraph.algebra.exact_rings import TooLarge, exact_ring
from flowgraph.algebra.rational_functions import Undefined
from flowgraph.algebra.residues import Residues, drawn_prime
from flowgraph.algebra.ring import ExactRing, Polynomial, Ring
from flowgraph.algebra.size import error_below
from flowgraph.algebra.solve import STARTS
from flowgraph.diagram.diagram import Coefficient, Diagram

Method = Literal["exact", "identity test"]
R = TypeVar("R")

DRAWS = 2
"""Points and primes of an identity test."""

RETRIES = 20
"""Further draws when a point happens to be a pole."""


@dataclass(frozen=True, slots=True)
class Comparison:
    """Equal or not, by which road, and the first (output, source) that differs; source "" is the starts.

    `error_below` is k in "error below 2^-k" of an identity test that found no difference, else 0.
    """

    equal: bool
    method: Method
    error_below: int = 0
    differs_at: tuple[str, str] | None = None


def compare(left: Diagram, right: Diagram) -> Comparison:
    """Compares all responses of two diagrams with the same ports, starting contents included."""
    sources = [*(port.name for port in left.inputs()), STARTS]
    pairs = [(output, source) for output in left.outputs for source in sources]
    coefficients = {**left.coefficients, **right.coefficients}
    return compare_behaviours(DiagramBehaviour(left), DiagramBehaviour(right), pairs, coefficients)


def compare_behaviours(
    left: Behaviour,
    right: Behaviour,
    pairs: list[tuple[str, str]],
    coefficients: Mapping[str, Coefficient],
) -> Comparison:
    """Compares the responses of the given (output, source) pairs."""
    try:
        ring = exact_ring(coefficients, [*left.expressions(), *right.expressions()])
        return _compare_exactly(left, right, pairs, ring)
    except TooLarge:
        return _identity_test(left, right, pairs, coefficients)


def _compare_exactly(
    left: Behaviour, right: Behaviour, pairs: list[tuple[str, str]], ring: ExactRing[Polynomial]
) -> Comparison:
    left_responses = left.responses(ring, pairs)
    right_responses = right.responses(ring, pairs)
    for pair in pairs:
        if not _equal(*left_responses[pair], *right_responses[pair], ring):
            return Comparison(False, "exact", differs_at=pair)
    return Comparison(True, "exact")


def _equal(upper: R, lowers: list[R], other_upper: R, other_lowers: list[R], ring: ExactRing[R]) -> bool:
    """upper / product(lowers) = other_upper / product(other_lowers), shared factors taken out first."""
    mine, others = list(lowers), list(other_lowers)
    for factor in lowers:
        if factor in others:
            others.remove(factor)
            mine.remove(factor)
    left = _product(upper, others, ring)
    right = _product(other_upper, mine, ring)
    if left == right:
        return True
    cleared_left, cleared_right = ring.cleared(left, right)
    return cleared_left == cleared_right


def _product(first: R, factors: list[R], ring: Ring[R]) -> R:
    for factor in factors:
        first = ring.times(first, factor)
    return first


def _identity_test(
    left: Behaviour,
    right: Behaviour,
    pairs: list[tuple[str, str]],
    coefficients: Mapping[str, Coefficient],
) -> Comparison:
    seed = sha256(f"{left.fingerprint()}{right.fingerprint()}".encode()).hexdigest()
    done = tries = 0
    while done < DRAWS:
        point = f"{seed}/{tries}"
        tries += 1
        ring = Residues(coefficients, drawn_prime(point), point)
        try:
            values = left.responses(ring, pairs)
            other_values = right.responses(ring, pairs)
            for pair in pairs:
                if _value(*values[pair], ring) != _value(*other_values[pair], ring):
                    return Comparison(False, "identity test", differs_at=pair)
        except ZeroDivisionError:
            if tries > RETRIES:
                raise Undefined("a coefficient divides by zero whatever its values") from None
            continue
        done += 1
    return Comparison(True, "identity test", error_below(left.extent() + right.extent(), DRAWS))


def _value(upper: int, lowers: list[int], ring: Residues) -> int:
    return ring.quotient(upper, _product(ring.one, lowers, ring))
