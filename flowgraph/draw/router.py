"""Routing in one order: every wire of a plan as a path of cells, wires of one source growing as a tree.

The forward path comes first, then what is straight, then the rest from short to long. A triangle is
set as soon as its wire is drawn, so that later wires keep clear of it.
"""

from __future__ import annotations

from itertools import pairwise
from math import ceil

from flowgraph.draw.gains import Box, set_triangle, standing_triangle
from flowgraph.draw.grid import CELL, LABEL, NEAR_SYMBOL, OUTSIDE, Grid, Start
from flowgraph.draw.labels import port_label, text_width
from flowgraph.draw.plan import PORT_SIZE, Plan, Spot, Wire
from flowgraph.draw.ports import SIDES, STEP
from flowgraph.draw.routed import BODY, MARGIN_ACROSS, MARGIN_DOWN, UPRIGHT_DELAY, Routed, Spacing, inwards, outwards
from flowgraph.draw.rows import Side

OFF_TAP, OFF_HANGING_TAP, BELOW_TAP = 30.0, 4.0, 2.0
ALONG_TRIANGLE = 6.0
DIRECTION: dict[Side, int] = {"E": 0, "S": 1, "W": 2, "N": 3}


class Router:
    """One attempt: wires `first` before all others but the rails, wires `last` after them; see `routed`."""

    def __init__(self, plan: Plan, spacing: Spacing, first: tuple[int, ...], last: tuple[int, ...]) -> None:
        self.plan = plan
        self.routed = Routed(plan, spacing)
        columns = [spot.column for spot in plan.spots]
        lines = [spot.line for spot in plan.spots] + [*plan.tap_line.values()]
        lines += [wire.lane for wire in plan.wires if wire.lane is not None]
        width = 2 * MARGIN_ACROSS + max(columns) * spacing.column + 1
        height = 2 * MARGIN_DOWN + max(lines) * spacing.line + 1
        self.grid = Grid(width, height)
        self.trees: dict[int, dict[int, bool]] = {}
        self.net_of = self._nets()
        self.symbols = [self._symbol_box(spot) for spot in plan.spots]
        self.standing = [
            standing_triangle(*self.routed.centre(spot), spot.facing, plan.sketch.parts[spot.part])
            for spot in plan.spots
            if spot.kind == "gain"
        ]
        self._place_symbols()
        for triangle in self.standing:
            self.grid.make_costly(*triangle.label_cells(), cost=LABEL)
        order = sorted(range(len(plan.wires)), key=self._urgency)
        rails = [wire for wire in order if plan.wires[wire].rail]
        early = [wire for wire in first if wire not in last]
        middle = [wire for wire in order if wire not in last]
        for wire in dict.fromkeys([*rails, *early, *middle, *last]):
            self._route(wire)
        self._judge()
        self.routed.steps = self.grid.steps

    def _block_label(self, spot: Spot, x: int, y: int) -> None:
        """Keep wires off the name of a port."""
        width = ceil(text_width(port_label(self.plan.sketch.parts[spot.part].name), PORT_SIZE) / CELL) + 1
        rightwards = spot.kind == "output" and spot.facing == "W"
        left, right = (x, x + width) if rightwards else (x - width, x)
        self.grid.block(max(0, left), y - 1, min(self.grid.width - 1, right), y + 1)

    def _symbol_box(self, spot: Spot) -> Box:
        """The room of a symbol in cells, with a little clearance."""
        x, y = self.routed.centre(spot)
        across, down = {"adder": (1.35, 1.35), "delay": (2.35, 2.0), "gain": (1.8, 1.8)}.get(spot.kind, (1.0, 1.0))
        return x - across, y - down, x + across, y + down

    def _nets(self) -> list[int]:
        return [wire.source for wire in self.plan.wires]

    def _urgency(self, number: int) -> tuple[int, int, int]:
        wire = self.plan.wires[number]
        x, y = self._tap(wire) or self.routed.centre(self.plan.spots[wire.source])
        to_x, to_y = self.routed.centre(self.plan.spots[wire.target])
        aligned = (x == to_x or y == to_y) and wire.lane is None
        return (0 if wire.rail else 1 if aligned else 2, abs(to_x - x) + abs(to_y - y), number)

    def _tap(self, wire: Wire) -> tuple[int, int] | None:
        """The cell at which a wire leaves the row line of its net, if placement named one."""
        line = self.plan.tap_line.get(wire.source)
        if line is None:
            return None
        taps = self.plan.taps[wire.source]
        column = wire.tap if wire.tap is not None else taps[0] if len(taps) == 1 and not wire.rail else None
        if column is None:
            return None
        spacing = self.routed.spacing
        return MARGIN_ACROSS + column * spacing.column, MARGIN_DOWN + line * spacing.line

    def _place_symbols(self) -> None:
        grid = self.grid
        centres = [self.routed.centre(spot) for spot in self.plan.spots]
        left, right = min(x for x, _ in centres), max(x for x, _ in centres)
        lines = [*self.plan.tap_line.values(), *(wire.lane for wire in self.plan.wires if wire.lane is not None)]
        rows = [y for _, y in centres] + [MARGIN_DOWN + line * self.routed.spacing.line for line in lines]
        top, bottom = min(rows), max(rows)
        for y in range(grid.height):
            for x in range(grid.width):
                if not (left <= x <= right and top <= y <= bottom):
                    grid.cost[grid.cell(x, y)] += OUTSIDE
        for spot, (x, y) in zip(self.plan.spots, centres, strict=True):
            across, down = BODY[spot.kind]
            grid.block(x - across, y - down, x + across, y + down)
            grid.make_costly(x - across - 1, y - down - 1, x + across + 1, y + down + 1, NEAR_SYMBOL)
            reach = {side: across + 1 if STEP[side][0] else down + 1 for side in SIDES}
            for side in spot.ports.values():
                reach[side] = inwards(spot)
            if spot.exit is not None:
                reach[spot.exit] = outwards(spot)
            if spot.kind in ("input", "output"):
                self._block_label(spot, x, y)
                reach |= {side: 0 for side in SIDES if side not in spot.ports.values() and side != spot.exit}
            for side, distance in reach.items():
                right_by, down_by = STEP[side]
                for away in range(distance + 1):
                    grid.blocked[grid.cell(x + right_by * away, y + down_by * away)] = 1

    def _route(self, number: int) -> None:
        wire = self.plan.wires[number]
        target = self.plan.spots[wire.target]
        net = wire.source
        x, y = self.routed.centre(target)
        side = target.ports.get(number, "W")
        right, down = STEP[side]
        straight = inwards(target)
        goal = self.grid.cell(x + right * straight, y + down * straight)
        arrival = (DIRECTION[side] + 2) & 3
        trunk, starts = self._starts(wire)
        found = self._lane_path(wire, trunk, goal, arrival) if wire.lane is not None else None
        if found is None and starts:
            found = self.grid.search(net, starts, goal, arrival)
        if found is None:
            self.routed.unrouted.append(number)
            return
        run_in = [self.grid.cell(x + right * away, y + down * away) for away in range(straight - 1, -1, -1)]
        path = (trunk[:-1] if trunk and found[0] == trunk[-1] else []) + found + run_in
        tree = self.trees.setdefault(net, {})
        self.grid.draw(net, path, straight)
        shared_end = len(path) - straight - (straight == UPRIGHT_DELAY[0] and target.kind == "delay")
        for at, cell in enumerate(path):
            open_cell = at < shared_end and not self._in_body(cell, wire)
            tree[cell] = open_cell or tree.get(cell, False)
        self.routed.paths[number] = [self.grid.place(cell) for cell in path]
        if wire.link is not None and wire.link.coefficient is not None:
            self._set_triangle(number, path, tree, self._private(wire, path, bool(trunk)), bool(trunk))

    def _in_body(self, cell: int, wire: Wire) -> bool:
        """Whether a cell is inside the symbol the wire leaves, or its stub, where nothing may branch off."""
        x, y = self.routed.centre(self.plan.spots[wire.source])
        at_x, at_y = self.grid.place(cell)
        return abs(at_x - x) + abs(at_y - y) < outwards(self.plan.spots[wire.source])

    def _starts(self, wire: Wire) -> tuple[list[int], list[Start]]:
        """The cells that a wire runs in any case, and the cells from which the search may set out."""
        tree = self.trees.get(wire.source)
        tap = self._tap(wire)
        if tree is None:
            trunk = self._trunk(wire, tap)
            direction = DIRECTION[self.plan.spots[wire.source].exit or "E"]
            return trunk, [Start(trunk[-1], 0.0, direction)]
        tap_cell = self.grid.cell(*tap) if tap is not None else -1
        away = OFF_HANGING_TAP if self.plan.spots[wire.source].facing in "NS" else OFF_TAP
        starts = []
        for cell, is_open in tree.items():
            crossed = self.grid.across[cell] >= 0 and self.grid.upright[cell] >= 0
            crossed = crossed and self.grid.across[cell] != self.grid.upright[cell]
            if is_open and not crossed:
                below_tap = tap is not None and cell % self.grid.width == tap[0]
                starts.append(Start(cell, 0.0 if tap_cell in (-1, cell) else BELOW_TAP if below_tap else away))
        return [], starts

    def _trunk(self, wire: Wire, tap: tuple[int, int] | None) -> list[int]:
        """From the centre of the source straight out: to the tap where it lies ahead, else past the symbol."""
        spot = self.plan.spots[wire.source]
        x, y = self.routed.centre(spot)
        right, down = STEP[spot.exit or "E"]
        reach = outwards(spot)
        if tap is not None:
            ahead = (tap[0] - x) * right + (tap[1] - y) * down
            if ahead > reach and (tap[0] - x) * down == 0 and (tap[1] - y) * right == 0:
                further = range(reach + 1, ahead + 1)
                cells = [self.grid.cell(x + right * away, y + down * away) for away in further]
                if self.grid.free_straight(cells):
                    reach = ahead
        return [self.grid.cell(x + right * away, y + down * away) for away in range(reach + 1)]

    def _lane_path(self, wire: Wire, trunk: list[int], goal: int, arrival: int) -> list[int] | None:
        """Down (or up) from the tap, along the lane, and into the port, where all of that is free."""
        tap = self._tap(wire)
        if tap is None or wire.lane is None:
            return None
        tap_cell = self.grid.cell(*tap)
        if not (trunk and trunk[-1] == tap_cell) and not self.trees.get(wire.source, {}).get(tap_cell, False):
            return None
        lane = MARGIN_DOWN + wire.lane * self.routed.spacing.line
        goal_x, goal_y = self.grid.place(goal)
        if arrival not in (1, 3) or (lane - goal_y) * (1 if arrival == 3 else -1) < 0:
            return None
        points = [tap, (tap[0], lane), (goal_x, lane), (goal_x, goal_y)]
        path = [tap_cell]
        for (x, y), (to_x, to_y) in pairwise(points):
            right, down = (to_x > x) - (to_x < x), (to_y > y) - (to_y < y)
            while (x, y) != (to_x, to_y):
                x, y = x + right, y + down
                path.append(self.grid.cell(x, y))
        if not self.grid.free_straight(path[1:-1]):
            return None
        return path

    def _private(self, wire: Wire, path: list[int], from_symbol: bool) -> int:
        """Index of the path's cell behind which no other wire of the net will branch off."""
        if not from_symbol or self.net_of.count(wire.source) == 1:
            return 0
        line, spacing = self.plan.tap_line.get(wire.source), self.routed.spacing
        private = outwards(self.plan.spots[wire.source])
        if line is None:
            return private
        y = MARGIN_DOWN + line * spacing.line
        taps = {self.grid.cell(MARGIN_ACROSS + column * spacing.column, y) for column in self.plan.taps[wire.source]}
        return max([private, *(at for at, cell in enumerate(path) if cell in taps)])

    def _set_triangle(
        self, number: int, path: list[int], tree: dict[int, bool], private: int, from_symbol: bool
    ) -> None:
        """Set the triangle on the private part of the wire, and close the wire behind it to branches."""
        wire = self.plan.wires[number]
        assert wire.link is not None
        assert wire.link.coefficient is not None
        cells = [self.grid.place(cell) for cell in path]
        others = [*self.standing, *self.routed.triangles.values()]
        at_symbol = from_symbol and private == 0
        triangle = set_triangle(self.grid, self.plan, wire, cells, private, at_symbol, others, self.symbols)
        if triangle is None:
            self.routed.unset.append(number)
            return
        self.routed.triangles[number] = triangle
        for cell in path[triangle.run_start + 1 :]:
            tree[cell] = False
        left, top, right, bottom = triangle.cells()
        own = set(path)
        for y in range(top, bottom + 1):
            for x in range(left, right + 1):
                cell = self.grid.cell(x, y)
                if cell in own:
                    self.grid.knot[cell] = 1
                else:
                    self.grid.blocked[cell] = 1
        for cell in path[triangle.run_start :]:
            self.grid.cost[cell] += ALONG_TRIANGLE
        self.grid.make_costly(*triangle.label_cells(), cost=LABEL)

    def _judge(self) -> None:
        """Which wires cross others or run through labels, and how many bends there are."""
        taken: dict[int, list[int]] = {}
        for number, path in self.routed.paths.items():
            for x, y in path:
                taken.setdefault(self.grid.cell(x, y), []).append(number)
        nets = self.net_of
        for cell, wires in sorted(taken.items()):
            if not self.grid.blocked[cell]:
                for wire in wires:
                    if any(nets[other] != nets[wire] for other in wires):
                        self.routed.crossed.append(wire)
        for number, triangle in sorted(self.routed.triangles.items()):
            left, top, right, bottom = triangle.label_cells()
            for y in range(top, bottom + 1):
                for x in range(left, right + 1):
                    if (x, y) not in self.routed.paths[number]:
                        self.routed.hit += taken.get(self.grid.cell(x, y), [])
        self.routed.crossed = list(dict.fromkeys(self.routed.crossed))
        self.routed.hit = list(dict.fromkeys(self.routed.hit))
        for path in self.routed.paths.values():
            for before, here, after in zip(path, path[1:], path[2:], strict=False):
                self.routed.bends += (here[0] - before[0], here[1] - before[1]) != (
                    after[0] - here[0],
                    after[1] - here[1],
                )
