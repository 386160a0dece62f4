"""From routed cells to the picture: wires cut at the symbols, dots, signs and labels on free ground."""

from __future__ import annotations

from itertools import pairwise

from flowgraph.draw.cutting import corners, cut, cut_out, overlap
from flowgraph.draw.gains import LENGTH, WIDTH, Triangle, standing_triangle
from flowgraph.draw.grid import CELL
from flowgraph.draw.labels import (
    coefficient_label,
    delay_label,
    expression_label,
    name_label,
    port_label,
)
from flowgraph.draw.marks import marked
from flowgraph.draw.model import Part
from flowgraph.draw.picture import Anchor, Box, Dot, Label, Picture, Point, Shape, WireLine
from flowgraph.draw.plan import COEFFICIENT_SIZE, PORT_SIZE, Plan, Spot, Wire
from flowgraph.draw.ports import STEP
from flowgraph.draw.routed import Routed
from flowgraph.draw.rows import Side

ADDER_RADIUS = 10.0
DELAY_WIDTH, DELAY_HEIGHT = 36.0, 30.0
SIGN_SIZE, BADGE_SIZE = 13.0, 9.0
STUB = 9.0
PORT_REACH = {"input": 8.0, "output": 8.0}
BORDER: dict[str, tuple[float, float]] = {
    "adder": (ADDER_RADIUS, ADDER_RADIUS),
    "delay": (DELAY_WIDTH / 2, DELAY_HEIGHT / 2),
    "gain": (LENGTH / 2, WIDTH / 2),
    "input": (8.0, 8.0),
    "output": (8.0, 8.0),
    "ellipsis": (16.0, 8.0),
}


def compose(routed: Routed, title: str, description: str, loop: frozenset[tuple[str, str]] = frozenset()) -> Picture:
    """The picture of a routed plan; `loop` holds the (source, target) element pairs of delay-free loops."""
    return _Composer(routed, title, description, loop).picture()


class _Composer:
    def __init__(self, routed: Routed, title: str, description: str, loop: frozenset[tuple[str, str]]) -> None:
        self.routed = routed
        self.plan: Plan = routed.plan
        self.title = title
        self.description = description
        self.loop = loop
        self.in_loop = {name for pair in loop for name in pair}
        self.shapes: list[Shape] = []
        self.wires: list[WireLine] = []
        self.labels: list[Label] = []
        self.dots: list[Dot] = []
        self.connectors: list[str] = []
        self.badges: list[list[Label]] = []

    def picture(self) -> Picture:
        for spot in self.plan.spots:
            self._draw_symbol(spot)
        for number in sorted(self.routed.paths):
            self._draw_wire(number)
        self._draw_dots()
        for number, triangle in sorted(self.routed.triangles.items()):
            self._draw_triangle(number, triangle)
        for number in self.routed.unrouted:
            self._draw_connector(number)
        for number in self.routed.unset:
            if number in self.routed.paths:
                self._label_bare_coefficient(number)
        for number in range(len(self.plan.wires)):
            self._draw_sign(number)
        for places in self.badges:
            self.labels.append(self._freest(places))
        self.wires.sort(key=lambda wire: wire.loop)
        return Picture(
            self.title,
            self.description,
            tuple(self.shapes),
            tuple(self.wires),
            tuple(self.dots),
            tuple(self.labels),
            tuple(self.connectors),
        )

    def _part(self, spot: Spot) -> Part:
        return self.plan.sketch.parts[spot.part]

    def _centre(self, spot: Spot) -> Point:
        x, y = self.routed.centre(spot)
        return x * CELL, y * CELL

    def _draw_symbol(self, spot: Spot) -> None:
        part = self._part(spot)
        x, y = self._centre(spot)
        loop = part.name in self.in_loop
        match spot.kind:
            case "adder":
                self.shapes.append(Shape("adder", part.name, x, y, 20.0, 20.0, title=f"adder {part.name}", loop=loop))
            case "delay":
                title = f"delay {part.name}, {part.length} sample{'s' if part.length > 1 else ''}"
                text = delay_label(part.length)
                shape = Shape("delay", part.name, x, y, DELAY_WIDTH, DELAY_HEIGHT, spot.facing, text, title)
                self.shapes.append(shape if part.marks is None else marked(shape, *part.marks))
                if part.marks is not None:
                    badge = self.shapes[-1].badge
                    places = [
                        (x + right * 21, y + down * 11, right) for right, down in ((1, -1), (1, 1), (-1, 1), (-1, -1))
                    ]
                    self.badges.append(
                        [Label(badge, at, to, BADGE_SIZE, "badge", "left" if side > 0 else "right", part.name)
                         for at, to, side in places]
                    )  # fmt: skip
            case "gain":
                assert part.coefficient is not None
                upright = spot.facing in "NS"
                width, height = (WIDTH, LENGTH) if upright else (LENGTH, WIDTH)
                title = f"gain {part.name} = {expression_label(part.coefficient)}"
                self.shapes.append(
                    Shape("triangle", part.name, x, y, width, height, spot.facing, title=title, loop=loop)
                )
                left, top, right, bottom = standing_triangle(*self.routed.centre(spot), spot.facing, part).label_box()
                middle = ((left + right) / 2 * CELL, (top + bottom) / 2 * CELL)
                text = coefficient_label(part.coefficient)
                self.labels.append(Label(text, *middle, COEFFICIENT_SIZE, "coefficient", of=part.name))
            case "input":
                self.labels.append(Label(port_label(part.name), x + 4, y, PORT_SIZE, "port", "right", part.name))
            case "output":
                left = spot.facing == "E"
                self.labels.append(
                    Label(port_label(part.name), x - 2 if not left else x + 2, y, PORT_SIZE, "port",
                          "right" if left else "left", part.name)
                )  # fmt: skip
            case "ellipsis":
                if spot.line == 0:
                    self.labels.append(Label(part.name, x, y + 1.5 * 40, COEFFICIENT_SIZE, "note", of=part.name))
                self.shapes.append(Shape("ellipsis", part.name, x, y, 32.0, 6.0, text="· · ·"))

    def _names(self, wire: Wire) -> tuple[str, str]:
        return self._part(self.plan.spots[wire.source]).name, self._part(self.plan.spots[wire.target]).name

    def _is_loop(self, wire: Wire) -> bool:
        source, target = self._names(wire)
        if self.plan.spots[wire.target].kind == "output":
            return False
        if wire.link is None:
            return source in self.in_loop and wire.source in self._loop_circles()
        via = wire.link.gain
        return (source, target) in self.loop or (bool(via) and (via, target) in self.loop)

    def _loop_circles(self) -> set[int]:
        """Lower circles that a loop runs through on its way up to the adder's top circle."""
        found: set[int] = set()
        for wire in self.plan.wires:
            if wire.link is not None and self._is_loop(wire):
                at = wire.target
                while not self.plan.spots[at].top:
                    found.add(at)
                    at = next(chain.target for chain in self.plan.wires if chain.link is None and chain.source == at)
        return found

    def _net(self, wire: Wire) -> str:
        return f"{wire.source}"

    def _draw_wire(self, number: int) -> None:
        wire = self.plan.wires[number]
        cells = self.routed.paths[number]
        source, target = self.plan.spots[wire.source], self.plan.spots[wire.target]
        points = [(x * CELL, y * CELL) for x, y in corners(cells)]
        if cells[0] == self.routed.centre(source):
            points[0] = cut(points[0], points[1], BORDER[source.kind])
        points[-1] = cut(points[-1], points[-2], BORDER[target.kind])
        names = self._names(wire)
        if self._is_loop(wire) and cells[0] != self.routed.centre(source):
            self._draw_shared_loop(wire, cells[0])
        arrow = target.kind != "gain"
        triangle = self.routed.triangles.get(number)
        stretches = [points] if triangle is None else cut_out(points, triangle)
        for at, stretch in enumerate(stretches):
            last = at == len(stretches) - 1
            self.wires.append(
                WireLine(self._net(wire), tuple(stretch), arrow and last, *names, loop=self._is_loop(wire))
            )

    def _draw_shared_loop(self, wire: Wire, branch: tuple[int, int]) -> None:
        """The stretch of a loop that it shares with earlier wires of its net, from the symbol to the branch."""
        net = [cells for number, cells in self.routed.paths.items() if self.plan.wires[number].source == wire.source]
        came: dict[tuple[int, int], tuple[int, int]] = {}
        for cells in net:
            for before, here in pairwise(cells):
                came.setdefault(here, before)
        source = self.plan.spots[wire.source]
        path = [branch]
        while path[-1] in came and path[-1] != self.routed.centre(source):
            path.append(came[path[-1]])
        points = [(x * CELL, y * CELL) for x, y in corners(path[::-1])]
        points[0] = cut(points[0], points[1], BORDER[source.kind])
        self.wires.append(WireLine(self._net(wire), tuple(points), False, *self._names(wire), loop=True))

    def _draw_triangle(self, number: int, triangle: Triangle) -> None:
        wire = self.plan.wires[number]
        assert wire.link is not None
        assert wire.link.coefficient is not None
        name = wire.link.gain or f"{self._names(wire)[0]} to {self._names(wire)[1]}"
        width, height = (WIDTH, LENGTH) if triangle.upright() else (LENGTH, WIDTH)
        title = f"gain {name} = {expression_label(wire.link.coefficient)}"
        x, y = triangle.x * CELL, triangle.y * CELL
        self.shapes.append(
            Shape("triangle", name, x, y, width, height, triangle.facing, title=title, loop=self._is_loop(wire))
        )
        left, top, right, bottom = (CELL * edge for edge in triangle.label_box())
        middle = (top + bottom) / 2
        if not triangle.upright():
            self.labels.append(Label(triangle.label, x, middle, COEFFICIENT_SIZE, "coefficient", of=name))
        elif triangle.label_before:
            self.labels.append(Label(triangle.label, left, middle, COEFFICIENT_SIZE, "coefficient", "left", name))
        else:
            self.labels.append(Label(triangle.label, right, middle, COEFFICIENT_SIZE, "coefficient", "right", name))

    def _draw_dots(self) -> None:
        """A dot wherever three or four stretches of one net meet."""
        arms: dict[tuple[int, int, int], set[tuple[int, int]]] = {}
        looped: dict[tuple[int, int, int], bool] = {}
        for number, cells in sorted(self.routed.paths.items()):
            wire = self.plan.wires[number]
            for (x, y), (to_x, to_y) in pairwise(cells):
                arms.setdefault((wire.source, x, y), set()).add((to_x - x, to_y - y))
                arms.setdefault((wire.source, to_x, to_y), set()).add((x - to_x, y - to_y))
                if self._is_loop(wire):
                    looped[wire.source, x, y] = True
        for (net, x, y), directions in arms.items():
            if len(directions) > 2:
                self.dots.append(Dot(f"{net}", x * CELL, y * CELL, looped.get((net, x, y), False)))

    def _draw_sign(self, number: int) -> None:
        wire = self.plan.wires[number]
        target = self.plan.spots[wire.target]
        if wire.link is None or not wire.link.negative or target.kind != "adder":
            return
        x, y = self._centre(target)
        side = target.ports[number]
        candidates = {
            "W": [(-17.0, -9.0), (-17.0, 9.0)],
            "E": [(17.0, -9.0), (17.0, 9.0)],
            "S": [(10.0, 16.0), (-10.0, 16.0)],
            "N": [(10.0, -16.0), (-10.0, -16.0)],
        }[side]
        signs = [
            Label("−", x + right, y + down, SIGN_SIZE, "sign", of=self._names(wire)[1]) for right, down in candidates
        ]
        self.labels.append(self._freest(signs))

    def _freest(self, candidates: list[Label]) -> Label:
        """The first label that touches nothing, else the one that touches least."""
        return min(candidates, key=lambda label: (self._touches(label.box()), candidates.index(label)))

    def _touches(self, box: Box) -> int:
        boxes = [shape.box() for shape in self.shapes] + [label.box() for label in self.labels]
        count = sum(overlap(box, other) for other in boxes)
        for wire in self.wires:
            for (x, y), (to_x, to_y) in zip(wire.points, wire.points[1:], strict=False):
                count += overlap(box, (min(x, to_x), min(y, to_y), max(x, to_x), max(y, to_y)))
        return count

    def _label_bare_coefficient(self, number: int) -> None:
        """A coefficient whose triangle found no room stands at its arrow, so that it is never lost."""
        wire = self.plan.wires[number]
        assert wire.link is not None
        assert wire.link.coefficient is not None
        (x, y), side = self._centre(self.plan.spots[wire.target]), self.plan.spots[wire.target].ports[number]
        right, down = STEP[side]
        text = "×" + coefficient_label(wire.link.coefficient)
        x, y = x + right * 30, y + down * 30
        places = [(x + 6, y - 10, "left"), (x - 6, y - 10, "right"), (x + 6, y + 10, "left"), (x - 6, y + 10, "right")]
        name = wire.link.gain or self._names(wire)[0]
        self.labels.append(
            self._freest(
                [Label(text, at, to, COEFFICIENT_SIZE, "coefficient", "left" if side == "left" else "right", name)
                 for at, to, side in places]
            )
        )  # fmt: skip

    def _draw_connector(self, number: int) -> None:
        """A wire that found no way: a stub at both ends, with the name of the signal."""
        wire = self.plan.wires[number]
        source_name, target_name = self._names(wire)
        self.connectors.append(f"{source_name} to {target_name}")
        text = name_label(source_name)
        target = self.plan.spots[wire.target]
        x, y = self._centre(target)
        side: Side = target.ports.get(number, "W")
        right, down = STEP[side]
        border = BORDER[target.kind][0 if right else 1]
        tip = (x + right * border, y + down * border)
        reach = border + STUB
        end = (x + right * reach, y + down * reach)
        self.wires.append(WireLine(f"connector {number}", (end, tip), True, source_name, target_name))
        if wire.link is not None and wire.link.coefficient is not None:
            text = f"{coefficient_label(wire.link.coefficient)}·{text}"
        x, y = end[0] + right * 3, end[1] + down * 9
        if right:
            places: list[tuple[float, float, Anchor]] = [
                (x, y, "left" if right > 0 else "right"),
                (x, y - 9, "left" if right > 0 else "right"),
                (x, y + 9, "left" if right > 0 else "right"),
            ]
        else:
            places = [(x, y, "centre"), (x + 4, y - down * 6, "left"), (x - 4, y - down * 6, "right")]
        self.labels.append(
            self._freest(
                [Label(text, at, to, COEFFICIENT_SIZE, "connector", anchor, source_name) for at, to, anchor in places]
            )
        )
        source = self.plan.spots[wire.source]
        if source.kind == "input" or any(label.of == source_name and label.role == "note" for label in self.labels):
            return
        x, y = self._centre(source)
        spots = [
            (x + 12, y - 14),
            (x + 12, y + 14),
            (x - 30, y - 14),
            (x - 30, y + 14),
            (x + 20, y - 24),
            (x - 30, y - 24),
        ]
        self.labels.append(
            self._freest(
                [Label(name_label(source_name), at, to, 11.0, "note", "left", source_name) for at, to in spots]
            )
        )
