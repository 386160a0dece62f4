"""Which neighbouring runs of sections are worth exchanging, counted in cells.

Run A reads c_i and makes c_j, run B reads c_j and makes c_k. Exchanged, B reads c_i and makes a new
signal w, and A reads w and makes c_k: the line that A kept of its input and the line that B kept of
its output are then lines of one signal.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from itertools import pairwise
from typing import NamedTuple

from flowgraph.diagram.elements import Signal
from flowgraph.passes.network import Network
from flowgraph.passes.sections import Section

_MOST_KINDS = 250_000
_NEAR = 8


@dataclass(frozen=True, slots=True)
class Exchange:
    """Sections `first .. middle - 1` of a chain change places with `middle .. end - 1`."""

    chain: tuple[Section, ...]
    first: int
    middle: int
    end: int

    @property
    def run_a(self) -> tuple[Section, ...]:
        return self.chain[self.first : self.middle]

    @property
    def run_b(self) -> tuple[Section, ...]:
        return self.chain[self.middle : self.end]

    @property
    def signals(self) -> tuple[str, str, str]:
        """The nodes before run A, between the runs, and behind run B."""
        return self.run_a[0].entry, self.run_a[-1].exit, self.run_b[-1].exit

    def members(self) -> set[str]:
        """All nodes of both runs."""
        run_a, run_b = self.members_of_runs()
        return run_a | run_b

    def members_of_runs(self) -> tuple[set[str], set[str]]:
        """All nodes of run A, and all of run B."""
        run_a, run_b = ({member for section in run for member in section.members} for run in (self.run_a, self.run_b))
        return run_a, run_b

    def brings_no_cells(self) -> bool:
        """Whether neither end needs cells it did not have: such exchanges do not touch each other."""
        return self.run_b[0].reach == 0 and self.run_a[-1].own == 0


class _Start(NamedTuple):
    """The signal before run A: cells set free when A reads it no more, and what the others there keep."""

    reach: int
    freed: int
    depth: int
    others: int


class _Middle(NamedTuple):
    """The signal between the runs: all its cells go; how late B reads it and A feeds it back."""

    cells: int
    reach: int
    own: int


class _End(NamedTuple):
    """The signal behind run B: cells set free when B feeds it back no more, and what the others keep."""

    own: int
    freed: int
    depth: int
    others: int


def exchanges(network: Network, chains: list[list[Section]]) -> list[Exchange]:
    """Neighbours along whole chains, where that loses nothing; else the one shortest worthwhile exchange.

    Neighbours first, so that each direct form I section becomes the two-cell form by itself before
    its lines are shared with the next section's; ties go along the chain, then by the order of the file.
    """
    costed = [_Chain(network, chain) for chain in chains]
    together: list[Exchange] = []
    used: set[str] = set()
    for chain in costed:
        found = chain.neighbours()
        members = {member for exchange in found for member in exchange.members()}
        if used.isdisjoint(members):
            used |= members
            together.extend(found)
    if together:
        return together
    singles = [exchange for chain in costed if (exchange := chain.shortest()) is not None]
    return [min(singles, key=lambda exchange: exchange.end - exchange.first)] if singles else []


class _Chain:
    """A chain of sections with the cells at each signal between them."""

    def __init__(self, network: Network, chain: list[Section]) -> None:
        self._chain = tuple(chain)
        self._starts = [_start(network, section) for section in chain]
        self._middles = [_middle(network, *pair) for pair in pairwise(chain)]
        self._ends = [_end(network, section) for section in chain]

    def neighbours(self) -> list[Exchange]:
        """Exchanges of two sections each, from the front on, that together lose no cell once lines are shared."""
        found: list[Exchange] = []
        free_from = 0
        for first in range(len(self._chain) - 1):
            exchange = Exchange(self._chain, first, first + 1, first + 2)
            kinds = self._starts[first], self._middles[first], self._ends[first + 1]
            if first >= free_from and exchange.brings_no_cells() and saved_as_drawn(*kinds) > 0:
                found.append(exchange)
                free_from = first + 2
        return found if self._shared_cells(found) <= self._shared_cells([]) else []

    def _shared_cells(self, exchanged: list[Exchange]) -> int:
        """Cells at the signals of the chain with all lines shared, after exchanges that bring no cells."""
        reach = [*(section.reach for section in self._chain), self._ends[-1].others]
        own = [self._starts[0].others, *(section.own for section in self._chain)]
        between = 0
        for exchange in exchanged:
            between += max(reach[exchange.first], own[exchange.end])
            reach[exchange.first] = own[exchange.end] = 0
        return between + sum(map(max, reach, own))

    def shortest(self) -> Exchange | None:
        """The shortest worthwhile exchange, the first along the chain among equals."""
        kinds = (set(self._starts), set(self._middles), set(self._ends))
        if len(kinds[0]) * len(kinds[1]) * len(kinds[2]) > _MOST_KINDS:
            return self._nearest()
        return self._nearest_of_kinds(*kinds)

    def _nearest(self) -> Exchange | None:
        """The shortest among runs of a few sections, where there are too many kinds to look further."""
        for length in range(2, _NEAR + 1):
            for first in range(len(self._chain) - length + 1):
                end = first + length
                for middle in range(first + 1, end):
                    if is_worthwhile(self._starts[first], self._middles[middle - 1], self._ends[end - 1]):
                        return Exchange(self._chain, first, middle, end)
        return None

    def _nearest_of_kinds(self, starts: set[_Start], middles: set[_Middle], ends: set[_End]) -> Exchange | None:
        """For each first section and each pair of kinds that suits it, the nearest middle and end."""
        next_middle = {kind: _next_places(self._middles, kind) for kind in sorted(middles)}
        next_end = {kind: _next_places(self._ends, kind) for kind in sorted(ends)}
        suits = {
            start: [
                (middle, end) for middle in sorted(middles) for end in sorted(ends) if is_worthwhile(start, middle, end)
            ]
            for start in sorted(starts)
        }
        best: tuple[int, int, int, int] | None = None
        for first, start in enumerate(self._starts):
            for middle_kind, end_kind in suits[start]:
                middle = next_middle[middle_kind][min(first, len(self._middles))]
                last = next_end[end_kind][min(middle + 1, len(self._ends))]
                if last < len(self._chain):
                    found = (last + 1 - first, first, middle + 1, last + 1)
                    best = found if best is None else min(best, found)
        return None if best is None else Exchange(self._chain, *best[1:])


def is_worthwhile(start: _Start, middle: _Middle, end: _End) -> bool:
    """Whether cells are saved as drawn, and more than sharing all lines would save without an exchange."""
    before = max(start.others, start.reach) + max(middle.own, middle.reach) + max(end.own, end.others)
    after = max(start.others, middle.reach) + max(end.own, start.reach) + max(middle.own, end.others)
    return saved_as_drawn(start, middle, end) > 0 and before > after


def saved_as_drawn(start: _Start, middle: _Middle, end: _End) -> int:
    """Cells set free at the three signals, less those of the new one and those that moved readings need."""
    needed = max(end.own, start.reach) + max(0, middle.reach - start.depth) + max(0, middle.own - end.depth)
    return start.freed + middle.cells + end.freed - needed


def _next_places(kinds: list[_Start] | list[_Middle] | list[_End], wanted: object) -> list[int]:
    """For each place the nearest one from there on that holds the wanted kind; the length where there is none."""
    places = [len(kinds)] * (len(kinds) + 1)
    for at in range(len(kinds) - 1, -1, -1):
        places[at] = at if kinds[at] == wanted else places[at + 1]
    return places


def _start(network: Network, section: Section) -> _Start:
    freed, depth = _without(network, section.entry, section)
    others = _latest_reading(network, section.entry, lambda reader: reader not in section.members)
    return _Start(section.reach, freed, depth, max(others, network.latest_shown(section.entry)))


def _middle(network: Network, before: Section, after: Section) -> _Middle:
    cells = sum(line.length for line in network.lines.get(after.entry, ()))
    return _Middle(cells, after.reach, before.own)


def _end(network: Network, section: Section) -> _End:
    freed, depth = _without(network, section.exit, section)
    others = _latest_reading(network, section.exit, lambda reader: reader not in section.members)
    return _End(section.own, freed, depth, max(others, network.latest_shown(section.exit)))


def _latest_reading(network: Network, node: str, counts: Callable[[str], bool]) -> int:
    return max((wire.late for reader, wire in network.readers[node] if counts(reader)), default=0)


def _without(network: Network, node: str, section: Section) -> tuple[int, int]:
    """How many cells behind a node only this section needs, and how far the others' reach."""
    lines = network.lines.get(node, ())
    needed = cells_needed(
        network, node, [wire.signal for reader, wire in network.readers[node] if reader not in section.members]
    )
    freed = sum(line.length - needed.get(line.name, 0) for line in lines)
    depth = max((network.offset[name] + taps for name, taps in needed.items() if taps), default=0)
    return freed, depth


def cells_needed(network: Network, node: str, read: list[Signal]) -> dict[str, int]:
    """For each line behind a node how many of its cells these readings and the ports need."""
    needed = {line.name: 0 for line in network.lines.get(node, ())}
    for signal in [*read, *network.shown.get(node, ())]:
        if signal.name in needed:
            needed[signal.name] = max(needed[signal.name], signal.tap)
    for line in reversed(network.lines.get(node, ())):
        if needed[line.name] and line.signal.name in needed:
            needed[line.signal.name] = max(needed[line.signal.name], line.signal.tap)
    return needed
