"""The cells behind a signal after its readers changed: which stay, which are new, where each sample is found."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from typing import TypeAlias

from flowgraph.diagram.elements import Delay, Signal
from flowgraph.passes.network import Network
from flowgraph.passes.worthwhile import cells_needed

FreshNames: TypeAlias = Callable[[int, bool], list[str]]
"""Names for so many new cells: one each where all of them are read, else one for the line of them."""


class SettledLine:
    """The lines behind one node, at rest, once it is known who reads them.

    `cell[late]` is the signal so many cells behind the node, as far as anything that moved reads it;
    `lines` are what stays of the old delays by name (None where one is gone), `added` the new delays
    in the order of the wires.
    """

    def __init__(
        self, network: Network, node: str, still_read: list[Signal], read_late: set[int], fresh_names: FreshNames
    ) -> None:
        """`still_read` are the signals read as drawn, `read_late` how late the other readers read the node."""
        self.cell: dict[int, Signal] = {0: Signal(node)}
        self.added: list[Delay] = []
        self._takes_in: dict[Signal, Signal] = {}
        self._needed = cells_needed(network, node, still_read)
        old = network.lines.get(node, [])
        at: dict[int, list[Signal]] = {}
        late, latest = 0, max(read_late, default=0)
        for line in old:
            before = line.signal
            for tap in range(1, 1 + min(line.length, latest - network.offset[line.name])):
                cell = Signal(line.name, tap)
                at.setdefault(network.offset[line.name] + tap, []).append(cell)
                self._takes_in[cell] = before
                before = cell
        while late < latest:
            found = self._find(at.get(late + 1, []), self.cell[late])
            if found is None:
                break
            late += 1
            self.cell[late] = found
        if late < latest:  # old cells take in old cells, so behind a new one there are only new ones
            self._add(late, latest, fresh_names(latest - late, read_late.issuperset(range(late + 1, latest))))
        self.lines = {line.name: self._rest_of(line) for line in old}

    def _add(self, late: int, latest: int, names: list[str]) -> None:
        """New cells up to the latest reading: one by one where there are names enough, else as one line."""
        if len(names) < latest - late:
            self.added = [Delay(names[0], self.cell[late], latest - late)]
            self.cell.update((late + tap, Signal(names[0], tap)) for tap in range(1, latest - late + 1))
            return
        for at, name in zip(range(late + 1, latest + 1), names, strict=False):
            self.added.append(Delay(name, self.cell[at - 1]))
            self.cell[at] = Signal(name, 1)

    def _find(self, cells: list[Signal], before: Signal) -> Signal | None:
        """A cell that stays anyway; else an old one that takes in the cell before; else none."""
        for cell in cells:
            if cell.tap <= self._needed[cell.name]:
                return cell
        for cell in cells:
            if self._takes_in[cell] == before:
                self._needed[cell.name] = cell.tap
                return cell
        return None

    def _rest_of(self, line: Delay) -> Delay | None:
        needed = self._needed[line.name]
        if needed == 0:
            return None
        return line if needed == line.length else replace(line, length=needed, starts=())
