"""Which spots share a column: circles of one adder, delays in a column with their tap, rungs of a lattice."""

from __future__ import annotations

from dataclasses import dataclass, field

from flowgraph.draw.columns import Columns
from flowgraph.draw.lanes import stack_bands
from flowgraph.draw.model import Sketch
from flowgraph.draw.plan import Plan, add_spots
from flowgraph.draw.rails import find_rails
from flowgraph.draw.rows import Rows, assign_rows


@dataclass(slots=True)
class Tap:
    """A place on a net's row line where it is left: its group, and which links leave there."""

    group: int
    left: bool
    rank: int
    boxed: bool
    links: list[int] = field(default_factory=list)


class Grouping:
    """Spots of a sketch with their half rows, in groups that will share a column, and the taps of each net."""

    def __init__(self, sketch: Sketch) -> None:
        self.sketch = sketch
        self.plan = Plan(sketch)
        self.rows: Rows = assign_rows(sketch, find_rails(sketch))
        stack_bands(self.rows)
        self.leaves, self.enters = add_spots(self.plan, self.rows)
        self.columns = Columns()
        self.spot_group = [self.columns.new_group() for _ in self.plan.spots]
        self.taps: dict[int, list[Tap]] = {}
        self.tap_of: dict[int, Tap] = {}
        self._join_circles()
        self._join_delays()
        self._make_taps()
        self._hang_rungs()

    def off_rail_delay(self, part: int) -> bool:
        return self.sketch.is_delay(part) and not self.rows.on_rail(part)

    def vertical(self, part: int) -> bool:
        return self.off_rail_delay(part) and self.rows.facing[part] in "NS"

    def flat(self, part: int) -> bool:
        return self.off_rail_delay(part) and self.rows.facing[part] in "EW"

    def _lines(self, group: int) -> set[int]:
        """The half rows that the members of a group stand on."""
        group = self.columns.group(group)
        spots = zip(self.plan.spots, self.spot_group, strict=True)
        return {spot.line for spot, own in spots if self.columns.group(own) == group}

    def _join(self, one: int, other: int) -> None:
        """Let two groups share a column, unless members of both would stand in one place."""
        if self._lines(one).isdisjoint(self._lines(other)):
            self.columns.join(one, other)

    def _join_circles(self) -> None:
        for wire in self.plan.wires:
            self.columns.join(self.spot_group[wire.source], self.spot_group[wire.target])

    def _join_delays(self) -> None:
        """Delays that point down hang below one another; delays that point up stand under what reads them."""
        continued: set[int] = set()
        for number, link in enumerate(self.sketch.links):
            source, target = link.source, link.target
            own = self.spot_group[self.leaves[target]]
            if self.vertical(target) and self.rows.facing[target] == "S":
                if self.vertical(source) and self.rows.facing[source] == "S" and source not in continued:
                    continued.add(source)
                    self._join(self.spot_group[self.leaves[source]], own)
            elif self.vertical(target) and not self.rows.on_rail(source) and source not in continued:
                continued.add(source)
                self._join(self.spot_group[self.leaves[source]], own)
            if self.vertical(source) and self.rows.facing[source] == "N" and len(self.sketch.out[source]) == 1:
                self._join(self.spot_group[self.leaves[source]], self.spot_group[self.enters[number]])

    def _make_taps(self) -> None:
        for part in range(len(self.sketch.parts)):
            off = [link for link in self.sketch.out[part] if self.rows.off_rail_link(link)]
            if self.rows.on_rail(part):
                self._rail_taps(part, off)
            elif self.flat(part) and (len(off) > 1 or any(self._leaves_row(link) for link in off)):
                tap = Tap(self.columns.new_group(), self.rows.facing[part] == "W", 0, False)
                self._tap_links(part, tap, off)

    def _leaves_row(self, link: int) -> bool:
        ends = self.sketch.links[link]
        return self.rows.line(ends.source) != self.plan.spots[self.enters[link]].line

    def _rail_taps(self, part: int, off: list[int]) -> None:
        place = self.rows.place[part]
        ends_here = place is not None and place[1] == len(self.rows.rails[place[0]].parts) - 1
        goes_straight_on = ends_here and len(off) == 1 and not self.rows.leftward[off[0]]
        if goes_straight_on and not self.off_rail_delay(self.sketch.links[off[0]].target):
            return
        shared: dict[bool, Tap] = {}
        for link in off:
            target = self.sketch.links[link].target
            left = self.rows.leftward[link]
            if self.vertical(target) and self.rows.facing[target] == "S":
                left = self._line_runs_left(target)
                tap = Tap(self.spot_group[self.leaves[target]], left, 2 if left else 1, True)
                self._tap_links(part, tap, [link])
            elif self.flat(target):
                self._tap_links(part, Tap(self.columns.new_group(), left, 3 if left else 0, False), [link])
            elif left in shared:
                self._tap_links(part, shared[left], [link])
            else:
                shared[left] = Tap(self.columns.new_group(), left, 1 if left else 2, False)
                self._tap_links(part, shared[left], [link])

    def _tap_links(self, part: int, tap: Tap, links: list[int]) -> None:
        if tap not in self.taps.setdefault(part, []):
            self.taps[part].append(tap)
        tap.links += links
        for link in links:
            self.tap_of[link] = tap

    def _line_runs_left(self, delay: int) -> bool:
        """Whether anything that reads a hanging line of delays lies to its left."""
        seen: set[int] = set()
        waiting = [delay]
        while waiting:
            part = waiting.pop()
            for link in self.sketch.out[part]:
                reader = self.sketch.links[link].target
                if self.vertical(reader) and reader not in seen:
                    seen.add(reader)
                    waiting.append(reader)
                elif self.rows.leftward[link] and not self.vertical(reader):
                    return True
        return False

    def _hang_rungs(self) -> None:
        """The tap of a lying delay stands exactly under the rail adder it feeds."""
        used: set[int] = set()
        for part in range(len(self.sketch.parts)):
            if not self.flat(part) or part not in self.taps:
                continue
            for link in self.sketch.out[part]:
                target = self.sketch.links[link].target
                if (
                    self.rows.on_rail(target)
                    and self.rows.band[target] == self.rows.band[part]
                    and target not in used
                    and self.sketch.parts[target].kind == "adder"
                    and self.enters[link] == self.leaves[target]
                    and len(self.sketch.into[target]) < 4
                ):
                    used.add(target)
                    self._join(self.taps[part][0].group, self.spot_group[self.leaves[target]])
                    break

    def source_group(self, link: int) -> int:
        if link in self.tap_of:
            return self.tap_of[link].group
        return self.spot_group[self.leaves[self.sketch.links[link].source]]

    def upright(self, link: int) -> bool:
        """Whether a gain stands upright on a rung between the rail and the lying row below it."""
        ends = self.sketch.links[link]
        band = self.rows.band[ends.source]
        if not self.rows.rung[band] or self.rows.band[ends.target] != band or link in self.rows.lanes:
            return False
        lines = {self.rows.row[ends.source], self.rows.row[ends.target]}
        return lines == {0, 1} and self.rows.off_rail_link(link)
