"""What routing is measured in and what comes out of it: spacings, paths, triangles, and what went wrong."""

from __future__ import annotations

from dataclasses import dataclass, field

from flowgraph.draw.gains import Triangle
from flowgraph.draw.plan import Plan, Spot

MARGIN_ACROSS, MARGIN_DOWN = 6, 9

# Half sizes in cells: how far a symbol closes cells to all wires, and at which distance from its
# centre a wire must be on its way straight in (room for the arrowhead) or may first turn going out.
BODY: dict[str, tuple[int, int]] = {
    "adder": (1, 1), "delay": (2, 2), "gain": (2, 2), "input": (0, 0), "output": (0, 0), "ellipsis": (2, 1),
}  # fmt: skip
INWARDS = {"adder": 3, "delay": 4, "gain": 3, "output": 3, "input": 1, "ellipsis": 3}
OUTWARDS = {"adder": 2, "delay": 3, "gain": 3, "output": 1, "input": 2, "ellipsis": 3}
UPRIGHT_DELAY = (3, 2)


def inwards(spot: Spot) -> int:
    """How many cells before the centre a wire must be on its way straight in."""
    return UPRIGHT_DELAY[0] if spot.kind == "delay" and spot.facing in "NS" else INWARDS[spot.kind]


def outwards(spot: Spot) -> int:
    """How many cells behind the centre a wire may first turn or branch."""
    return UPRIGHT_DELAY[1] if spot.kind == "delay" and spot.facing in "NS" else OUTWARDS[spot.kind]


@dataclass(frozen=True, slots=True)
class Spacing:
    """Cells per column and per half row."""

    column: int
    line: int


SPACINGS = (Spacing(6, 5), Spacing(8, 6), Spacing(10, 8))


@dataclass(slots=True)
class Routed:
    """The paths of wires by wire number, where triangles stand, which wires and triangles found no place.

    `private[w]` is the number of the first cell of path w that is not shared with an earlier wire.
    """

    plan: Plan
    spacing: Spacing
    paths: dict[int, list[tuple[int, int]]] = field(default_factory=dict)
    triangles: dict[int, Triangle] = field(default_factory=dict)
    unrouted: list[int] = field(default_factory=list)
    unset: list[int] = field(default_factory=list)
    hit: list[int] = field(default_factory=list)
    crossed: list[int] = field(default_factory=list)
    bends: int = 0
    steps: int = 0

    def clear(self) -> bool:
        """Whether every wire and every triangle found its place, and no wire runs through a label."""
        return not self.unrouted and not self.unset and not self.hit

    def crowded(self) -> frozenset[int]:
        """The spots at the ends of wires that found no way, or no room for their triangle."""
        wires = [self.plan.wires[number] for number in self.unrouted + self.unset]
        return frozenset(end for wire in wires for end in (wire.source, wire.target))

    def score(self) -> tuple[int, int, int, int, int]:
        """What is wrong, worst first: wires missing, triangles missing, labels hit, crossings, bends."""
        return len(self.unrouted), len(self.unset), len(self.hit), len(self.crossed), self.bends

    def centre(self, spot: Spot) -> tuple[int, int]:
        """The cell of a spot's centre."""
        return MARGIN_ACROSS + spot.column * self.spacing.column, MARGIN_DOWN + spot.line * self.spacing.line
