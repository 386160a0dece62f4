"""Rows: how far below its rail each part stands, which way each delay points, which way links run.

The row of a part is its distance from the rail in delays: max(1, fewest delays from the rail to it,
fewest delays from it to the rail). This one rule lays out both direct forms, the transposed form
and lattices. Rows count downwards from the rail of the band; rows above it are negative.
"""

from __future__ import annotations

from collections import deque
from dataclasses import dataclass, field
from typing import Literal, TypeAlias

from flowgraph.draw.model import Sketch
from flowgraph.draw.rails import Rail

Side: TypeAlias = Literal["E", "S", "W", "N"]

OPPOSITE: dict[Side, Side] = {"E": "W", "W": "E", "S": "N", "N": "S"}
FAR = 1_000_000


@dataclass(slots=True)
class Rows:
    """For each part: its band, its row there, which way it faces; rail places; lanes of rail-to-rail links.

    `place[p]` is (band, number along the rail) or None. `begin[p]` and `end[p]` are the numbers along
    the band's rail of the rail part that reaches p, or is reached from p, with fewest delays (None: none).
    """

    sketch: Sketch
    rails: list[Rail]
    place: list[tuple[int, int] | None]
    band: list[int]
    row: list[int]
    facing: list[Side]
    begin: list[int | None]
    end: list[int | None]
    lanes: dict[int, int] = field(default_factory=dict)
    leftward: dict[int, bool] = field(default_factory=dict)
    rung: list[bool] = field(default_factory=list)
    base: list[int] = field(default_factory=list)

    def half_row(self, band: int, row: int) -> int:
        """The row line in half rows from the top of the picture."""
        return self.base[band] + 2 * row + (1 if self.rung[band] and row >= 1 else 0)

    def line(self, part: int) -> int:
        """The row line, in half rows, of the signal that leaves a part."""
        return self.half_row(self.band[part], self.row[part])

    def on_rail(self, part: int) -> bool:
        return self.place[part] is not None

    def off_rail_link(self, link: int) -> bool:
        """Whether a link is none of the links that make up the rails."""
        ends = self.sketch.links[link]
        source, target = self.place[ends.source], self.place[ends.target]
        if source is None or target is None or source[0] != target[0]:
            return True
        return link not in self.rails[source[0]].links


def assign_rows(sketch: Sketch, rails: list[Rail]) -> Rows:
    """Bands, rows and facings of all parts. Lanes and the stacking of bands come after (`stack_bands`)."""
    count = len(sketch.parts)
    rows = Rows(sketch, rails, [None] * count, [0] * count, [0] * count, ["E"] * count, [None] * count, [None] * count)
    for band, rail in enumerate(rails):
        for number, part in enumerate(rail.parts):
            rows.place[part] = (band, number)
            rows.band[part] = band
            rows.begin[part] = rows.end[part] = number
    lowered = _ladder_sums(rows)
    _assign_bands(rows, lowered)
    _turn_delays(rows)
    _find_directions(rows)
    return rows


def _ladder_sums(rows: Rows) -> set[int]:
    """Sums that only read, through gains, other off-rail sums with delays at them: the ladder of a lattice.

    They stand one row below the line they read, and the line does not run towards them.
    """
    sketch = rows.sketch

    def on_a_line(part: int) -> bool:
        return any(sketch.is_delay(other) for other in [*sketch.sources(part), *sketch.readers(part)])

    found: set[int] = set()
    for part, shape in enumerate(sketch.parts):
        if rows.on_rail(part) or shape.kind != "adder" or not sketch.into[part]:
            continue
        links = [sketch.links[link] for link in sketch.into[part]]
        if all(
            link.source in found
            or (
                link.coefficient is not None
                and not rows.on_rail(link.source)
                and sketch.parts[link.source].kind == "adder"
                and on_a_line(link.source)
            )
            for link in links
        ):
            found.add(part)
    return found


def _distances(rows: Rows, rail: Rail, forward: bool, avoided: set[int]) -> dict[int, tuple[int, int, int]]:
    """For off-rail parts: (fewest delays, hops, number along the rail) from the rail, or to it.

    Ways through the `avoided` sums count only for parts that have no other.
    """
    sketch = rows.sketch
    found: dict[int, tuple[int, int, int]] = {part: (0, 0, number) for number, part in enumerate(rail.parts)}
    for shunned in (avoided, set[int]()):
        settled = set(found)
        waiting = deque(found)
        while waiting:
            part = waiting.popleft()
            delays, hops, number = found[part]
            for link in sketch.out[part] if forward else sketch.into[part]:
                other = sketch.links[link].target if forward else sketch.links[link].source
                if rows.on_rail(other) or other in shunned or other in settled:
                    continue
                passed = other if forward else part
                cost = (delays + sketch.is_delay(passed), hops + 1, number)
                if other not in found or cost[:2] < found[other][:2]:
                    found[other] = cost
                    waiting.append(other)
    return found


def _assign_bands(rows: Rows, lowered: set[int]) -> None:
    """Each off-rail part joins the band that it is tied to by fewest delays, both ways if possible."""
    sketch = rows.sketch
    best: dict[int, tuple[bool, bool, int, int]] = {}
    for band, rail in enumerate(rows.rails):
        after, before = _distances(rows, rail, True, lowered), _distances(rows, rail, False, lowered)
        for part in sorted({*after, *before}):
            if rows.on_rail(part):
                continue
            here, there = after.get(part), before.get(part)
            nearness = (here or (0, 0, 0))[0] + (there or (0, 0, 0))[0]
            tie = (here is None or there is None, here is None, nearness, band)
            if part not in best or tie < best[part]:
                best[part] = tie
                rows.band[part] = band
                rows.begin[part] = here[2] if here else None
                towards_sums_only = part not in lowered and lowered.issuperset(sketch.readers(part))
                rows.end[part] = there[2] if there and not towards_sums_only else None
                rows.row[part] = max(1, here[0] if here else 0, there[0] if there else 0)
    for part in range(len(rows.sketch.parts)):
        if not rows.on_rail(part) and part not in best:
            rows.row[part] = 1
            rows.band[part] = max(0, len(rows.rails) - 1)
    for part in sorted(lowered):
        rows.row[part] = 1 + max(
            (rows.row[source] for source in rows.sketch.sources(part) if source not in lowered), default=1
        )


def _turn_delays(rows: Rows) -> None:
    """Down the column when the output row is lower than the input row, up in transposed forms, else flat."""
    sketch = rows.sketch
    seen: set[int] = set()
    for first, shape in enumerate(sketch.parts):
        if shape.kind != "delay" or rows.on_rail(first):
            continue
        chain = [first]
        while sketch.into[chain[-1]]:
            source = sketch.links[sketch.into[chain[-1]][0]].source
            if not sketch.is_delay(source) or rows.on_rail(source) or source in chain:
                break
            chain.append(source)
        for delay in reversed(chain):
            if delay not in seen:
                seen.add(delay)
                _turn_delay(rows, delay)


def _turn_delay(rows: Rows, delay: int) -> None:
    sketch = rows.sketch
    if not sketch.into[delay]:
        return
    link = sketch.links[sketch.into[delay][0]]
    same_band = rows.band[link.source] == rows.band[delay]
    above = rows.row[link.source] if same_band else 0
    rises_on = sketch.is_delay(link.source) and rows.facing[link.source] == "N"
    if (rises_on or rows.row[delay] <= above) and _can_rise(rows, delay, above):
        rows.facing[delay] = "N"
        rows.row[delay] = above - 1
    elif rows.row[delay] > above and not _goes_on_flat(rows, delay):
        rows.facing[delay] = "S"
        rows.row[delay] = max(rows.row[delay], above + 1 + (link.coefficient is not None))
    else:
        rows.row[delay] = max(above, rows.row[delay]) if above == 0 else above


def _can_rise(rows: Rows, delay: int, below: int) -> bool:
    """Whether all that reads the delay, through further delays, stands above its input row."""
    sketch = rows.sketch
    if below < 1 or _is_scaled(sketch, delay):
        return False
    readers = sketch.readers(delay)
    while len(readers) == 1 and sketch.is_delay(readers[0]) and not rows.on_rail(readers[0]) and below > 0:
        if _is_scaled(sketch, readers[0]):
            return False
        readers = sketch.readers(readers[0])
        below -= 1
    return bool(readers) and all(
        sketch.parts[reader].kind in ("adder", "gain")
        and rows.row[reader] < below
        and rows.band[reader] == rows.band[delay]
        for reader in readers
    )


def _is_scaled(sketch: Sketch, delay: int) -> bool:
    """Whether a triangle stands right before or behind a delay: there is no room for it in a rising column."""
    return any(sketch.links[link].coefficient is not None for link in (*sketch.into[delay], *sketch.out[delay]))


def _goes_on_flat(rows: Rows, delay: int) -> bool:
    """Whether the line behind a first delay goes on along its row, through sums, to further delays."""
    sketch = rows.sketch
    source = sketch.links[sketch.into[delay][0]].source
    if not rows.on_rail(source):
        return False
    for reader in sketch.readers(delay):
        if rows.on_rail(reader) or sketch.parts[reader].kind != "adder" or rows.row[reader] != rows.row[delay]:
            continue
        for further in sketch.readers(reader):
            if sketch.is_delay(further) and not rows.on_rail(further) and rows.row[further] == rows.row[delay]:
                return not _can_rise(rows, further, rows.row[reader])
    return False


def _find_directions(rows: Rows) -> None:
    """An off-rail link runs left iff the rail part it leads to is not after the one it comes from."""
    sketch = rows.sketch
    undecided: list[int] = []
    for number, link in enumerate(sketch.links):
        if not rows.off_rail_link(number):
            rows.leftward[number] = False
            continue
        source, target = link.source, link.target
        begin, end = rows.begin[source], rows.end[target]
        if rows.band[source] != rows.band[target] or begin is None:
            rows.leftward[number] = False
        elif end is None:
            undecided.append(number)
        else:
            rows.leftward[number] = end <= begin
    for number in undecided:
        link = sketch.links[number]
        flat = [
            rows.leftward.get(other, False)
            for part in (link.source, link.target)
            if not rows.on_rail(part)
            for other in sketch.into[part]
            if other != number
            and not rows.on_rail(sketch.links[other].source)
            and sketch.links[other].coefficient is None
            and rows.row[sketch.links[other].source] == rows.row[part]
        ]
        rows.leftward[number] = bool(flat) and all(flat)
    for number in undecided:
        target = sketch.links[number].target
        if rows.on_rail(sketch.links[number].source) and not rows.on_rail(target):
            others = [rows.leftward[other] for other in sketch.into[target] if other != number]
            rows.leftward[number] = bool(others) and all(others)
    for part, shape in enumerate(sketch.parts):
        if not rows.on_rail(part) and shape.kind in ("delay", "gain") and rows.facing[part] == "E":
            ways = [rows.leftward[link] for link in sketch.out[part]] or [
                rows.leftward[link] for link in sketch.into[part]
            ]
            if ways and sum(ways) * 2 >= len(ways):
                rows.facing[part] = "W"
