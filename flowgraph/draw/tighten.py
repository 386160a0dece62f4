"""Takes empty stretches out of a picture: rows that only upright wires pass through are narrowed."""

from __future__ import annotations

from bisect import bisect_right
from dataclasses import replace

from flowgraph.draw.picture import Picture

WIDEST_GAP = 44.0


def tighten(picture: Picture) -> Picture:
    """The same picture with no level gap of more than `WIDEST_GAP` points between things."""
    covered = [(box[1], box[3]) for box in [shape.box() for shape in picture.shapes]]
    covered += [(label.box()[1], label.box()[3]) for label in picture.labels]
    covered += [(y, y) for wire in picture.wires for _, y in wire.points]
    lows: list[float] = []
    shifts: list[float] = []
    bottom, shift = min((low for low, _ in covered), default=0.0), 0.0
    for low, high in sorted(covered):
        if low - bottom > WIDEST_GAP:
            shift += low - bottom - WIDEST_GAP
            lows.append(low)
            shifts.append(shift)
        bottom = max(bottom, high)

    def moved(y: float) -> float:
        at = bisect_right(lows, y) - 1
        return y - (shifts[at] if at >= 0 else 0.0)

    return replace(
        picture,
        shapes=tuple(replace(shape, y=moved(shape.y)) for shape in picture.shapes),
        wires=tuple(replace(wire, points=tuple((x, moved(y)) for x, y in wire.points)) for wire in picture.wires),
        dots=tuple(replace(dot, y=moved(dot.y)) for dot in picture.dots),
        labels=tuple(replace(label, y=moved(label.y)) for label in picture.labels),
    )
