"""Lines cut into stretches: neighbouring cells that nothing but the next cell reads.

A cell is as late in its run as the number of cells with the same starting content right before it.
Two cells can only be equal where they are equally late: cell by cell towards their inputs, one would
otherwise meet another content, or a sum, while the other does not. So lines cut at the same
latenesses are cut fine enough, and a line of a million cells is a few stretches.
"""

from __future__ import annotations

from bisect import bisect_left, bisect_right
from collections.abc import Hashable, Iterator
from itertools import groupby, pairwise
from typing import NamedTuple

from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.elements import Delay, Signal, signals_read
from flowgraph.diagram.expression import ZERO
from flowgraph.passes.proof import Keys


class Stretch(NamedTuple):
    """Cells `first .. last` of a line, of which only the last is read; both are 0 for what is no delay."""

    name: str
    first: int = 0
    last: int = 0

    @property
    def cells(self) -> int:
        """How many cells it holds: 0 for what is no delay."""
        return self.last - self.first + 1 if self.last else 0


class Lines:
    """The stretches of every delay, each with a label: stretches with unequal labels hold unequal cells."""

    def __init__(self, diagram: Diagram, keys: Keys) -> None:
        self._diagram = diagram
        self._runs = {line.name: _runs_of_contents(line, keys) for line in diagram.delays()}
        self._ahead = self._cells_ahead()
        self._cuts = self._latenesses_read()

    def stretches(self, line: Delay) -> Iterator[tuple[Stretch, Hashable]]:
        """The stretches of a line in the order of its cells, with their labels."""
        runs = self._runs[line.name]
        late = self._ahead[line.name]
        for (first, content), (behind, _) in pairwise([*runs, (line.length + 1, None)]):
            for stretch in self._cut(line.name, first, behind - 1, late):
                yield stretch, (content, stretch.cells, late is None)
            late = 0

    def _cut(self, name: str, first: int, last: int, late: int | None) -> Iterator[Stretch]:
        """The stretches of a run with so many equal cells ahead; each cell by itself where a ring is ahead."""
        if late is None:
            yield from (Stretch(name, tap, tap) for tap in range(first, last + 1))
            return
        ahead = late + 1 - first
        for cut in self._cuts[bisect_right(self._cuts, late) : bisect_right(self._cuts, ahead + last)]:
            yield Stretch(name, first, cut - ahead)
            first = cut - ahead + 1

    def _run_at(self, name: str, tap: int) -> tuple[int, Hashable]:
        """The run that holds a cell: its first cell, and the content."""
        runs = self._runs[name]
        return runs[bisect_right(runs, tap, key=lambda run: run[0]) - 1]

    def _cells_ahead(self) -> dict[str, int | None]:
        """How many cells right before each line hold what its first cell holds; None where they form a ring."""
        lines = {line.name: line for line in self._diagram.delays()}
        ahead: dict[str, int | None] = {}
        for name in lines:
            walk: dict[str, None] = {}
            while name not in ahead and name not in walk:
                walk[name] = None
                source = lines[name].signal
                first, content = self._run_at(*source) if source.tap else (0, None)
                if not source.tap or content != self._runs[name][0][1]:
                    ahead[name] = 0
                elif first > 1:
                    ahead[name] = source.tap + 1 - first
                else:
                    name = source.name
            for passed in reversed(walk):
                if passed not in ahead:
                    source = lines[passed].signal
                    late = ahead.get(source.name)
                    ahead[passed] = None if late is None else late + source.tap
        return ahead

    def _latenesses_read(self) -> list[int]:
        """How late the cells are that anything reads, and the last ones of runs and lines."""
        read: dict[Signal, None] = {}
        for element in self._diagram.elements.values():
            read.update(dict.fromkeys(signals_read(element)))
            if isinstance(element, Delay):
                ends = [first - 1 for first, _ in self._runs[element.name][1:]]
                read.update((Signal(element.name, end), None) for end in [*ends, element.length])
        read.update((output.signal, None) for output in self._diagram.outputs.values())
        found: set[int] = set()
        for name, tap in read:
            if tap:
                first, _ = self._run_at(name, tap)
                ahead = self._ahead[name] if first == 1 else 0
                if ahead is not None:
                    found.add(ahead + tap + 1 - first)
        return sorted(found)


def _runs_of_contents(line: Delay, keys: Keys) -> list[tuple[int, Hashable]]:
    """The first cell and the content of each run of cells that start with the same."""
    runs: list[tuple[int, Hashable]] = []
    tap = 1
    for start, cells in groupby(line.starts or [ZERO]):
        content = keys.of_expression(start)
        if not runs or runs[-1][1] != content:
            runs.append((tap, content))
        tap += sum(1 for _ in cells)
    return runs


class Numbering:
    """A number for each stretch and each element that is no delay, in the order of the file."""

    def __init__(self, diagram: Diagram, keys: Keys) -> None:
        lines = Lines(diagram, keys)
        self.stretches: list[Stretch] = []
        self.labels: dict[int, Hashable] = {}
        self.first: dict[str, int] = {}
        self._ends: dict[str, list[int]] = {}
        for name, element in diagram.elements.items():
            self.first[name] = len(self.stretches)
            if not isinstance(element, Delay):
                self.stretches.append(Stretch(name))
                continue
            for stretch, label in lines.stretches(element):
                self.labels[len(self.stretches)] = label
                self.stretches.append(stretch)
                self._ends.setdefault(name, []).append(stretch.last)

    def of(self, signal: Signal) -> int:
        """The number of the stretch that holds a signal."""
        return self.first[signal.name] + (bisect_left(self._ends[signal.name], signal.tap) if signal.tap else 0)

    def along(self, line: Delay) -> range:
        """The numbers of a line's stretches, in the order of its cells."""
        first = self.first[line.name]
        return range(first, first + len(self._ends[line.name]))
