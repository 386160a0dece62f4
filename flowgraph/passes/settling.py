"""The cells behind a signal after its readers changed: which stay, which are new, where each sample is found."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace

from flowgraph.diagram.elements import Delay, Signal
from flowgraph.passes.network import Network
from flowgraph.passes.worthwhile import cells_needed


class SettledLine:
    """The lines behind one node, at rest, once it is known who reads them.

    `cell[late]` is the signal so many cells behind the node, `lines` what stays of the old delays
    by name (None where one is gone), `added` the new delays in the order of the wires.
    """

    def __init__(
        self, network: Network, node: str, read: list[Signal], latest: int, fresh_names: Iterator[str]
    ) -> None:
        """`read` are the signals still read as drawn, `latest` how far the other readers reach.

        New cells take the fresh names in turn; behind one line of several cells they become one line too.
        """
        self.cell: dict[int, Signal] = {0: Signal(node)}
        self.added: list[Delay] = []
        self._takes_in: dict[Signal, Signal] = {}
        self._needed = cells_needed(network, node, read)
        old = network.lines.get(node, [])
        at: dict[int, list[Signal]] = {}
        for line in old:
            before = line.signal
            for tap in range(1, line.length + 1):
                cell = Signal(line.name, tap)
                at.setdefault(network.offset[line.name] + tap, []).append(cell)
                self._takes_in[cell] = before
                before = cell
        late = 0
        while late < latest or self._is_kept(at.get(late + 1, [])):
            late += 1
            found = self._find(at.get(late, []), self.cell[late - 1])
            self.cell[late] = found if found is not None else self._add(self.cell[late - 1], fresh_names)
        self.lines = {line.name: self._rest_of(line) for line in old}

    def _add(self, before: Signal, fresh_names: Iterator[str]) -> Signal:
        """A new cell behind a signal: a longer end of the last new line where no name is left."""
        name = next(fresh_names, None)
        if name is None:
            self.added[-1] = replace(self.added[-1], length=self.added[-1].length + 1)
        else:
            self.added.append(Delay(name, before))
        return Signal(self.added[-1].name, self.added[-1].length)

    def _is_kept(self, cells: list[Signal]) -> bool:
        return any(cell.tap <= self._needed[cell.name] for cell in cells)

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
