"""The plan of a picture: spots on a grid of columns and half rows, and the wires asked for between them.

Placement fills it, routing draws it. An adder with many inputs is split here, for display only:
one circle for each row that brings inputs, chained upwards.
"""

from __future__ import annotations

from dataclasses import dataclass, field

from flowgraph.draw.labels import coefficient_label, text_width
from flowgraph.draw.model import Kind, Link, Sketch
from flowgraph.draw.rows import Rows, Side

COLUMN = 48.0
COEFFICIENT_SIZE = 12.0
PORT_SIZE = 13.0


@dataclass(slots=True)
class Spot:
    """One symbol at a column and a half row. `top` is False for the lower circles of a split adder."""

    part: int
    kind: Kind
    line: int
    facing: Side
    column: int = 0
    top: bool = True
    ports: dict[int, Side] = field(default_factory=dict)
    exit: Side | None = None


@dataclass(slots=True)
class Wire:
    """A connection between two spots; `link` is None between the circles of one adder.

    `tap` is the column at which it leaves its net's row line, `lane` the half row it should run in,
    `upright` asks for its triangle on a vertical run, `rail` marks the forward path.
    """

    source: int
    target: int
    link: Link | None
    rail: bool = False
    upright: bool = False
    lane: int | None = None
    tap: int | None = None


@dataclass(slots=True)
class Plan:
    """Spots and wires. `taps[s]` are the columns where the net of spot s may be left, on half row `tap_line[s]`."""

    sketch: Sketch
    spots: list[Spot] = field(default_factory=list)
    wires: list[Wire] = field(default_factory=list)
    taps: dict[int, list[int]] = field(default_factory=dict)
    tap_line: dict[int, int] = field(default_factory=dict)
    forward: tuple[int, ...] = ()

    def dump(self) -> str:
        """The grid as text, one spot a line in the order of the file: what stands in which column and half row."""
        lines = []
        for number, spot in enumerate(self.spots):
            taps = " ".join(f"@{column}" for column in self.taps.get(number, []))
            name = self.sketch.parts[spot.part].name + ("" if spot.top else "'")
            lines.append(f"{spot.kind} {name}: {spot.column},{spot.line} {spot.facing} {taps}".rstrip())
        return "\n".join(lines)


def columns_for(link: Link | None) -> int:
    """How many columns a wire needs: room for a triangle and the coefficient above it, else one."""
    if link is None or link.coefficient is None:
        return 1
    width = text_width(coefficient_label(link.coefficient), COEFFICIENT_SIZE)
    return max(2, int(-(-(width + 46) // COLUMN)))


def add_spots(plan: Plan, rows: Rows) -> tuple[list[int], dict[int, int]]:
    """Spots for all parts; returns the spot each part's signal leaves from, and the spot each link enters."""
    leaves: list[int] = []
    enters: dict[int, int] = {}
    for number, part in enumerate(rows.sketch.parts):
        line = rows.line(number)
        if part.kind == "delay" and rows.facing[number] == "S":
            line -= 1
        elif part.kind == "delay" and rows.facing[number] == "N":
            line += 1
        facing: Side = "W" if part.kind == "output" else rows.facing[number]
        plan.spots.append(Spot(number, part.kind, line, facing))
        leaves.append(len(plan.spots) - 1)
        for link in rows.sketch.into[number]:
            enters[link] = leaves[-1]
        if part.kind == "adder":
            _add_lower_circles(plan, rows, number, leaves[-1], enters)
    return leaves, enters


def _brings(rows: Rows, link: int) -> int:
    """The half row on which a link arrives at its adder."""
    ends = rows.sketch.links[link]
    own = rows.line(ends.target)
    if link in rows.lanes:
        return rows.half_row(rows.band[ends.source], rows.lanes[link])
    if rows.on_rail(ends.source) and rows.band[ends.source] == rows.band[ends.target]:
        return own
    return rows.line(ends.source)


def _add_lower_circles(plan: Plan, rows: Rows, adder: int, top: int, enters: dict[int, int]) -> None:
    """Below the top circle one circle for every further half row that brings inputs, chained upwards."""
    own = plan.spots[top].line
    level: list[int] = []
    lower: dict[int, list[int]] = {}
    for link in rows.sketch.into[adder]:
        line = _brings(rows, link)
        if line <= own:
            level.append(link)
        else:
            lower.setdefault(line, []).append(link)
    if not level and len(lower) > 1:
        level = lower.pop(max(lower))
    room = 2 if lower or len(level) > 3 else 3
    if len(level) > room:
        lower.setdefault(own + 2, [])[:0] = level[room:]
    groups = _spread(sorted(lower.items()))
    circle = top
    for position, (line, links) in enumerate(groups):
        last = position == len(groups) - 1
        if last and len(links) == 1:
            enters[links[0]] = circle
            return
        plan.spots.append(Spot(adder, "adder", line, "N", top=False))
        plan.wires.append(Wire(len(plan.spots) - 1, circle, None))
        circle = len(plan.spots) - 1
        for link in links:
            enters[link] = circle


def _spread(groups: list[tuple[int, list[int]]]) -> list[tuple[int, list[int]]]:
    """At most two inputs a circle (three at the last), lines two half rows apart or more."""
    spread: list[tuple[int, list[int]]] = []
    waiting = list(groups)
    while waiting:
        line, links = waiting.pop(0)
        if spread:
            line = max(line, spread[-1][0] + 2)
        room = 3 if not waiting and len(links) <= 3 else 2
        spread.append((line, links[:room]))
        if links[room:]:
            waiting.insert(0, (line + 2, links[room:]))
    return spread
