"""Elements that reach no output, and the ends of lines that nothing reads."""

from __future__ import annotations

from dataclasses import replace

from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.elements import Delay, Element, Input, Signal, signals_read
from flowgraph.passes.change import Change
from flowgraph.passes.wording import listed


def drop_unread(diagram: Diagram) -> Change | None:
    """What reaches no output can be left out.

    `gain g = 3*x` that nothing reads is gone; `delay line = x by 12` of which line[5] is the last
    cell read becomes `by 5`. No output reads what went, so each computes what it did.
    """
    needed = _deepest_reads(diagram)
    kept: dict[str, Element] = {}
    shortened: list[str] = []
    for name, element in diagram.elements.items():
        if isinstance(element, Input):
            kept[name] = element
        elif name in needed:
            kept[name] = element
            if isinstance(element, Delay) and needed[name] < element.length:
                kept[name] = replace(element, length=needed[name], starts=element.starts[: needed[name]])
                shortened.append(name)
    dropped = [name for name in diagram.elements if name not in kept]
    if not dropped and not shortened:
        return None
    said = [f"dropped {listed(dropped)}"] if dropped else []
    said += [f"shortened {listed(shortened)}"] if shortened else []
    return Change(replace(diagram, elements=kept), "; ".join(said))


def _deepest_reads(diagram: Diagram) -> dict[str, int]:
    """Every element that reaches an output, with the last of its cells that is read (0 where it holds none)."""
    deepest: dict[str, int] = {}
    waiting: list[Signal] = [output.signal for output in diagram.outputs.values()]
    while waiting:
        signal = waiting.pop()
        if signal.name not in deepest:
            waiting.extend(signals_read(diagram.elements[signal.name]))
        deepest[signal.name] = max(signal.tap, deepest.get(signal.name, 0))
    return deepest
