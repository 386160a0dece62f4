"""A diagram with its delay lines taken together: who reads whom, how many cells later.

A line at rest (contents 0) belongs to the signal at its head; what is left are inputs, adders and gains
that read each other late by so many cells. A line with contents stays an element of its own. An adder
in a loop that also reads signals from outside its loop is split in two: `y = b*x - a*y1` becomes
`v = b*x`, `y = v - a*y1`, so that the part before the loop can be told from the loop.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator, Mapping
from typing import NamedTuple

from flowgraph.diagram.diagram import Diagram, number_value
from flowgraph.diagram.elements import Delay, Signal
from flowgraph.diagram.index import strong_components
from flowgraph.passes.dominators import immediate_dominators
from flowgraph.passes.linear import UNIT, Weight, terms_of


class Wire(NamedTuple):
    """One reading: the node at the head of the line, how many cells later, the weight, and the signal as drawn."""

    node: str
    late: int
    weight: Weight
    signal: Signal


class Network:
    """Nodes in the order of the file; a split-off part stands behind all others.

    `wires[node]` is what a node reads. `lines[node]` are the delays at rest behind a node, each
    after the one it reads; `offset[delay]` is how late such a delay's source is. `split_from` leads
    from a split-off part to its adder. `loop[node]` numbers the strongly connected components.
    `shown[node]` are the signals of its line that ports show, `readers[node]` who reads it, over which wire.
    """

    def __init__(self, diagram: Diagram) -> None:
        self.diagram = diagram
        self.wires: dict[str, list[Wire]] = {}
        self.lines: dict[str, list[Delay]] = {}
        self.offset: dict[str, int] = {}
        self.split_from: dict[str, str] = {}
        self.with_contents: set[str] = set()
        self._head: dict[str, str] = {}
        self._place_delays()
        for name, element in diagram.elements.items():
            if name not in self.offset:
                read = [(element.signal, UNIT)] if isinstance(element, Delay) else terms_of(element) or []
                self.wires[name] = [self._wire(signal, weight) for signal, weight in read]
        self.loop = self._loops(self.wires)
        self._split_adders()
        self.shown: dict[str, list[Signal]] = {}
        for output in diagram.outputs.values():
            self.shown.setdefault(self.place(output.signal)[0], []).append(output.signal)
        self.readers: dict[str, list[tuple[str, Wire]]] = {name: [] for name in self.wires}
        for name, wires in self.wires.items():
            for wire in wires:
                self.readers[wire.node].append((name, wire))

    def place(self, signal: Signal) -> tuple[str, int]:
        """The node at the head of a signal's line, and how many cells later the signal is."""
        if signal.name in self.offset:
            return self._head[signal.name], self.offset[signal.name] + signal.tap
        return signal.name, signal.tap

    def latest_shown(self, node: str) -> int:
        """How late a port shows the node at most."""
        return max((self.place(signal)[1] for signal in self.shown.get(node, ())), default=0)

    def real(self, node: str) -> str:
        """The element a node stands for: for a split-off part its adder."""
        return self.split_from.get(node, node)

    def chain(self, delay: str) -> Iterator[str]:
        """The delay and those between it and the head of its line."""
        element = self.diagram.elements[delay]
        while element.name in self.offset and isinstance(element, Delay):
            yield element.name
            element = self.diagram.elements[element.signal.name]

    def _wire(self, signal: Signal, weight: Weight) -> Wire:
        return Wire(*self.place(signal), weight, signal)

    def _place_delays(self) -> None:
        """Finds the head of each line at rest; rings of delays alone have none and stay elements."""
        elements = self.diagram.elements
        for first in self.diagram.delays():
            walk = [first]
            on_walk = {first.name}
            while walk:
                delay = walk[-1]
                source = elements[delay.signal.name]
                if self._is_placed(delay):
                    walk.pop()
                elif any(number_value(start) != 0 for start in delay.starts):
                    self.with_contents.add(delay.name)
                elif not isinstance(source, Delay) or self._is_placed(source):
                    node, late = self.place(delay.signal)
                    self._head[delay.name], self.offset[delay.name] = node, late
                    self.lines.setdefault(node, []).append(delay)
                elif source.name in on_walk:
                    self.with_contents.add(delay.name)
                else:
                    walk.append(source)
                    on_walk.add(source.name)

    def _is_placed(self, delay: Delay) -> bool:
        return delay.name in self.offset or delay.name in self.with_contents

    def _loops(self, wires: Mapping[str, list[Wire]]) -> dict[str, int]:
        """The number of the strongly connected component of each node, reading among these nodes only."""
        names = list(wires)
        number = {name: at for at, name in enumerate(names)}
        reads = [[number[wire.node] for wire in wires[name] if wire.node in number] for name in names]
        return {names[member]: at for at, group in enumerate(strong_components(reads)) for member in group}

    def _split_adders(self) -> None:
        """Splits each adder of a loop that reads more than one plain signal from outside that loop."""
        parts: dict[str, list[Wire]] = {}
        for name, outside in self._outside_loops().items():
            wires = self.wires[name]
            plain = len(outside) == 1 and outside[0].weight == UNIT and outside[0].late == 0
            if not outside or plain or len(outside) == len(wires):
                continue
            part = f"{name} from outside"
            self.split_from[part] = name
            parts[part] = outside
            first = wires.index(outside[0])
            inside = [wire for wire in wires if wire not in outside]
            before = [wire for wire in wires[:first] if wire in inside]
            self.wires[name] = [*before, Wire(part, 0, UNIT, Signal(part)), *inside[len(before) :]]
        if parts:
            self.wires.update(parts)
            self.loop = self._loops(self.wires)

    def _outside_loops(self) -> dict[str, list[Wire]]:
        """For each adder in a loop what it reads from outside.

        Its loop is what is left of its strongly connected component without the node in it that
        every path to the adder passes: of a loop around a cascade only the adder's own section.
        """
        size = Counter(self.loop.values())
        adders = [
            name
            for name, wires in self.wires.items()
            if len(wires) > 1 and (size[self.loop[name]] > 1 or any(wire.node == name for wire in wires))
        ]
        nested = any(
            wire.late and wire.node != name and self._in_one_loop(wire.node, name)
            for name in adders
            for wire in self.wires[name]
        )
        dominator = immediate_dominators(self.wires, self.with_contents) if nested else {}
        inner: dict[str, dict[str, int]] = {}
        outside: dict[str, list[Wire]] = {}
        for name in adders:
            wires = self.wires[name]
            before = dominator.get(name)
            loop = self.loop
            if before is not None and self._in_one_loop(before, name):
                if before not in inner:
                    members = [other for other in self.wires if other != before and self._in_one_loop(other, name)]
                    inner[before] = self._loops({other: self.wires[other] for other in members})
                loop = inner[before]
            outside[name] = [wire for wire in wires if loop.get(wire.node) != loop[name]]
        return outside

    def _in_one_loop(self, node: str, other: str) -> bool:
        return self.loop[node] == self.loop[other]
