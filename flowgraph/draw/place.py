"""Placement: from parts and links to spots in columns and half rows ("rail and rows")."""

from __future__ import annotations

from flowgraph.draw.grouping import Grouping
from flowgraph.draw.model import Sketch
from flowgraph.draw.plan import Plan, Spot, Wire, columns_for

CLASH_ROUNDS = 60
MOST_MOVES = 4


def place(sketch: Sketch, crowded: frozenset[int] = frozenset()) -> Plan:
    """Every part at its column and half row, every link as a wire to be routed.

    Spots named in `crowded` get a free column beside them, because a wire found no way there before.
    """
    return _Placement(sketch, crowded).plan


class _Placement(Grouping):
    def __init__(self, sketch: Sketch, crowded: frozenset[int]) -> None:
        super().__init__(sketch)
        self.crowded = crowded
        self.settled: set[int] = set()
        self.moved: list[tuple[int, int]] = []
        self._constrain()
        self._settle()
        self._margins()
        self._add_wires()

    def _constrain(self) -> None:
        for rail in self.rows.rails:
            for number, part in enumerate(rail.parts):
                at, boxed = self.spot_group[self.leaves[part]], False
                for tap in sorted(self.taps.get(part, []), key=lambda tap: (not tap.left, tap.rank)):
                    wide = 2 if boxed and tap.boxed else 1
                    if self.columns.require(at, tap.group, wide):
                        at, boxed = tap.group, tap.boxed
                if number < len(rail.links):
                    link = rail.links[number]
                    after = self.spot_group[self.enters[link]]
                    both = self.sketch.is_delay(part) and self.sketch.is_delay(rail.parts[number + 1])
                    direct = both and at == self.spot_group[self.leaves[part]]
                    self.columns.require(at, after, max(columns_for(self.sketch.links[link]), 2 if direct else 1))
        for part in range(len(self.sketch.parts)):
            if self.flat(part) and part in self.taps:
                self._beside(
                    self.spot_group[self.leaves[part]], self.taps[part][0].group, self.rows.facing[part] == "W", 1
                )
        ordered = sorted(range(len(self.sketch.links)), key=self._urgency)
        for link in ordered:
            if self.rows.off_rail_link(link):
                ends = self.sketch.links[link]
                wide = 1 if self.upright(link) else columns_for(ends)
                kinds = {self.sketch.parts[ends.source].kind, self.sketch.parts[ends.target].kind}
                boxes = self.flat(ends.source) and self.flat(ends.target) and link not in self.tap_of
                if boxes or "gain" in kinds:
                    wide = max(wide, 2)
                self._beside(
                    self.source_group(link), self.spot_group[self.enters[link]], self.rows.leftward[link], wide
                )

    def _urgency(self, link: int) -> tuple[bool, bool, int]:
        ends = self.sketch.links[link]
        return (self.rows.band[ends.source] != self.rows.band[ends.target], self.rows.row[ends.target] > 0, link)

    def _beside(self, source: int, target: int, left: bool, wide: int) -> None:
        if left:
            self.columns.require(target, source, wide)
        else:
            self.columns.require(source, target, wide)

    def _settle(self) -> None:
        """Solve; while two groups share a cell, order them or move one down; then write the columns."""
        linked = {(self.leaves[link.source], self.enters[at]) for at, link in enumerate(self.sketch.links)}
        for _ in range(CLASH_ROUNDS):
            columns = self.columns.solve()
            clash = self._first_clash(columns)
            if clash is not None:
                one, other = sorted(clash)
                if not (self.columns.require(one, other, 1) or self.columns.require(other, one, 1)):
                    self._move_down(other, one)
                    self.moved.append((one, other))
            elif not self._part_strangers(columns, linked):
                break
        columns = self.columns.solve()
        for spot, group in zip(self.plan.spots, self.spot_group, strict=True):
            spot.column = columns[group]
        self.solved = columns

    def _part_strangers(self, columns: list[int], linked: set[tuple[int, int]]) -> bool:
        """Leave a column free between neighbours of a row that no wire joins, so that wires reach both."""
        at: dict[tuple[int, int], int] = {}
        for number, spot in enumerate(self.plan.spots):
            if spot.kind not in ("input", "output"):
                at[columns[self.spot_group[number]], spot.line] = number
        leftmost, rightmost = self._partners(columns)
        moved = False
        for (column, line), here in at.items():
            right, under = at.get((column + 1, line)), at.get((column, line + 1))
            if right is not None:
                crowded = here in self.crowded or right in self.crowded
                wanted = rightmost[here] > column or leftmost[right] < column + 1
                if crowded or (wanted and not self._face_to_face(here, right, linked)):
                    moved = self.columns.require(self.spot_group[here], self.spot_group[right], 2) or moved
            if under is not None and (here, under) not in linked and (under, here) not in linked:
                groups = self.spot_group[here], self.spot_group[under]
                moved = self.columns.require(*groups, 1) or self.columns.require(*groups[::-1], 1) or moved
        return moved

    def _partners(self, columns: list[int]) -> tuple[list[int], list[int]]:
        """For each spot the leftmost and the rightmost column that its wires come from or go to."""
        leftmost = [columns[group] for group in self.spot_group]
        rightmost = list(leftmost)
        for number, link in enumerate(self.sketch.links):
            source, target = self.leaves[link.source], self.enters[number]
            left_at = columns[self.source_group(number)]
            goes_to = left_at if number in self.tap_of else columns[self.spot_group[target]]
            for spot, column in ((target, left_at), (source, goes_to)):
                leftmost[spot] = min(leftmost[spot], column)
                rightmost[spot] = max(rightmost[spot], column)
        return leftmost, rightmost

    def _face_to_face(self, left: int, right: int, linked: set[tuple[int, int]]) -> bool:
        """Whether a wire goes straight from one neighbour into the other."""
        facings = {self.plan.spots[spot].facing for spot in (left, right) if self.plan.spots[spot].kind != "adder"}
        return ((left, right) in linked and facings <= {"E"}) or ((right, left) in linked and facings <= {"W"})

    def _extent(self) -> dict[int, tuple[int, int]]:
        """The half rows that each group covers in its column."""
        covered: dict[int, list[int]] = {}
        for spot, group in zip(self.plan.spots, self.spot_group, strict=True):
            if spot.kind != "output" or self.rows.on_rail(spot.part):
                covered.setdefault(self.columns.group(group), []).append(spot.line)
        for part, taps in self.taps.items():
            for tap in taps:
                lines = covered.setdefault(self.columns.group(tap.group), [])
                lines.append(self.rows.line(part))
                for link in tap.links:
                    if link in self.rows.lanes:
                        lines.append(self.rows.half_row(self.rows.band[part], self.rows.lanes[link]))
                    elif self.upright(link):
                        lines.append(self.rows.line(part) + 1)
                    elif self.sketch.parts[self.sketch.links[link].target].kind != "output":
                        lines.append(self.plan.spots[self.enters[link]].line)
        return {group: (min(lines), max(lines)) for group, lines in covered.items()}

    def _first_clash(self, columns: list[int]) -> tuple[int, int] | None:
        by_column: dict[int, list[tuple[int, int, int]]] = {}
        for group, (top, bottom) in sorted(self._extent().items()):
            for low, high, other in by_column.get(columns[group], []):
                hopeless = self.moved.count((min(group, other), max(group, other))) > MOST_MOVES
                if top <= high and low <= bottom and not hopeless:
                    return group, other
            by_column.setdefault(columns[group], []).append((top, bottom, group))
        return None

    def _move_down(self, *groups: int) -> None:
        for group in groups:
            members = [
                spot
                for spot, own in zip(self.plan.spots, self.spot_group, strict=True)
                if self.columns.group(own) == group
            ]
            if members and not any(self.rows.on_rail(spot.part) for spot in members):
                for spot in members:
                    spot.line += 2
                return

    def _margins(self) -> None:
        """Inputs to the left margin, outputs to the right one, each further output on a free line."""
        spots = self.plan.spots
        inner = [spot.column for spot in spots if spot.kind not in ("input", "output")]
        inner += [self.solved[tap.group] for taps in self.taps.values() for tap in taps]
        left = min(
            [spot.column for spot in spots if spot.kind == "input"] + [column - 1 for column in inner], default=0
        )
        right = max(
            [spot.column for spot in spots if spot.kind == "output"] + [column + 1 for column in inner], default=1
        )
        if left < 0:
            self.solved = [column - left for column in self.solved]
            for spot in spots:
                spot.column -= left
            left, right = 0, right - left
        for spot in spots:
            if spot.kind == "input":
                spot.column = left
            elif spot.kind == "output":
                self._settle_output(spot.part, left, right)

    def _settle_output(self, part: int, left: int, right: int) -> None:
        spot = self.plan.spots[self.leaves[part]]
        spot.column = right
        self._settle_line(part, spot, left, right)
        self.settled.add(part)

    def _settle_line(self, part: int, spot: Spot, left: int, right: int) -> None:
        if self.rows.on_rail(part) or not self.sketch.into[part]:
            return
        link = self.sketch.into[part][0]
        source = self.plan.spots[self.leaves[self.sketch.links[link].source]]
        source_part = self.sketch.links[link].source
        start = self.solved[self.source_group(link)]
        flat = not self.rows.on_rail(source_part)
        if self.rows.leftward[link] and flat and self._clear(spot, source.line, left, start - 1):
            spot.column, spot.line, spot.facing = left, source.line, "E"
            return
        line = self.rows.line(source_part)
        while not self._clear(spot, line, start + 1, right):
            line += 2
        spot.line = line

    def _clear(self, own: Spot, line: int, first: int, last: int) -> bool:
        """Whether no symbol, port or lane is on a half row between two columns."""
        for spot in self.plan.spots:
            settled = spot.kind != "output" or self.rows.on_rail(spot.part) or spot.part in self.settled
            near = abs(spot.line - line) < (2 if spot.kind == "output" else 1)
            if spot is not own and settled and first <= spot.column <= last:
                hangs = spot.kind == "delay" and spot.facing in "NS" and abs(spot.line - line) == 1
                if near or hangs:
                    return False
        for link, row in self.rows.lanes.items():
            ends = self.sketch.links[link]
            columns = (self.solved[self.source_group(link)], self.plan.spots[self.enters[link]].column)
            lane = self.rows.half_row(self.rows.band[ends.source], row)
            if abs(lane - line) < 1 and first <= max(columns) and min(columns) <= last:
                return False
        return True

    def _add_wires(self) -> None:
        on_rails = {link for rail in self.rows.rails for link in rail.links}
        for number, link in enumerate(self.sketch.links):
            tap = self.tap_of.get(number)
            lane = self.rows.lanes.get(number)
            self.plan.wires.append(
                Wire(
                    self.leaves[link.source],
                    self.enters[number],
                    link,
                    rail=number in on_rails,
                    upright=self.upright(number),
                    lane=None if lane is None else self.rows.half_row(self.rows.band[link.source], lane),
                    tap=None if tap is None else self.solved[tap.group],
                )
            )
        for part, taps in self.taps.items():
            self.plan.taps[self.leaves[part]] = sorted({self.solved[tap.group] for tap in taps})
            self.plan.tap_line[self.leaves[part]] = self.rows.line(part)
        for part in range(len(self.sketch.parts)):
            if self.vertical(part) and self.rows.facing[part] == "S" and self.sketch.out[part]:
                spot = self.plan.spots[self.leaves[part]]
                self.plan.taps[self.leaves[part]] = [spot.column]
                self.plan.tap_line[self.leaves[part]] = spot.line + 1
        if self.rows.rails:
            self.plan.forward = tuple(self.leaves[part] for part in self.rows.rails[0].parts)
