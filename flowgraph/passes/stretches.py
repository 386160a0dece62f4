"""Lines cut into stretches: neighbouring cells that nothing but the next cell reads.

A cell at rest is as late as the number of cells at rest between it and what drives them: a sum, an
input, or a cell with a content. Two cells at rest can only be equal where they are equally late, so
lines cut at the same latenesses are cut fine enough, and a line of a million cells is a few stretches.
"""

from __future__ import annotations

from bisect import bisect_left, bisect_right
from collections.abc import Hashable, Iterator
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
        self._contents: dict[str, dict[int, Hashable]] = {
            line.name: _contents(line, keys) for line in diagram.delays() if line.starts
        }
        self._filled = {name: list(contents) for name, contents in self._contents.items()}
        self._ahead = self._cells_ahead()
        self._cuts = self._latenesses_read()

    def stretches(self, line: Delay) -> Iterator[tuple[Stretch, Hashable]]:
        """The stretches of a line in the order of its cells, with their labels."""
        contents = self._contents.get(line.name, {})
        before, late = 0, self._ahead[line.name]
        for filled in [*contents, line.length + 1]:
            yield from self._at_rest(line.name, before, filled, late)
            if filled <= line.length:
                yield Stretch(line.name, filled, filled), ("holds", contents[filled])
            before, late = filled, 0

    def _at_rest(self, name: str, before: int, behind: int, late: int | None) -> Iterator[tuple[Stretch, Hashable]]:
        """The stretches between two cells, the first of them so late; each cell by itself in a ring at rest."""
        if late is None:
            for tap in range(before + 1, behind):
                yield Stretch(name, tap, tap), "in a ring"
            return
        first = before + 1
        cells = behind - 1 - before
        for cut in self._cuts[bisect_right(self._cuts, late) : bisect_right(self._cuts, late + cells)]:
            last = before + cut - late
            yield Stretch(name, first, last), ("at rest", last - first + 1)
            first = last + 1

    def _late(self, signal: Signal) -> int | None:
        """How late a signal is; None for a cell of a line at rest whose own lateness must be known first."""
        if not signal.tap:
            return 0
        filled = self._filled.get(signal.name, [])
        at = bisect_right(filled, signal.tap)
        return signal.tap - filled[at - 1] if at else None

    def _cells_ahead(self) -> dict[str, int | None]:
        """How late each line's source is; None where it is driven by a ring of cells at rest alone."""
        lines = {line.name: line for line in self._diagram.delays()}
        ahead: dict[str, int | None] = {}
        for name in lines:
            walk: dict[str, None] = {}
            while name not in ahead and name not in walk:
                walk[name] = None
                late = self._late(lines[name].signal)
                if late is not None:
                    ahead[name] = late
                else:
                    name = lines[name].signal.name
            for passed in reversed(walk):
                if passed not in ahead:
                    source = lines[passed].signal
                    late = ahead.get(source.name)
                    ahead[passed] = None if late is None else late + source.tap
        return ahead

    def _latenesses_read(self) -> list[int]:
        """How late the signals are that anything reads, and the last cells before a content or the end of a line."""
        read: dict[Signal, None] = {}
        for element in self._diagram.elements.values():
            read.update(dict.fromkeys(signals_read(element)))
            if isinstance(element, Delay):
                read[Signal(element.name, element.length)] = None
                read.update(
                    (Signal(element.name, tap - 1), None) for tap in self._filled.get(element.name, ()) if tap > 1
                )
        read.update((output.signal, None) for output in self._diagram.outputs.values())
        found: set[int] = set()
        for signal in read:
            late = self._late(signal)
            if late is None and (ahead := self._ahead[signal.name]) is not None:
                late = ahead + signal.tap
            if late:
                found.add(late)
        return sorted(found)


def _contents(line: Delay, keys: Keys) -> dict[int, Hashable]:
    """The cells that do not start with 0, with the keys of their contents."""
    rest = keys.of_expression(ZERO)
    found = ((tap, keys.of_expression(start)) for tap, start in enumerate(line.starts, start=1))
    return {tap: key for tap, key in found if key != rest}


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
