"""Carries out exchanges of sections: which cells stay, what is new, and the regions to be proved."""

from __future__ import annotations

from dataclasses import replace
from functools import partial

from flowgraph.diagram.diagram import Diagram, count
from flowgraph.diagram.elements import Delay, Element, Signal, signals_read
from flowgraph.passes.change import Change
from flowgraph.passes.linear import collected, element_of
from flowgraph.passes.naming import Names
from flowgraph.passes.network import Network
from flowgraph.passes.rearrangement import Behind, Moved, Rearrangement
from flowgraph.passes.settling import FreshNames, SettledLine
from flowgraph.passes.wording import counted, listed
from flowgraph.passes.worthwhile import Exchange, cells_needed


def exchanged(network: Network, exchanges: list[Exchange]) -> Change:
    """The diagram after these exchanges, none of which shares a section with another."""
    return _Exchanging(network, exchanges).change()


class _Exchanging:
    def __init__(self, network: Network, exchanges: list[Exchange]) -> None:
        self._network = network
        self._names = Names(network.diagram)
        self._arranged = Rearrangement(network, self._names)
        for exchange in exchanges:
            self._arranged.exchange(exchange)
        self._arranged.join_split_parts()
        self._settled = self._settle_lines()

    def change(self) -> Change:
        """The rewritten diagram with the regions it changed and where the cells went."""
        before = self._network.diagram
        after = replace(before, elements=self._elements())
        return Change(after, self._message(after), self._cells_moved(), self._regions(after))

    def _settle_lines(self) -> dict[str, SettledLine]:
        """The lines behind every node whose readers changed."""
        read_late: dict[str, set[int]] = {}
        still_read: dict[str, list[Signal]] = {}
        for moved in self._arranged.moved:
            read_late.update((self._name(node), set()) for node in (*moved.exchange.signals, moved.between))
        read_late.update((name, set()) for name in self._arranged.name_of.values())
        for terms in self._arranged.terms.values():
            for read, _ in terms:
                if isinstance(read, Behind):
                    read_late[read.node].add(read.late)
                else:
                    still_read.setdefault(self._network.place(read)[0], []).append(read)
        for node in read_late:
            for reader, wire in self._network.readers.get(node, ()):
                if reader not in self._arranged.taken_up:
                    still_read.setdefault(node, []).append(wire.signal)
        cells_of = {moved.between: moved.cells for moved in self._arranged.moved}
        return {
            node: SettledLine(
                self._network, node, still_read.get(node, []), late, self._fresh_names(node, cells_of.get(node))
            )
            for node, late in read_late.items()
        }

    def _fresh_names(self, node: str, given: list[str] | None) -> FreshNames:
        """The names the exchange gave the cells of a signal between, else such as stand behind the node."""
        return partial(self._names.cells_behind, node) if given is None else lambda number, each: given

    def _name(self, node: str) -> str:
        return self._arranged.name_of.get(node, node)

    def _signal(self, read: Signal | Behind) -> Signal:
        return self._settled[read.node].cell[read.late] if isinstance(read, Behind) else read

    def _rewritten(self) -> dict[str, Element]:
        """The adders and gains that read something new."""
        old = self._network.diagram.elements
        made: dict[str, Element] = {}
        for name, terms in self._arranged.terms.items():
            if name in self._arranged.changed:
                span = old[name].span if name in old else next(iter(old.values())).span
                made[name] = element_of(name, collected((self._signal(read), weight) for read, weight in terms), span)
        return made

    def _elements(self) -> dict[str, Element]:
        """Old elements in their places; a new signal stands before the element that ends its exchange."""
        rewritten = self._rewritten()
        lines = {name: line for settled in self._settled.values() for name, line in settled.lines.items()}
        gone = {moved.exchange.signals[1] for moved in self._arranged.moved}
        new_before: dict[str, list[str]] = {}
        for moved in self._arranged.moved:
            new_before.setdefault(self._network.real(moved.exchange.signals[2]), []).append(moved.between)
        for part, name in self._arranged.name_of.items():
            new_before.setdefault(self._network.real(part), []).append(name)
        elements: dict[str, Element] = {}
        for name, element in self._network.diagram.elements.items():
            for new in new_before.get(name, ()):
                elements[new] = rewritten[new]
                elements.update((line.name, line) for line in self._settled[new].added)
            line = lines.get(name, element)
            if line is not None and name not in gone:
                elements[name] = rewritten.get(name, line)
            if name in self._settled:
                elements.update((line.name, line) for line in self._settled[name].added)
        return elements

    def _cells_moved(self) -> dict[Signal, Signal]:
        """For each cell that is gone the one that does its work now."""
        moved_cells: dict[Signal, Signal] = {}
        for moved in self._arranged.moved:
            before, middle, behind = moved.exchange.signals
            run_a, run_b = moved.exchange.members_of_runs()
            for node, readers, head in (
                (before, run_a, moved.between),
                (behind, run_b, moved.between),
                (middle, run_a, behind),
                (middle, run_b, before),
            ):
                read = [wire.signal for reader, wire in self._network.readers[node] if reader in readers]
                settled = self._settled[self._name(node)].lines
                for name, needed in cells_needed(self._network, node, read).items():
                    rest = settled.get(name)
                    for tap in range(1 + (rest.length if rest is not None else 0), needed + 1):
                        image = self._settled[self._name(head)].cell.get(self._network.offset[name] + tap)
                        if image is not None:
                            moved_cells.setdefault(Signal(name, tap), image)
        return moved_cells

    def _regions(self, after: Diagram) -> tuple[frozenset[str], ...]:
        """For each exchange its sections, their lines and what is new; those that share a change as one."""
        before = self._network.diagram
        names = dict.fromkeys([*before.elements, *after.elements])
        changed = {name for name in names if before.elements.get(name) != after.elements.get(name)}
        regions: list[set[str]] = []
        home: dict[str, set[str]] = {}
        for moved in self._arranged.moved:
            region = self._region(moved, after)
            for name in sorted(region & changed):
                other = home.get(name, region)
                if other is not region:
                    regions = [kept for kept in regions if kept is not other]
                    region |= other
            regions.append(region)
            home.update((name, region) for name in region & changed)
        return tuple(frozenset(region) for region in regions)

    def _region(self, moved: Moved, after: Diagram) -> set[str]:
        before, _, behind = moved.exchange.signals
        members = moved.exchange.members()
        parts = {node for node in (*members, before, behind) if node in self._network.split_from}
        region = {self._network.real(node) for node in members | parts} | {moved.between}
        region |= {self._arranged.name_of[part] for part in parts if part in self._arranged.name_of}
        region |= {line.name for node in members - {behind} for line in self._network.lines.get(node, ())}
        ends = {before, behind, moved.between, self._name(before), self._name(behind)}
        region |= {line.name for end in ends if end in self._settled for line in self._settled[end].added}
        for diagram in (self._network.diagram, after):
            on_lines: set[str] = set()
            for name in sorted(region):
                if name in diagram.elements:
                    for signal in signals_read(diagram.elements[name]):
                        on_lines.update(self._line_to(signal, diagram, ends, on_lines))
            region |= on_lines
        return region

    def _line_to(self, signal: Signal, diagram: Diagram, heads: set[str], known: set[str]) -> list[str]:
        """The delays between a signal and one of these nodes, or one known to lead there; none of other lines."""
        passed: list[str] = []
        element = diagram.elements[signal.name]
        # A ring of delays alone has no head; one of them counts as a line with contents.
        while isinstance(element, Delay) and element.name not in known and not self._holds_contents(element):
            passed.append(element.name)
            element = diagram.elements[element.signal.name]
        return passed if element.name in heads or element.name in known else []

    def _holds_contents(self, line: Delay) -> bool:
        return line.name in self._network.with_contents

    def _message(self, after: Diagram) -> str:
        before = self._network.diagram
        ends = [f"before {self._network.real(moved.exchange.signals[2])}" for moved in self._arranged.moved]
        new = [cell for moved in self._arranged.moved for cell in moved.cells]
        said = f"exchanged the sections {listed(ends)}"
        said += f": {counted(count(before).cells, 'cell')} became {count(after).cells}"
        new = [name for name in new if name in after.elements]
        return f"{said}, new {listed(new)}" if new else said
