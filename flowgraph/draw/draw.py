"""Drawing a diagram: folded into symbols, placed, routed, composed into a picture, inked by the pen."""

from __future__ import annotations

from collections.abc import Mapping

from flowgraph.diagram.diagram import Diagram
from flowgraph.draw.compose import compose
from flowgraph.draw.describe import describe
from flowgraph.draw.ladder import find_ladder, place_ladder
from flowgraph.draw.loops import delay_free_pairs, loop_captions
from flowgraph.draw.model import Cell, Mark, Sketch, fold
from flowgraph.draw.picture import Picture
from flowgraph.draw.place import place
from flowgraph.draw.ports import assign_ports
from flowgraph.draw.route import Routed, route
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
    plan = place_ladder(sketch, ladder) if ladder is not None else place(sketch)
    assign_ports(plan)
    routed = route(plan, MOST_STEPS)
    if ladder is None and not routed.complete():
        routed = _with_more_room(sketch, routed)
    picture = compose(routed, diagram.title or diagram.name, describe(diagram), delay_free_pairs(diagram))
    return loop_captions(tighten(picture), diagram)


def _with_more_room(sketch: Sketch, routed: Routed) -> Routed:
    """Placed again, with a free column where wires found no way; the best of a few rounds."""
    best, crowded, steps = routed, routed.crowded(), MOST_STEPS - routed.steps
    for _ in range(ROUNDS):
        if steps <= 0:
            break
        plan = place(sketch, crowded)
        assign_ports(plan)
        routed = route(plan, steps)
        steps -= routed.steps
        if routed.score() < best.score():
            best = routed
        if best.complete():
            break
        crowded |= routed.crowded()
    return best
