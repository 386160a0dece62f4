"""Elimination of the signals of one strongly connected component.

Signals without a loop of their own go first, fewest connections first: that leaves polynomials
and the determinant as they are. The rest is solved without fractions (Bareiss 1968). In a field a
signal with a loop of its own is divided by 1 - loop gain, and nothing is left over.
"""

from __future__ import annotations

import heapq
from typing import TypeVar

from flowgraph.algebra.ring import Ring

R = TypeVar("R")
K = TypeVar("K")


def solve_component(
    rows: list[dict[int, R]], right: list[dict[str, R]], wanted: list[int], ring: Ring[R]
) -> tuple[R, dict[int, dict[str, R]]]:
    """Solves s_i = sum of rows[i][j] * s_j + right[i], where right[i] gives a value per source.

    Returns det(I - rows) and, for each wanted i, the numerators of s_i per source over that
    determinant; in a field the values of s_i themselves. `rows` and `right` are used up. Raises
    ZeroDivisionError where a field has a zero pivot.
    """
    order, pivots, rest = _eliminate(rows, right, ring)
    needed = set(wanted)
    for j in order:
        if j in needed:
            needed.update(rows[j])
    determinant, values = _solve_without_fractions(rest, rows, right, needed.intersection(rest), ring)
    for pivot in pivots:
        determinant = ring.times(determinant, pivot)
    scale = ring.one if ring.invertible else determinant
    for j in reversed(order):
        if j in needed:
            numerators = {source: ring.times(scale, value) for source, value in right[j].items()}
            for k, factor in rows[j].items():
                for source, value in values[k].items():
                    _add(numerators, source, ring.times(factor, value), ring)
            values[j] = numerators
    return determinant, {at: values[at] for at in wanted}


def _eliminate(
    rows: list[dict[int, R]], right: list[dict[str, R]], ring: Ring[R]
) -> tuple[list[int], list[R], list[int]]:
    """Substitutes signals away: the order taken, the pivots divided by, and the signals left."""
    readers: list[set[int]] = [set() for _ in rows]
    for i, row in enumerate(rows):
        for j in row:
            readers[j].add(i)
    order: list[int] = []
    pivots: list[R] = []
    left = [True] * len(rows)
    queue = [(len(row) * len(readers[i]), i) for i, row in enumerate(rows)]
    heapq.heapify(queue)
    while queue:
        connections, j = heapq.heappop(queue)
        if not left[j] or (j in rows[j] and not ring.invertible):
            continue
        if connections < len(rows[j]) * len(readers[j]):
            heapq.heappush(queue, (len(rows[j]) * len(readers[j]), j))
            continue
        if j in rows[j]:
            pivot = ring.minus(ring.one, rows[j].pop(j))
            readers[j].discard(j)
            pivots.append(pivot)
            inverse = ring.quotient(ring.one, pivot)
            rows[j] = {k: ring.times(inverse, value) for k, value in rows[j].items()}
            right[j] = {source: ring.times(inverse, value) for source, value in right[j].items()}
        left[j] = False
        order.append(j)
        _substitute(j, rows, right, readers, ring)
        for neighbour in sorted({*readers[j], *rows[j]}):
            heapq.heappush(queue, (len(rows[neighbour]) * len(readers[neighbour]), neighbour))
    return order, pivots, [i for i, still in enumerate(left) if still]


def _substitute(
    j: int, rows: list[dict[int, R]], right: list[dict[str, R]], readers: list[set[int]], ring: Ring[R]
) -> None:
    """Puts what signal j equals in place of it, wherever it is read."""
    for k in rows[j]:
        readers[k].discard(j)
    for i in sorted(readers[j]):
        row = rows[i]
        factor = row.pop(j)
        for k, value in rows[j].items():
            product = ring.times(factor, value)
            if k in row:
                product = ring.plus(row[k], product)
            if product == ring.zero:
                del row[k]
                readers[k].discard(i)
            else:
                row[k] = product
                readers[k].add(i)
        for source, value in right[j].items():
            _add(right[i], source, ring.times(factor, value), ring)


def _add(values: dict[str, R], source: str, value: R, ring: Ring[R]) -> None:
    if source in values:
        value = ring.plus(values[source], value)
    if value == ring.zero:
        values.pop(source, None)
    else:
        values[source] = value


def _solve_without_fractions(
    rest: list[int], rows: list[dict[int, R]], right: list[dict[str, R]], wanted: set[int], ring: Ring[R]
) -> tuple[R, dict[int, dict[str, R]]]:
    """Fraction-free elimination of (I - rows) s = right, with rows scaled only when they are met.

    Bareiss multiplies every row by pivot/last pivot at every step. A row that does not read the
    pivot's signal would just be scaled, so it is left as it is with the pivot it was scaled by:
    dividing the next update by that pivot is exact. The pivots are principal minors; at w = 0 they
    are those of I - (delay-free wires), all 1 because no loop is delay-free, so none vanishes.
    """
    matrix = {i: {j: ring.minus(ring.zero, value) for j, value in rows[i].items()} for i in rest}
    for i in rest:
        matrix[i][i] = ring.plus(ring.one, matrix[i].get(i, ring.zero))
    scaled_by = dict.fromkeys(rest, ring.one)
    last = ring.one
    order: list[int] = []
    left = list(rest)
    while left:
        step = min(left, key=lambda i: (i in wanted, len(matrix[i]) * sum(i in matrix[k] for k in left), i))
        left.remove(step)
        order.append(step)
        line, constants = matrix[step], right[step]
        _rescale(line, last, scaled_by[step], ring)
        _rescale(constants, last, scaled_by[step], ring)
        pivot = line.pop(step)
        for i in left:
            factor = matrix[i].pop(step, ring.zero)
            if factor != ring.zero:
                _update(matrix[i], line, pivot, factor, scaled_by[i], ring)
                _update(right[i], constants, pivot, factor, scaled_by[i], ring)
                scaled_by[i] = pivot
        scaled_by[step] = last = pivot
    values: dict[int, dict[str, R]] = {}
    needed = set(wanted)
    for i in order:
        if i in needed:
            needed.update(matrix[i])
    for i in reversed(order):
        if i in needed:
            values[i] = _back_substituted(matrix[i], right[i], scaled_by[i], last, values, ring)
    return last, values


def _rescale(entries: dict[K, R], last: R, scaled_by: R, ring: Ring[R]) -> None:
    if last != scaled_by:
        for key, value in list(entries.items()):
            entries[key] = ring.quotient(ring.times(value, last), scaled_by)


def _update(entries: dict[K, R], line: dict[K, R], pivot: R, factor: R, scaled_by: R, ring: Ring[R]) -> None:
    """entries <- (pivot * entries - factor * line) / scaled_by, without those that vanish."""
    updated: dict[K, R] = {}
    for key in (*entries, *(key for key in line if key not in entries)):
        value = ring.times(pivot, entries[key]) if key in entries else ring.zero
        if key in line:
            value = ring.minus(value, ring.times(factor, line[key]))
        if value != ring.zero:
            updated[key] = ring.quotient(value, scaled_by)
    entries.clear()
    entries.update(updated)


def _back_substituted(
    line: dict[int, R],
    constants: dict[str, R],
    pivot: R,
    determinant: R,
    values: dict[int, dict[str, R]],
    ring: Ring[R],
) -> dict[str, R]:
    """The numerators of a signal over the determinant, from those of the signals it still reads."""
    numerators = {source: ring.times(determinant, value) for source, value in constants.items()}
    if not line:
        return constants if pivot == determinant else _divided(numerators, pivot, ring)
    for j, factor in line.items():
        for source, value in values[j].items():
            _add(numerators, source, ring.minus(ring.zero, ring.times(factor, value)), ring)
    return _divided(numerators, pivot, ring)


def _divided(numerators: dict[str, R], pivot: R, ring: Ring[R]) -> dict[str, R]:
    return {source: ring.quotient(value, pivot) for source, value in numerators.items()}
