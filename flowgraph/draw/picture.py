"""The picture as pure geometry in points, x to the right and y down: what the pen draws and tests measure."""

from __future__ import annotations

from dataclasses import dataclass, field, replace
from typing import Literal, TypeAlias

from flowgraph.draw.labels import text_width
from flowgraph.draw.rows import Side

Point: TypeAlias = tuple[float, float]
Box: TypeAlias = tuple[float, float, float, float]
ShapeKind: TypeAlias = Literal["adder", "delay", "triangle", "ellipsis"]
Role: TypeAlias = Literal["coefficient", "sign", "port", "connector", "badge", "heading", "note", "caption"]
Anchor: TypeAlias = Literal["left", "centre", "right"]

ARROW_LENGTH = 8.0
DOT_RADIUS = 3.0
LINE_HEIGHT = 0.96


@dataclass(frozen=True, slots=True)
class Shape:
    """A circle, box or triangle: its centre and size, which way it points, what it stands for."""

    kind: ShapeKind
    name: str
    x: float
    y: float
    width: float
    height: float
    facing: Side = "E"
    text: str = ""
    title: str = ""
    fill: str = ""
    frames: int = 1
    thick: bool = False
    loop: bool = False
    badge: str = ""

    def box(self) -> Box:
        return self.x - self.width / 2, self.y - self.height / 2, self.x + self.width / 2, self.y + self.height / 2


@dataclass(frozen=True, slots=True)
class WireLine:
    """A stretch of wire of the signal `net`, by its corners; with an arrowhead at its end or without."""

    net: str
    points: tuple[Point, ...]
    arrow: bool
    source: str
    target: str
    loop: bool = False


@dataclass(frozen=True, slots=True)
class Dot:
    """A branch of a wire."""

    net: str
    x: float
    y: float
    loop: bool = False


@dataclass(frozen=True, slots=True)
class Label:
    """A line of text whose left end, centre or right end is at x and whose middle is at y."""

    text: str
    x: float
    y: float
    size: float
    role: Role
    anchor: Anchor = "centre"
    of: str = ""

    def box(self) -> Box:
        """The room it takes in the widest font."""
        width, height = text_width(self.text, self.size), self.size * (0.4 if self.role == "sign" else LINE_HEIGHT)
        left = {"left": self.x, "centre": self.x - width / 2, "right": self.x - width}[self.anchor]
        return left, self.y - height / 2, left + width, self.y + height / 2


@dataclass(frozen=True, slots=True)
class Picture:
    """Everything on the page, what it is called, and what could not be drawn as a wire."""

    title: str
    description: str
    shapes: tuple[Shape, ...] = ()
    wires: tuple[WireLine, ...] = ()
    dots: tuple[Dot, ...] = ()
    labels: tuple[Label, ...] = ()
    connectors: tuple[str, ...] = field(default=())
    margin: float = 16.0

    def bounds(self) -> Box:
        """Left, top, right, bottom of all there is, with the margin."""
        boxes = [shape.box() for shape in self.shapes] + [label.box() for label in self.labels]
        boxes += [(x, y, x, y) for wire in self.wires for x, y in wire.points] or [(0.0, 0.0, 0.0, 0.0)]
        return (
            min(box[0] for box in boxes) - self.margin,
            min(box[1] for box in boxes) - self.margin,
            max(box[2] for box in boxes) + self.margin,
            max(box[3] for box in boxes) + self.margin,
        )

    def shifted(self, right: float, down: float) -> Picture:
        """The same picture elsewhere on the page."""
        return replace(
            self,
            shapes=tuple(replace(shape, x=shape.x + right, y=shape.y + down) for shape in self.shapes),
            wires=tuple(
                replace(wire, points=tuple((x + right, y + down) for x, y in wire.points)) for wire in self.wires
            ),
            dots=tuple(replace(dot, x=dot.x + right, y=dot.y + down) for dot in self.dots),
            labels=tuple(replace(label, x=label.x + right, y=label.y + down) for label in self.labels),
        )

    def with_labels(self, *labels: Label) -> Picture:
        return replace(self, labels=self.labels + labels)
