"""Who reads what once sections have changed places, before it is known which cells are needed for it."""

from __future__ import annotations

from typing import NamedTuple, TypeAlias

from flowgraph.diagram.elements import Delay, Signal
from flowgraph.passes.linear import UNIT, Weight
from flowgraph.passes.naming import Names, beside
from flowgraph.passes.network import Network, Wire
from flowgraph.passes.sections import Section
from flowgraph.passes.worthwhile import Exchange


class Behind(NamedTuple):
    """A node so many cells later, wherever that sample will be found."""

    node: str
    late: int


Terms: TypeAlias = list[tuple[Signal | Behind, Weight]]


class Moved(NamedTuple):
    """An exchange carried out: the new signal between the runs, and the names its cells get."""

    exchange: Exchange
    between: str
    cells: list[str]


class Rearrangement:
    """`terms[node]` is what each node of the moved sections reads; `changed` are those that read something new,
    `taken_up` all whose readings it holds.

    `name_of` leads from a split-off part that became an element to its name.
    """

    def __init__(self, network: Network, names: Names) -> None:
        self.terms: dict[str, Terms] = {}
        self.taken_up: set[str] = set()
        self.changed: set[str] = set()
        self.moved: list[Moved] = []
        self.name_of: dict[str, str] = {}
        self._network = network
        self._names = names

    def exchange(self, exchange: Exchange) -> None:
        """Lets run B read what run A read, run A read the new signal, and run A end where run B did."""
        before, middle, behind = exchange.signals
        moved = self._named(exchange)
        self.moved.append(moved)
        for node in sorted(exchange.members()):
            self._take_up(node)
        for end in (before, behind):
            if end in self._network.split_from:
                self._take_up(end)
        self._redirect(exchange.run_a[0], before, moved.between)
        self._redirect(exchange.run_a[-1], middle, behind)
        self._redirect(exchange.run_b[0], middle, before)
        self._redirect(exchange.run_b[-1], behind, moved.between)
        self.terms[moved.between] = self.terms[behind]
        self.terms[behind] = self.terms.pop(middle)
        self.changed |= {moved.between, behind, middle}

    def join_split_parts(self) -> None:
        """A split-off part goes back into the one adder that adds it, or becomes an element of its own."""
        for part in [node for node in self.terms if node in self._network.split_from]:
            readers = [
                (node, at)
                for node, terms in self.terms.items()
                for at, (read, _) in enumerate(terms)
                if isinstance(read, Behind) and read.node == part
            ]
            if len(readers) > 1 or any(self.terms[node][at] != (Behind(part, 0), UNIT) for node, at in readers):
                self._make_element(part)
                continue
            own = self.terms.pop(part)
            for node, at in readers:
                self.terms[node][at : at + 1] = own
                if part in self.changed:
                    self.changed.add(node)

    def _named(self, exchange: Exchange) -> Moved:
        """Textbook names for the signal between: w, and w1, w2 .. for its cells, or w_line for one long line.

        One line it is where a line moved, or where nothing but the next cell would read some cell.
        """
        before, _, behind = exchange.signals
        run_a, run_b = exchange.members_of_runs()
        wires = [*self._read_by(before, run_a), *self._read_by(behind, run_b)]
        read_late = {wire.late for wire in wires}
        latest = max(read_late)
        if any(self._on_line(wire.signal) for wire in wires) or not read_late.issuperset(range(1, latest)):
            own = ["w", "w_line"]
        else:
            own = ["w", *(f"w{cell}" for cell in range(1, 1 + latest))]
        neighbour = self._network.real(behind)
        between, *cells = self._names.fresh_group([beside(neighbour, name) for name in own])
        return Moved(exchange, between, cells)

    def _read_by(self, node: str, run: set[str]) -> list[Wire]:
        return [wire for reader, wire in self._network.readers[node] if reader in run]

    def _on_line(self, signal: Signal) -> bool:
        """Whether a signal comes from a line of several cells."""
        element = self._network.diagram.elements.get(signal.name)
        return isinstance(element, Delay) and element.length > 1

    def _take_up(self, node: str) -> None:
        """Notes what a node reads, and what the adder reads from which it was split."""
        for name in dict.fromkeys((node, self._network.real(node))):
            if name not in self.taken_up:
                self.taken_up.add(name)
                self.terms[name] = [self._term(wire) for wire in self._network.wires[name]]

    def _term(self, wire: Wire) -> tuple[Signal | Behind, Weight]:
        if wire.node in self._network.split_from:
            return Behind(wire.node, wire.late), wire.weight
        return wire.signal, wire.weight

    def _redirect(self, section: Section, old: str, new: str) -> None:
        """Lets the section read another node, as late as before."""
        for node in sorted(section.members):
            for at, (read, weight) in enumerate(self.terms[node]):
                head, late = read if isinstance(read, Behind) else self._network.place(read)
                if head == old:
                    self.terms[node][at] = (Behind(new, late), weight)
                    self.changed.add(node)

    def _make_element(self, part: str) -> None:
        adder = self._network.real(part)
        name = self._names.fresh(beside(adder, "v"))
        self.name_of[part] = name
        self.terms[name] = self.terms.pop(part)
        self.changed |= {name, adder}
        for node, terms in self.terms.items():
            self.terms[node] = [
                (Behind(name, read.late) if isinstance(read, Behind) and read.node == part else read, weight)
                for read, weight in terms
            ]
