"""Wires as points: their corners, where symbols cut them, whether boxes overlap."""

from __future__ import annotations

from itertools import pairwise

from flowgraph.draw.gains import LENGTH, Triangle
from flowgraph.draw.grid import CELL
from flowgraph.draw.picture import Box, Point
from flowgraph.draw.ports import STEP


def overlap(one: Box, other: Box) -> bool:
    return one[0] < other[2] and other[0] < one[2] and one[1] < other[3] and other[1] < one[3]


def corners(cells: list[tuple[int, int]]) -> list[tuple[int, int]]:
    kept = cells[:1]
    for before, here, after in zip(cells, cells[1:], cells[2:], strict=False):
        if (here[0] - before[0], here[1] - before[1]) != (after[0] - here[0], after[1] - here[1]):
            kept.append(here)
    return [*kept, cells[-1]]


def cut(centre: Point, towards: Point, border: tuple[float, float]) -> Point:
    """Where a wire that runs straight from a symbol's centre leaves the symbol."""
    (x, y), (to_x, to_y) = centre, towards
    right, down = (to_x > x) - (to_x < x), (to_y > y) - (to_y < y)
    return x + right * border[0], y + down * border[1]


def cut_out(points: list[Point], triangle: Triangle) -> list[list[Point]]:
    """A wire in two: up to the triangle's base, and from its tip on."""
    right, down = STEP[triangle.facing]
    x, y = triangle.x * CELL, triangle.y * CELL
    base = (x - right * LENGTH / 2, y - down * LENGTH / 2)
    tip = (x + right * LENGTH / 2, y + down * LENGTH / 2)
    for at, ((from_x, from_y), (to_x, to_y)) in enumerate(pairwise(points)):
        ahead = (to_x - from_x) * right + (to_y - from_y) * down
        along = (x - from_x) * right + (y - from_y) * down
        aside = abs((x - from_x) * down) + abs((y - from_y) * right)
        if ahead > 0 and 0 <= along <= ahead and aside < 0.5:
            return [[*points[: at + 1], base], [tip, *points[at + 1 :]]]
    return [points]
