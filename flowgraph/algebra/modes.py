"""The modes of a diagram: which ones no input moves or no output shows, and how few cells would do.

Polynomials of modes are exact. Ranks are taken modulo a random 61-bit prime, at the numbers given:
they are the true ranks unless that prime happens to divide a minor.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from flint import fmpz_poly, nmod_mat, nmod_poly

from flowgraph.algebra.residues import Residues, drawn_prime
from flowgraph.algebra.states import Cell, States, state_matrices
from flowgraph.diagram.diagram import Diagram

CELL_LIMIT = 400
"""Cells up to which hidden modes are looked for: the matrices are dense."""

Why = Literal["no input moves it", "no output shows it"]


@dataclass(frozen=True, slots=True)
class HiddenMode:
    """`factor` in z holds the hidden modes, `multiplicity` of each; `cells` are those they live in."""

    factor: fmpz_poly
    multiplicity: int
    why: Why
    cells: tuple[Cell, ...]


@dataclass(frozen=True, slots=True)
class Modes:
    """`order` is the least number of cells with the same behaviour from the same starting contents."""

    order: int
    hidden: tuple[HiddenMode, ...]


def modes(diagram: Diagram, factors: list[tuple[fmpz_poly, int]], seed: str) -> Modes:
    """Minimal order and hidden modes of a diagram with numbers for coefficients.

    `factors` are the irreducible factors in z of its characteristic polynomial with multiplicities.
    A mode is hidden when it is uncontrollable or unobservable (Kalman 1963). An input, here, is also
    the pulse that the starting contents stand for. Raises ValueError beyond CELL_LIMIT cells.
    """
    prime = drawn_prime(seed)
    states = state_matrices(diagram, Residues(diagram.coefficients, prime, seed))
    if len(states.cells) > CELL_LIMIT:
        raise ValueError(f"more than {CELL_LIMIT} cells")
    if not states.cells:
        return Modes(0, ())
    a, b, c = _matrices(states, prime)
    moved = _reachable(a, b, prime)
    moved_a, moved_c = _restricted(a, moved, prime), c * moved
    seen = _reachable(moved_a.transpose(), moved_c.transpose(), prime)
    seen_a = _restricted(moved_a.transpose(), seen, prime)
    moved_poly, seen_poly = _charpoly(moved_a, prime), _charpoly(seen_a, prime)
    unmoved = _annihilator(moved)
    unseen = _annihilator(_reachable(a.transpose(), c.transpose(), prime))
    hidden: list[HiddenMode] = []
    for factor, multiplicity in factors:
        controllable = _multiplicity(factor, moved_poly, multiplicity, prime)
        observable = _multiplicity(factor, seen_poly, controllable, prime)
        if controllable < multiplicity:
            left = _kernel_within(_value_at(factor, a.transpose(), multiplicity, prime), unmoved)
            right = _value_at(factor, a, multiplicity, prime)
            cells = _support(left) & _support(_kernel(right))
            hidden.append(_hidden(factor, multiplicity - controllable, "no input moves it", cells, states))
        if observable < controllable:
            right = _value_at(factor, a, multiplicity, prime)
            cells = _support(_kernel_within(right, unseen))
            hidden.append(_hidden(factor, controllable - observable, "no output shows it", cells, states))
    return Modes(seen_a.nrows(), tuple(hidden))


def _hidden(factor: fmpz_poly, multiplicity: int, why: Why, cells: set[int], states: States[int]) -> HiddenMode:
    return HiddenMode(factor, multiplicity, why, tuple(states.cells[at] for at in sorted(cells)))


def _matrices(states: States[int], prime: int) -> tuple[nmod_mat, nmod_mat, nmod_mat]:
    """A, B with the starting contents as its last column, and C."""
    size = len(states.cells)
    inputs = 1 + max((column for rows in (states.b, states.d) for row in rows for column in row), default=-1)
    a = _dense(states.a, size, prime)
    b = _dense([{**row, inputs: start} for row, start in zip(states.b, states.starts, strict=True)], inputs + 1, prime)
    return a, b, _dense(states.c, size, prime)


def _dense(rows: list[dict[int, int]], columns: int, prime: int) -> nmod_mat:
    entries = [row.get(column, 0) for row in rows for column in range(columns)]
    return nmod_mat(len(rows), columns, entries, prime)


def _columns(matrix: nmod_mat) -> list[list[int]]:
    return [[int(value) for value in row] for row in matrix.transpose().tolist()]


def _from_columns(columns: list[list[int]], height: int, prime: int) -> nmod_mat:
    entries = [column[row] for row in range(height) for column in columns]
    return nmod_mat(height, len(columns), entries, prime)


def _reachable(a: nmod_mat, b: nmod_mat, prime: int) -> nmod_mat:
    """A basis (as columns) of the span of B, AB, A^2 B ..., grown until it no longer grows."""
    basis = _independent(_columns(b), a.nrows(), prime)
    power = a
    while True:
        # If S spans B .. A^(k-1) B, then S + A^k S spans twice as many powers; it stops growing
        # only when A^k B already lies in S, that is when S is invariant.
        grown = _independent([*_columns(basis), *_columns(power * basis)], a.nrows(), prime)
        if grown.ncols() == basis.ncols():
            return basis
        basis = grown
        power = power * power


def _independent(columns: list[list[int]], height: int, prime: int) -> nmod_mat:
    """The first columns that are independent of those before them."""
    if not columns:
        return nmod_mat(height, 0, [], prime)
    echelon, rank = _from_columns(columns, height, prime).rref()
    kept: list[int] = []
    for row in range(rank):
        kept.append(next(column for column in range(len(columns)) if int(echelon[row, column]) != 0))
    return _from_columns([columns[at] for at in kept], height, prime)


def _restricted(a: nmod_mat, basis: nmod_mat, prime: int) -> nmod_mat:
    """The matrix of A on an invariant subspace, in the coordinates of the basis."""
    size = basis.ncols()
    if size == 0:
        return nmod_mat(0, 0, [], prime)
    chosen = _pivot_rows(basis)
    image = a * basis
    square = nmod_mat(size, size, [int(basis[row, column]) for row in chosen for column in range(size)], prime)
    target = nmod_mat(size, size, [int(image[row, column]) for row in chosen for column in range(size)], prime)
    return square.solve(target)


def _pivot_rows(basis: nmod_mat) -> list[int]:
    echelon, rank = basis.transpose().rref()
    return [next(at for at in range(basis.nrows()) if int(echelon[row, at]) != 0) for row in range(rank)]


def _charpoly(matrix: nmod_mat, prime: int) -> nmod_poly:
    return matrix.charpoly() if matrix.nrows() else nmod_poly([1], prime)


def _multiplicity(factor: fmpz_poly, polynomial: nmod_poly, most: int, prime: int) -> int:
    """How often a factor divides a polynomial modulo the prime, at most `most` times."""
    divisor = nmod_poly([int(value) % prime for value in factor.coeffs()], prime)
    times = 0
    while times < most and polynomial.degree() >= divisor.degree() and not (polynomial % divisor):
        polynomial = polynomial // divisor
        times += 1
    return times


def _value_at(factor: fmpz_poly, a: nmod_mat, power: int, prime: int) -> nmod_mat:
    """factor(A)^power, by Horner's rule."""
    size = a.nrows()
    identity = nmod_mat(size, size, [int(row == column) for row in range(size) for column in range(size)], prime)
    total = nmod_mat(size, size, [0] * (size * size), prime)
    for value in reversed([int(value) % prime for value in factor.coeffs()]):
        total = total * a + identity * value
    result = identity
    for _ in range(power):
        result = result * total
    return result


def _kernel(matrix: nmod_mat) -> nmod_mat:
    """A basis (as columns) of the vectors that the matrix sends to zero."""
    space, nullity = matrix.nullspace()
    kept = _columns(space)[:nullity]
    return _from_columns(kept, matrix.ncols(), matrix.modulus())


def _annihilator(basis: nmod_mat) -> nmod_mat:
    """A basis of the vectors orthogonal to all columns of `basis`."""
    if basis.ncols() == 0:
        size = basis.nrows()
        entries = [int(row == column) for row in range(size) for column in range(size)]
        return nmod_mat(size, size, entries, basis.modulus())
    return _kernel(basis.transpose())


def _kernel_within(matrix: nmod_mat, space: nmod_mat) -> nmod_mat:
    """The vectors of a space that the matrix sends to zero."""
    return space * _kernel(matrix * space) if space.ncols() else space


def _support(space: nmod_mat) -> set[int]:
    """The places at which some vector of the space is not zero."""
    return {row for row in range(space.nrows()) if any(int(space[row, column]) != 0 for column in range(space.ncols()))}


def is_semisimple(diagram: Diagram, factor: fmpz_poly, seed: str) -> bool:
    """Whether modes at the roots of `factor` (in z) never drive each other: factor(A) has full nullity.

    That is, the kernel of factor(A) is the kernel of factor(A)^2. For up to CELL_LIMIT cells.
    """
    prime = drawn_prime(seed)
    states = state_matrices(diagram, Residues(diagram.coefficients, prime, seed))
    a = _dense(states.a, len(states.cells), prime)
    return bool(_value_at(factor, a, 1, prime).rank() == _value_at(factor, a, 2, prime).rank())
