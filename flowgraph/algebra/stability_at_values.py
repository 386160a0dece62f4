"""The stability of a whole diagram at the numbers of its file, hidden modes included."""

from __future__ import annotations

from dataclasses import dataclass

from flint import arb, arb_mat, ctx, fmpq_poly, fmpz_poly

from flowgraph.algebra.exact_rings import NumberPolynomials
from flowgraph.algebra.modes import CELL_LIMIT, is_semisimple
from flowgraph.algebra.numbers import numbered
from flowgraph.algebra.rational_functions import symbolic_valuation
from flowgraph.algebra.ring import Operators
from flowgraph.algebra.solve import determinants
from flowgraph.algebra.stability import Stability, stability_of_factors
from flowgraph.algebra.states import cells_of, state_matrices
from flowgraph.algebra.transfer import factors_in_z, roots_in_z
from flowgraph.algebra.values import Values
from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.expression import Expression

BALL_BITS = 1024
BALL_CELLS = 120
"""Cells up to which coefficients that are no fractions are decided by certified balls."""


@dataclass(frozen=True, slots=True)
class StabilityVerdict:
    """`stability` is None where it is not told; `exact` when fractions decided.

    Not told are certified balls that touch the limit, and repeated modes on the circle among more
    than CELL_LIMIT cells.

    `largest` is the pole of largest radius as (real, imaginary), for reading only; None without poles.
    """

    stability: Stability | None
    exact: bool
    largest: tuple[float, float] | None


def stability_at_values(diagram: Diagram) -> StabilityVerdict:
    """Every mode of every cell, at the values of the coefficients.

    Raises OpenCoefficientError where one has no value, TooLarge beyond the work limit.
    """
    numbers = numbered(diagram)
    factors = characteristic_factors(numbers.diagram)
    largest = _largest(factors)
    if not numbers.exact:
        return StabilityVerdict(_certified(diagram), False, largest)
    stability, repeated = stability_of_factors(factors)
    if repeated.degree() > 0:
        # Modes that occur twice on the circle grow only where one drives the other.
        if len(cells_of(diagram)) > CELL_LIMIT:
            return StabilityVerdict(None, True, largest)
        if _harmless(numbers.diagram, repeated):
            stability = "marginal"
    return StabilityVerdict(stability, True, largest)


def characteristic_factors(diagram: Diagram) -> list[fmpq_poly]:
    """det(I - W) of every loop group of a diagram with numbers, as polynomials in w = z^-1."""
    ring = NumberPolynomials(symbolic_valuation(diagram.coefficients))
    return determinants(diagram, ring)


def _largest(factors: list[fmpq_poly]) -> tuple[float, float] | None:
    """The pole of largest radius; long sparse lines are told through p(w^m) by their m-th roots."""
    found: list[tuple[float, float]] = []
    for factor, _ in factors_in_z([p for p in factors if p.degree() <= 400], 0):
        found.extend((real, imaginary) for real, imaginary, _ in roots_in_z(factor))
    return max(found, key=lambda root: (root[0] ** 2 + root[1] ** 2, root[0], root[1]), default=None)


def _harmless(diagram: Diagram, repeated: fmpz_poly) -> bool:
    """Whether repeated modes on the circle do not drive each other: then they stay bounded."""
    return all(
        is_semisimple(diagram, fmpz_poly(factor.coeffs()[::-1]), "repeated modes") for factor, _ in repeated.factor()[1]
    )


class _BallRing(Operators[arb]):
    """Certified real balls for sums and products of coefficients."""

    invertible = False

    def __init__(self, values: Values) -> None:
        self.zero = arb(0)
        self.one = arb(1)
        self._values = values

    def coefficient(self, expression: Expression) -> arb:
        return self._values.ball(expression, BALL_BITS)

    def late(self, samples: int) -> arb:
        raise TypeError("cells are states here, not powers of w")

    def quotient(self, upper: arb, lower: arb) -> arb:
        return upper / lower


def _certified(diagram: Diagram) -> Stability | None:
    """Schur-Cohn on the characteristic polynomial in balls; None where a ball touches a limit."""
    with ctx.workprec(BALL_BITS):
        states = state_matrices(diagram, _BallRing(Values(diagram.coefficients)))
        size = len(states.cells)
        if size > BALL_CELLS:
            return None
        dense = [[row.get(column, arb(0)) for column in range(size)] for row in states.a]
        row = list(arb_mat(dense).charpoly().coeffs())[::-1] if size else [arb(1)]
        while len(row) > 1:
            first, last = row[0], row[-1]
            if abs(last) > abs(first):
                return "unstable"
            if not abs(last) < abs(first):
                return None
            row = [row[k] - last / first * row[len(row) - 1 - k] for k in range(len(row) - 1)]
        return "stable"
