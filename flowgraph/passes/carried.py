"""Where the cells of a diagram went, step by step, told as runs of neighbouring cells."""

from __future__ import annotations

from bisect import bisect_left, bisect_right
from collections.abc import Iterable, Mapping
from itertools import pairwise
from typing import NamedTuple

from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.elements import Signal


class Run(NamedTuple):
    """Neighbouring cells of a line before, from `cell` on, and the neighbouring cells after that do their work."""

    cell: Signal
    image: Signal
    cells: int

    def part(self, first: int, cells: int) -> Run:
        """So many of the cells, the first of them so many cells into the run."""
        return Run(_further(self.cell, first), _further(self.image, first), cells)


class Shared(NamedTuple):
    """Neighbouring cells of a line after that do the work of several runs before, each as long."""

    image: Signal
    sources: tuple[Signal, ...]
    cells: int


def whole_lines(diagram: Diagram) -> list[Run]:
    """Every line as it stands."""
    return [Run(Signal(line.name, 1), Signal(line.name, 1), line.length) for line in diagram.delays()]


def carried(runs: Iterable[Run], moved: Mapping[Signal, Signal], after: Diagram) -> list[Run]:
    """The runs after one more step; cells whose image is gone are left out."""
    lengths = {line.name: line.length for line in after.delays()}
    taps: dict[str, list[int]] = {}
    for signal in moved:
        taps.setdefault(signal.name, []).append(signal.tap)
    for found in taps.values():
        found.sort()
    made: list[Run] = []
    for run in runs:
        name, first = run.image
        moved_taps = taps.get(name, [])
        here = moved_taps[bisect_left(moved_taps, first) : bisect_right(moved_taps, first + run.cells - 1)]
        at = first
        for tap in [*here, first + run.cells]:
            stay = min(tap, lengths.get(name, 0) + 1) - at
            if stay > 0:
                _append(made, run.part(at - first, stay))
            if tap < first + run.cells:
                image = moved[Signal(name, tap)]
                if 1 <= image.tap <= lengths.get(image.name, 0):
                    _append(made, Run(_further(run.cell, tap - first), image, 1))
            at = tap + 1
    return made


def shared(runs: Iterable[Run]) -> list[Shared]:
    """The cells after that do the work of two or more, in runs as long as the same cells share them."""
    by_line: dict[str, list[Run]] = {}
    for run in runs:
        by_line.setdefault(run.image.name, []).append(run)
    return [found for line in by_line.values() for found in _shared_on_line(line)]


def _shared_on_line(runs: list[Run]) -> list[Shared]:
    """Cut wherever a run begins or ends."""
    begins: dict[int, list[int]] = {}
    ends: dict[int, list[int]] = {}
    for at, run in enumerate(runs):
        begins.setdefault(run.image.tap, []).append(at)
        ends.setdefault(run.image.tap + run.cells, []).append(at)
    found: list[Shared] = []
    here: dict[int, None] = {}
    cuts = sorted({*begins, *ends})
    for tap, next_tap in pairwise(cuts):
        for at in ends.get(tap, ()):
            del here[at]
        here.update(dict.fromkeys(begins.get(tap, ())))
        if len(here) > 1:
            sources = tuple(_further(runs[at].cell, tap - runs[at].image.tap) for at in sorted(here))
            found.append(Shared(Signal(runs[0].image.name, tap), sources, next_tap - tap))
    return found


def _append(runs: list[Run], run: Run) -> None:
    """Adds a run, as a longer end of the last one where it goes on from there."""
    if runs and _further(runs[-1].cell, runs[-1].cells) == run.cell:
        last = runs[-1]
        if _further(last.image, last.cells) == run.image:
            runs[-1] = Run(last.cell, last.image, last.cells + run.cells)
            return
    runs.append(run)


def _further(signal: Signal, cells: int) -> Signal:
    return Signal(signal.name, signal.tap + cells)
