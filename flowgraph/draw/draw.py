"""Drawing a diagram: folded into symbols, placed, routed, composed into a picture, inked by the pen."""

from __future__ import annotations

from collections.abc import Mapping

from flowgraph.diagram.diagram import Diagram
from flowgraph.draw.compose import compose
from flowgraph.draw.describe import describe
from flowgraph.draw.ladder import Ladder, find_ladder, place_ladder
from flowgraph.draw.loops import delay_free_pairs, loop_captions
from flowgraph.draw.model import Cell, Mark, Sketch, fold
from flowgraph.draw.picture import Picture
from flowgraph.draw.place import place
from flowgraph.draw.ports import assign_ports
from flowgraph.draw.route import route
from flowgraph.draw.routed import SPACINGS, Routed
from flowgraph.draw.tighten import tighten

MOST_PARTS = 600
ROUNDS = 3
MOST_STEPS = 250_000


class TooLarge(Exception):
    """A diagram with more symbols than a page can show."""


def draw_picture(diagram: Diagram, marks: Mapping[Cell, Mark] | None = None) -> Picture:
    """The picture of one diagram without a heading. Raises TooLarge above `MOST_PARTS` symbols.

    An FIR ladder of any length is drawn with its first and last taps.
    """
    sketch = fold(diagram, marks)
    if not sketch.parts:
        return Picture(diagram.title or diagram.name, describe(diagram))
    ladder = find_ladder(sketch)
    if ladder is None and len(sketch.parts) > MOST_PARTS:
        raise TooLarge(
            f"diagram {diagram.name} has {len(sketch.parts)} symbols; a drawing shows {MOST_PARTS} at most. "
            "Draw the diagrams it uses one by one, as FILE:NAME"
        )
    routed = _route_ladder(sketch, ladder) if ladder is not None else _route_with_room(sketch)
    picture = compose(routed, diagram.title or diagram.name, describe(diagram), delay_free_pairs(diagram))
    return loop_captions(tighten(picture), diagram)


def _route_ladder(sketch: Sketch, ladder: Ladder) -> Routed:
    """A ladder has room for everything from the start."""
    plan = place_ladder(sketch, ladder)
    assign_ports(plan)
    return route(plan, SPACINGS[0], MOST_STEPS)


def _route_with_room(sketch: Sketch) -> Routed:
    """Placed and routed until every wire, triangle and label has its place, else the best that was found.

    Where wires found no way, a column beside their ends is left free and all is placed again; when
    that is of no more use, the whole grid is widened.
    """
    best: Routed | None = None
    crowded: frozenset[int] = frozenset()
    steps = MOST_STEPS
    for spacing in SPACINGS:
        before = ""
        for _ in range(ROUNDS):
            plan = place(sketch, crowded)
            if plan.dump() == before:
                break
            before = plan.dump()
            assign_ports(plan)
            routed = route(plan, spacing, steps)
            steps -= routed.steps
            if best is None or routed.score()[:3] < best.score()[:3]:
                best = routed
            if best.clear() or steps <= 0:
                return best
            if crowded.issuperset(routed.crowded()):
                break
            crowded |= routed.crowded()
    assert best is not None
    return best
