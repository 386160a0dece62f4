"""How merged cells are shown: badge, fill (Okabe-Ito, all legible under black), thick line, double frame."""

from __future__ import annotations

from dataclasses import replace

from flowgraph.draw.model import Mark
from flowgraph.draw.picture import Shape

FILLS = ("#F0E442", "#56B4E9", "#009E73", "#E69F00", "#CC79A7")


def marked(shape: Shape, first: Mark, last: Mark) -> Shape:
    """The box of a merged cell: its badge, fill, thick line, and a double frame where it is the cell kept."""
    letter = letters(first.letter)
    numbers = f"{letter}{first.number}" + (f"–{letter}{last.number}" if last.number != first.number else "")
    badge = numbers + (f" ×{first.kept}" if first.kept else "")
    title = f"{shape.title}, {'kept for' if first.kept else 'merges as'} {badge}"
    fill = FILLS[first.letter % len(FILLS)]
    return replace(shape, title=title, fill=fill, frames=2 if first.kept else 1, thick=True, badge=badge)


def letters(number: int) -> str:
    """A, B, .. Z, AA, AB, .."""
    text = ""
    number += 1
    while number:
        number, last = divmod(number - 1, 26)
        text = chr(ord("A") + last) + text
    return text
