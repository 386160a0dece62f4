"""The FIR ladder: a diagram without loops that sums the taps of one line, drawn as texts draw it.

Direct: the delay line on top, the adders three half rows below, each under its tap. Transposed: the
input wire on top, delays and adders alternate below. A long ladder shows its first and last taps.
"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise

from flowgraph.draw.model import Link, Part, Sketch
from flowgraph.draw.plan import Plan, Spot, Wire, columns_for

FEWEST_TAPS = 3
MOST_TAPS = 16
FIRST_SHOWN, LAST_SHOWN = 4, 3
RUNG = 3


@dataclass(frozen=True, slots=True)
class _Rung:
    """One tap: the links that carry it, and the delay parts between the tap before and this one."""

    link: Link
    delays: tuple[int, ...]
    adder: int


@dataclass(frozen=True, slots=True)
class Ladder:
    """What was found: rungs from left to right, the input, the links from the last adder to the output."""

    rungs: tuple[_Rung, ...]
    transposed: bool
    input: int
    output: int
    last: Link


def find_ladder(sketch: Sketch) -> Ladder | None:
    """The ladder a sketch is, or None: one input, one output, a line of delays, sums of its taps only."""
    inputs = [number for number, part in enumerate(sketch.parts) if part.kind == "input"]
    outputs = [number for number, part in enumerate(sketch.parts) if part.kind == "output"]
    if len(inputs) != 1 or len(outputs) != 1 or any(part.kind == "gain" for part in sketch.parts):
        return None
    if not sketch.into[outputs[0]]:
        return None
    last = sketch.links[sketch.into[outputs[0]][0]]
    if sketch.parts[last.source].kind != "adder" or len(sketch.out[last.source]) != 1:
        return None
    found = _direct(sketch, inputs[0], last.source) or _transposed(sketch, inputs[0], last.source)
    if found is None or len(found) < FEWEST_TAPS:
        return None
    used = {part for rung in found for part in (*rung.delays, rung.adder)} | {inputs[0], outputs[0]}
    if len(used) != len(sketch.parts):
        return None
    return Ladder(
        tuple(found), sketch.is_delay(found[0].adder) or _is_transposed(sketch, found), inputs[0], outputs[0], last
    )


def _is_transposed(sketch: Sketch, rungs: list[_Rung]) -> bool:
    return all(sketch.parts[rung.link.source].kind == "input" for rung in rungs)


def _direct(sketch: Sketch, source: int, last: int) -> list[_Rung] | None:
    """Taps along the line, each with the adder that takes it: one adder, or a chain of them in tap order."""
    line: list[int] = [source]
    while True:
        further = [part for part in sketch.readers(line[-1]) if sketch.is_delay(part)]
        if not further:
            break
        if len(further) > 1 or sketch.links[sketch.into[further[0]][0]].coefficient is not None:
            return None
        if further[0] in line:
            return None
        line.append(further[0])
    rungs: list[_Rung] = []
    pending: list[int] = []
    for part in line:
        if sketch.is_delay(part):
            pending.append(part)
        links = [sketch.links[link] for link in sketch.out[part] if not sketch.is_delay(sketch.links[link].target)]
        if len(links) > 1 or any(sketch.parts[link.target].kind != "adder" for link in links):
            return None
        for link in links:
            rungs.append(_Rung(link, tuple(pending), link.target))
            pending = []
    if not rungs or pending or len(rungs) < 2 or rungs[-1].adder != last:
        return None
    for before, after in pairwise(rungs):
        if before.adder != after.adder and not _feeds(sketch, before.adder, after.adder):
            return None
    inner = {rung.adder for rung in rungs}
    taps = {id(rung.link) for rung in rungs}
    for adder in sorted(inner):
        chained = [sketch.links[link] for link in sketch.into[adder] if id(sketch.links[link]) not in taps]
        if any(link.source not in inner for link in chained) or len(chained) > 1:
            return None
    return rungs


def _feeds(sketch: Sketch, adder: int, following: int) -> bool:
    """Whether one sum goes into the next as it is, and nowhere else."""
    links = [sketch.links[link] for link in sketch.out[adder]]
    return len(links) == 1 and links[0].target == following and links[0].coefficient is None and not links[0].negative


def _transposed(sketch: Sketch, source: int, last: int) -> list[_Rung] | None:
    """From the output backwards: adders, each with one tap of the input and one line of delays."""
    rungs: list[_Rung] = []
    adder = last
    while True:
        links = [sketch.links[link] for link in sketch.into[adder]]
        taps = [link for link in links if link.source == source]
        lines = [link for link in links if link.source != source]
        if len(taps) != 1 or len(lines) != 1 or lines[0].coefficient is not None or lines[0].negative:
            return None
        delays: list[int] = []
        part = lines[0].source
        while sketch.is_delay(part) and len(sketch.out[part]) == 1 and part not in delays:
            delays.append(part)
            into = sketch.links[sketch.into[part][0]]
            if into.source == source or into.coefficient is not None:
                break
            part = into.source
        if not delays:
            return None
        rungs.append(_Rung(taps[0], tuple(reversed(delays)), adder))
        first = sketch.links[sketch.into[delays[-1]][0]]
        if first.source == source:
            rungs.append(_Rung(first, (), delays[-1]))
            return rungs[::-1]
        adder = first.source
        if (
            sketch.parts[adder].kind != "adder"
            or len(sketch.out[adder]) != 1
            or adder == last
            or len(rungs) > len(sketch.parts)
        ):
            return None


def place_ladder(sketch: Sketch, ladder: Ladder) -> Plan:
    """Every symbol of the ladder at its place, every wire with its ports' directions given by it."""
    shown, hidden = _shown(ladder)
    builder = _Builder(sketch, ladder, shown, hidden)
    return builder.plan


def _shown(ladder: Ladder) -> tuple[list[_Rung], int]:
    """The rungs to draw and how many are left out, behind the first few."""
    rungs = list(ladder.rungs)
    if len(rungs) <= MOST_TAPS:
        return rungs, 0
    hidden = len(rungs) - FIRST_SHOWN - LAST_SHOWN
    return rungs[:FIRST_SHOWN] + rungs[-LAST_SHOWN:], hidden


class _Builder:
    def __init__(self, sketch: Sketch, ladder: Ladder, shown: list[_Rung], hidden: int) -> None:
        self.sketch = sketch
        self.ladder = ladder
        self.plan = Plan(sketch)
        self.pitch = max([2, *(columns_for(rung.link) - (columns_for(rung.link) == 2) for rung in shown)])
        self.source = self._spot(ladder.input, 0, 0)
        self.top: int = self.source
        self.bottom: int | None = None
        self.pending: Link | None = None
        column = 0
        for number, rung in enumerate(shown):
            skipped = bool(hidden) and number == FIRST_SHOWN
            before = column
            room = 2 * len(rung.delays)
            if skipped:
                column += 2 * self.pitch + 1
            elif number:
                column += max(self.pitch, room)
            else:
                column = max(1, 0 if ladder.transposed else room)
            if ladder.transposed:
                self._transposed_rung(rung, before, column, hidden if skipped else 0)
            else:
                self._direct_rung(rung, before, column, hidden if skipped else 0)
        output = self._spot(ladder.output, column + columns_for(ladder.last), RUNG)
        self.plan.spots[output].facing = "W"
        assert self.bottom is not None
        self._wire(self.bottom, output, ladder.last, rail=True)
        self.plan.forward = ()

    def _spot(self, part: int, column: int, line: int, top: bool = True) -> int:
        self.plan.spots.append(Spot(part, self.sketch.parts[part].kind, line, "E", column, top))
        return len(self.plan.spots) - 1

    def _wire(self, source: int, target: int, link: Link | None, *, rail: bool = False, tap: int | None = None) -> None:
        upright = not rail and link is not None
        self.plan.wires.append(Wire(source, target, link, rail=rail, upright=upright, tap=tap))
        if tap is not None:
            taps = self.plan.taps.setdefault(source, [])
            if tap not in taps:
                taps.append(tap)
            self.plan.tap_line[source] = self.plan.spots[source].line

    def _ellipsis(self, column: int, line: int, before: int, hidden: int) -> int:
        """Three dots on a line; what they stand for is said once, between the lines."""
        part = self.sketch.add_part(Part("ellipsis", f"{hidden} taps not drawn"))
        spot = self._spot(part, column, line)
        self._wire(before, spot, None, rail=True)
        return spot

    def _direct_rung(self, rung: _Rung, before: int, column: int, hidden: int) -> None:
        if hidden:
            middle = before + self.pitch
            self.top = self._ellipsis(middle, 0, self.top, hidden)
            if self.bottom is not None:
                self.bottom = self._ellipsis(middle, RUNG, self.bottom, hidden)
            before = column - self.pitch
        delays = rung.delays[-1:] if hidden else rung.delays
        for number, delay in enumerate(delays):
            at = before + (column - before) * (2 * number + 1) // (2 * len(delays))
            spot = self._spot(delay, at, 0)
            self._wire(self.top, spot, None, rail=True)
            self.top = spot
        if self.bottom is None and self.pending is None:
            self.pending = rung.link
            self.first_top, self.first_column = self.top, column
            return
        adder = self._spot(rung.adder, column, RUNG)
        if self.pending is not None:
            self._wire(self.first_top, adder, self.pending, tap=self.first_column)
            self.pending = None
        elif self.bottom is not None:
            self._wire(self.bottom, adder, None, rail=True)
        self._wire(self.top, adder, rung.link, tap=column)
        self.bottom = adder

    def _transposed_rung(self, rung: _Rung, before: int, column: int, hidden: int) -> None:
        if hidden:
            assert self.bottom is not None
            self.bottom = self._ellipsis(before + self.pitch, RUNG, self.bottom, hidden)
            self.top = self._ellipsis(before + self.pitch, 0, self.top, hidden)
            before = column - self.pitch
        if self.bottom is None and self.pending is None:
            self.pending = rung.link
            self.first_column = column
            return
        delays = rung.delays[-1:] if hidden else rung.delays
        for number, delay in enumerate(delays):
            at = before + (column - before) * (2 * number + 1) // (2 * len(delays))
            spot = self._spot(delay, at, RUNG)
            if self.pending is not None:
                self._wire(self.source, spot, self.pending, tap=self.first_column)
                self.pending = None
            elif self.bottom is not None:
                self._wire(self.bottom, spot, None, rail=True)
            self.bottom = spot
        adder = self._spot(rung.adder, column, RUNG)
        assert self.bottom is not None
        self._wire(self.bottom, adder, None, rail=True)
        self._wire(self.top, adder, rung.link, tap=column)
        self.bottom = adder
