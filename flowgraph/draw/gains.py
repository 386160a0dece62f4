"""Where a coefficient's triangle and label stand on a wire: on a straight run of its own, clear of all else."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from itertools import pairwise
from math import ceil, floor
from typing import TypeAlias

from flowgraph.draw.grid import CELL, Grid
from flowgraph.draw.labels import coefficient_label, text_width
from flowgraph.draw.model import Part
from flowgraph.draw.plan import COEFFICIENT_SIZE, Plan, Wire
from flowgraph.draw.rows import Side

Box: TypeAlias = tuple[float, float, float, float]

LENGTH, WIDTH = 21.0, 28.0
HALF_LENGTH, HALF_WIDTH = LENGTH / 2 / CELL, WIDTH / 2 / CELL
LABEL_HEIGHT = 14.0 / CELL
GAP, GAP_ASIDE = 0.25, 0.5
LONG_RUNG = 13
NOT_OURS = 0.8
BORDER = {"adder": 1.25, "delay": 2.25, "gain": HALF_LENGTH, "input": 1.0, "output": 1.0, "ellipsis": 2.0}
ARROW = 1.0
AFTER_BRANCH, BEFORE_BEND, BEFORE_ARROW, AFTER_SYMBOL = 0.7, 0.7, 0.4, 0.5


@dataclass(frozen=True, slots=True)
class Triangle:
    """Centre in cells, direction of flow, label and the sides it stands on; `run_start` indexes the wire's path."""

    x: float
    y: float
    facing: Side
    label: str
    label_before: bool
    run_start: int

    def upright(self) -> bool:
        return self.facing in "NS"

    def box(self) -> Box:
        """Left, top, right, bottom in cells."""
        half_x, half_y = (HALF_WIDTH, HALF_LENGTH) if self.upright() else (HALF_LENGTH, HALF_WIDTH)
        return self.x - half_x, self.y - half_y, self.x + half_x, self.y + half_y

    def label_box(self) -> Box:
        """The room of the coefficient: above or below a lying triangle, right or left of an upright one."""
        width = text_width(self.label, COEFFICIENT_SIZE) / CELL
        left, top, right, bottom = self.box()
        if self.upright():
            if self.label_before:
                return (
                    right + GAP_ASIDE,
                    self.y - LABEL_HEIGHT / 2,
                    right + GAP_ASIDE + width,
                    self.y + LABEL_HEIGHT / 2,
                )
            return left - GAP_ASIDE - width, self.y - LABEL_HEIGHT / 2, left - GAP_ASIDE, self.y + LABEL_HEIGHT / 2
        if self.label_before:
            return self.x - width / 2, top - GAP - LABEL_HEIGHT, self.x + width / 2, top - GAP
        return self.x - width / 2, bottom + GAP, self.x + width / 2, bottom + GAP + LABEL_HEIGHT

    def cells(self) -> tuple[int, int, int, int]:
        """The grid cells a wire must keep out of, a little more than the triangle."""
        return _cells(self.box(), 0.5)

    def label_cells(self) -> tuple[int, int, int, int]:
        return _cells(self.label_box(), 0.1)


def _cells(box: Box, clearance: float) -> tuple[int, int, int, int]:
    left, top, right, bottom = box
    return ceil(left - clearance), ceil(top - clearance), floor(right + clearance), floor(bottom + clearance)


def standing_triangle(x: int, y: int, facing: Side, part: Part) -> Triangle:
    """The triangle of a gain that is a symbol of its own, centred in a cell."""
    assert part.coefficient is not None
    return Triangle(x, y, facing, coefficient_label(part.coefficient), True, 0)


@dataclass(frozen=True, slots=True)
class _Run:
    """A straight run of a path: its first cell, its facing, from where to where the centre may be, where it best is."""

    first: int
    x: int
    y: int
    facing: Side
    low: float
    high: float
    wished: float
    last: bool

    def at(self, along: float) -> tuple[float, float]:
        match self.facing:
            case "E":
                return self.x + along, float(self.y)
            case "W":
                return self.x - along, float(self.y)
            case "S":
                return float(self.x), self.y + along
            case _:
                return float(self.x), self.y - along


def set_triangle(
    grid: Grid,
    plan: Plan,
    wire: Wire,
    cells: list[tuple[int, int]],
    private: int,
    from_symbol: bool,
    others: list[Triangle],
    symbols: list[Box],
) -> Triangle | None:
    """The best free place for the triangle on the path from its cell number `private` on, or None.

    `from_symbol` says that the path begins at the centre of a symbol there, not at a branch.
    """
    assert wire.link is not None
    assert wire.link.coefficient is not None
    label = coefficient_label(wire.link.coefficient)
    own = set(cells)
    best: tuple[float, Triangle] | None = None
    runs = _runs(plan, wire, cells, private, from_symbol)
    longest = max((run.high - run.low for run in runs if run.facing in "NS"), default=0.0)
    for run in runs:
        upright = run.facing in "NS"
        favoured = run.high - run.low >= longest if wire.upright else run.last
        for along in _positions(run, others):
            x, y = run.at(along)
            for before in (True, False):
                triangle = Triangle(x, y, run.facing, label, before, run.first)
                cost = abs(along - run.wished) + (0.0 if upright == wire.upright else 7.0) + (0.0 if favoured else 1.0)
                cost += (0.0 if before else 2.0) + _misalignment(triangle, others)
                if best is not None and cost >= best[0]:
                    continue
                if not _is_free(grid, triangle.cells(), own) or _meets(triangle.box(), others, 0.5):
                    continue
                if not _is_free(grid, triangle.label_cells(), own) or _meets(
                    triangle.label_box(), others, 0.1, symbols
                ):
                    cost += 8.0
                elif _meets(triangle.label_box(), others, NOT_OURS) or _meets(triangle.box(), others, NOT_OURS):
                    cost += 3.0
                if best is None or cost < best[0]:
                    best = (cost, triangle)
    return None if best is None else best[1]


def _misalignment(triangle: Triangle, others: list[Triangle]) -> float:
    """Less than nothing when in line with a triangle already set, more when nearly so."""
    alike = [other for other in others if other.upright() == triangle.upright()]
    if any(other.x == triangle.x or other.y == triangle.y for other in alike):
        return -1.2
    nearly = any(abs(other.x - triangle.x) < 1 for other in alike if not triangle.upright())
    return 3.0 if nearly else 0.0


def _positions(run: _Run, others: list[Triangle]) -> Iterator[float]:
    """Centres to try: the wished one, steps of half a cell, and those in line with triangles already set."""
    if run.low > run.high:
        return
    yield min(max(run.wished, run.low), run.high)
    steps = floor((run.high - run.low) * 2)
    yield from (run.low + step / 2 for step in range(steps + 1))
    for other in others:
        along = {"E": other.x - run.x, "W": run.x - other.x, "S": other.y - run.y, "N": run.y - other.y}[run.facing]
        if run.low <= along <= run.high:
            yield along


def _runs(plan: Plan, wire: Wire, cells: list[tuple[int, int]], private: int, from_symbol: bool) -> list[_Run]:
    """The straight runs of the private part that are long enough for a triangle."""
    bends = [private]
    for at in range(private + 1, len(cells) - 1):
        before, here, after = cells[at - 1], cells[at], cells[at + 1]
        if (here[0] - before[0], here[1] - before[1]) != (after[0] - here[0], after[1] - here[1]):
            bends.append(at)
    bends.append(len(cells) - 1)
    runs = []
    for number, (first, last) in enumerate(pairwise(bends)):
        (x, y), (to_x, to_y) = cells[first], cells[last]
        length = abs(to_x - x) + abs(to_y - y)
        facing: Side = "E" if to_x > x else "W" if to_x < x else "S" if to_y > y else "N"
        low = HALF_LENGTH + AFTER_BRANCH
        if from_symbol and number == 0:
            low = BORDER[plan.spots[wire.source].kind] + AFTER_SYMBOL + HALF_LENGTH
        target = plan.spots[wire.target].kind
        is_last = number == len(bends) - 2
        high = length - BEFORE_BEND - HALF_LENGTH
        if is_last:
            arrow = 0.0 if target == "gain" else ARROW
            high = length - BORDER[target] - arrow - BEFORE_ARROW - HALF_LENGTH
        wished = (length - 18 / CELL) / 2
        if wire.upright and facing in "NS" and length >= LONG_RUNG:
            wished = length * (0.6 if facing == "N" else 0.5)
        runs.append(_Run(first, x, y, facing, low, high, wished, is_last))
    return runs


def _is_free(grid: Grid, cells: tuple[int, int, int, int], own: set[tuple[int, int]]) -> bool:
    left, top, right, bottom = cells
    if left < 0 or top < 0 or right >= grid.width or bottom >= grid.height:
        return False
    for y in range(top, bottom + 1):
        for x in range(left, right + 1):
            cell = grid.cell(x, y)
            if (x, y) in own:
                if grid.across[cell] >= 0 and grid.upright[cell] >= 0:
                    return False
            elif grid.blocked[cell] or grid.across[cell] >= 0 or grid.upright[cell] >= 0:
                return False
    return True


def _meets(box: Box, others: list[Triangle], clearance: float, symbols: Sequence[Box] = ()) -> bool:
    """Whether a box comes closer than `clearance` to a triangle or a coefficient already set."""
    left, top, right, bottom = box
    taken = [box for other in others for box in (other.box(), other.label_box())]
    return any(
        left - clearance < other_right
        and other_left < right + clearance
        and top - clearance < other_bottom
        and other_top < bottom + clearance
        for other_left, other_top, other_right, other_bottom in (*taken, *symbols)
    )
