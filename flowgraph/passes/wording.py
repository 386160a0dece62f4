"""How steps name elements, cells and counts in their messages."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.elements import Delay, Signal

_SHOWN = 6


def moves_text(moved: Mapping[Signal, Signal], before: Diagram, after: Diagram) -> list[str]:
    """`x1 into line[1]`; neighbouring cells of one line that went to neighbouring cells are told as one."""
    runs: list[tuple[Signal, Signal, int]] = []
    for signal, image in moved.items():
        if runs and signal.tap and image.tap:
            first, first_image, length = runs[-1]
            if signal == (first.name, first.tap + length) and image == (first_image.name, first_image.tap + length):
                runs[-1] = (first, first_image, length + 1)
                continue
        runs.append((signal, image, 1))
    return [
        f"{signal_text(first, before, length)} into {signal_text(image, after, length)}"
        for first, image, length in runs
    ]


def listed(names: Sequence[str]) -> str:
    """Up to six names, and how many more there are."""
    shown = ", ".join(names[:_SHOWN])
    return shown if len(names) <= _SHOWN else f"{shown} and {len(names) - _SHOWN} more"


def counted(number: int, one: str) -> str:
    """`1 cell`, `2 cells`."""
    return f"{number} {one}" if number == 1 else f"{number} {one}s"


def signal_text(signal: Signal, diagram: Diagram, cells: int = 1) -> str:
    """A signal as it is written: the bare name, or the tap of a longer line, or `line[1 .. 6]` for several cells."""
    element = diagram.elements.get(signal.name)
    if signal.tap == 0 or (isinstance(element, Delay) and element.length == 1):
        return signal.name
    return f"{signal.name}[{signal.tap}]" if cells == 1 else f"{signal.name}[{signal.tap} .. {signal.tap + cells - 1}]"
