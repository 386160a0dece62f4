"""The diagram as it is drawn: parts (circles, boxes, triangles, ports) and the links between them.

A gain with one reader is no part, it is a coefficient on its link. A run of three or more cells
that nobody taps is one box. Everything keeps the order of the file.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field
from typing import Literal, TypeAlias

from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.elements import Adder, Delay, Element, Gain, Input, Signal
from flowgraph.diagram.expression import Expression

Kind: TypeAlias = Literal["input", "output", "adder", "delay", "gain", "ellipsis"]
Cell: TypeAlias = tuple[str, int]

SHORTEST_RUN = 3


@dataclass(frozen=True, slots=True)
class Mark:
    """How a merged cell is shown: the badge letter, its number along the line, how many cells it stands for.

    `kept` is 0 for a cell before merging, else the number of cells that became this one.
    """

    letter: int
    number: int
    kept: int = 0

    def follows(self, other: Mark) -> bool:
        """Whether this mark continues a run of cells that ends with `other`."""
        return (self.letter, self.number, self.kept) == (other.letter, other.number + 1, other.kept)


@dataclass(frozen=True, slots=True)
class Part:
    """One symbol: what it is, the element (or port) it stands for, and for a delay which cells it holds.

    `cells` are pieces (line, first tap, last tap); marks are those of the first and the last cell.
    """

    kind: Kind
    name: str
    cells: tuple[tuple[str, int, int], ...] = ()
    coefficient: Expression | None = None
    marks: tuple[Mark, Mark] | None = None

    @property
    def length(self) -> int:
        """How many samples a delay part delays."""
        return sum(last - first + 1 for _, first, last in self.cells)


@dataclass(frozen=True, slots=True)
class Link:
    """A wire from one part to another, with the coefficient it carries and the gain element that brought it."""

    source: int
    target: int
    negative: bool = False
    coefficient: Expression | None = None
    gain: str = ""


@dataclass(slots=True)
class Sketch:
    """All parts and links; `into[p]` and `out[p]` are the numbers of the links at part p."""

    parts: list[Part] = field(default_factory=list)
    links: list[Link] = field(default_factory=list)
    into: list[list[int]] = field(default_factory=list)
    out: list[list[int]] = field(default_factory=list)

    def add_part(self, part: Part) -> int:
        """The number of the new part."""
        self.parts.append(part)
        self.into.append([])
        self.out.append([])
        return len(self.parts) - 1

    def add_link(self, link: Link) -> int:
        """The number of the new link."""
        self.links.append(link)
        number = len(self.links) - 1
        self.into[link.target].append(number)
        self.out[link.source].append(number)
        return number

    def is_delay(self, part: int) -> bool:
        return self.parts[part].kind == "delay"

    def sources(self, part: int) -> list[int]:
        return [self.links[link].source for link in self.into[part]]

    def readers(self, part: int) -> list[int]:
        return [self.links[link].target for link in self.out[part]]


def fold(diagram: Diagram, marks: Mapping[Cell, Mark] | None = None) -> Sketch:
    """The parts and links of a diagram, cells that `marks` names shown apart from others."""
    return _Folding(diagram, marks or {}).sketch


class _Folding:
    def __init__(self, diagram: Diagram, marks: Mapping[Cell, Mark]) -> None:
        self.diagram = diagram
        self.marks = marks
        self.sketch = Sketch()
        self.readers = _readers(diagram)
        self.taps = _by_name((signal.name, signal.tap) for signal in self.readers)
        self.marked = _by_name(self.marks)
        self.folded = {
            name
            for name, element in diagram.elements.items()
            if isinstance(element, Gain) and self._is_decoration(name)
        }
        self.lines = self._lines()
        self.carrier: dict[Signal, int] = {}
        for element in diagram.elements.values():
            self._add_parts(element)
        for element in diagram.elements.values():
            self._add_links(element)
        for name, output in diagram.outputs.items():
            port = self.sketch.add_part(Part("output", name))
            self._link(output.signal, port)

    def _is_decoration(self, name: str) -> bool:
        """One reader, and that one puts no other coefficient on the wire."""
        found = self.readers.get(Signal(name), [])
        if len(found) != 1 or found[0] == name:
            return False
        reader = self.diagram.elements.get(found[0])
        match reader:
            case Gain():
                return False
            case Adder(terms=terms):
                return all(term.coefficient is None for term in terms if term.signal.name == name)
            case _:
                return True

    def _lines(self) -> dict[str, list[list[tuple[str, int, int]]]]:
        """For each delay that begins a box, the boxes up to its last tap, each as pieces of lines."""
        lines: dict[str, list[list[tuple[str, int, int]]]] = {}
        continued: set[str] = set()
        for delay in self.diagram.delays():
            source = self.diagram.elements.get(delay.signal.name)
            if isinstance(source, Delay) and source is not delay and delay.signal.tap == source.length:
                only = self.readers.get(delay.signal, []) == [delay.name]
                if only and not self._is_cut((source.name, source.length), (delay.name, 1)):
                    continued.add(delay.name)
        followers = {delay.signal.name: delay for delay in self.diagram.delays() if delay.name in continued}
        waiting = [delay for delay in self.diagram.delays() if delay.name not in continued]
        done: set[str] = set()
        waiting += [delay for delay in self.diagram.delays() if delay.name in continued]
        for first in waiting:
            if first.name in done:
                continue
            boxes: list[list[tuple[str, int, int]]] = []
            pending: list[tuple[str, int, int]] = []
            following: Delay | None = first
            while following is not None and following.name not in done:
                done.add(following.name)
                goes_on = followers.get(following.name)
                for low, high in self._segments(following):
                    pending.append((following.name, low, high))
                    if high < following.length or goes_on is None or goes_on.name in done:
                        boxes += _boxes(pending)
                        pending = []
                following = goes_on
            lines[first.name] = boxes
        return lines

    def _segments(self, delay: Delay) -> list[tuple[int, int]]:
        """The runs of cells between taps that somebody reads or at which the marks change."""
        ends = {*self.taps.get(delay.name, ()), delay.length}
        for tap in self.marked.get(delay.name, ()):
            if tap > 1 and self._is_cut((delay.name, tap - 1), (delay.name, tap)):
                ends.add(tap - 1)
            if tap < delay.length and self._is_cut((delay.name, tap), (delay.name, tap + 1)):
                ends.add(tap)
        segments = []
        low = 1
        for high in sorted(end for end in ends if end > 0):
            segments.append((low, high))
            low = high + 1
        return segments

    def _is_cut(self, before: Cell, after: Cell) -> bool:
        """Whether two neighbouring cells must stand in different boxes because of their marks."""
        one, other = self.marks.get(before), self.marks.get(after)
        if one is None or other is None:
            return one is not other
        return not other.follows(one)

    def _add_parts(self, element: Element) -> None:
        match element:
            case Input(name):
                self.carrier[Signal(name)] = self.sketch.add_part(Part("input", name))
            case Adder(name):
                self.carrier[Signal(name)] = self.sketch.add_part(Part("adder", name))
            case Gain(name, coefficient):
                if name not in self.folded:
                    self.carrier[Signal(name)] = self.sketch.add_part(Part("gain", name, coefficient=coefficient))
            case Delay(name):
                for pieces in self.lines.get(name, []):
                    number = self.sketch.add_part(Part("delay", pieces[0][0], tuple(pieces), marks=self._marks(pieces)))
                    line, _, last = pieces[-1]
                    self.carrier[Signal(line, last)] = number

    def _marks(self, pieces: list[tuple[str, int, int]]) -> tuple[Mark, Mark] | None:
        first = self.marks.get(pieces[0][:2])
        last = self.marks.get((pieces[-1][0], pieces[-1][2]))
        return None if first is None or last is None else (first, last)

    def _add_links(self, element: Element) -> None:
        match element:
            case Input():
                pass
            case Adder(name, terms):
                for term in terms:
                    self._link(term.signal, self.carrier[Signal(name)], term.negative, term.coefficient)
            case Gain(name, _, signal):
                if name not in self.folded:
                    self._link(signal, self.carrier[Signal(name)])
            case Delay(name, signal):
                previous = -1
                for pieces in self.lines.get(name, []):
                    number = self.carrier[Signal(pieces[-1][0], pieces[-1][2])]
                    if previous < 0:
                        self._link(signal, number)
                    else:
                        self.sketch.add_link(Link(previous, number))
                    previous = number

    def _link(self, signal: Signal, target: int, negative: bool = False, coefficient: Expression | None = None) -> None:
        gain = ""
        if signal.name in self.folded:
            element = self.diagram.elements[signal.name]
            assert isinstance(element, Gain)
            gain, coefficient, signal = element.name, element.coefficient, element.signal
        if signal in self.carrier:
            self.sketch.add_link(Link(self.carrier[signal], target, negative, coefficient, gain))


def _boxes(pieces: list[tuple[str, int, int]]) -> list[list[tuple[str, int, int]]]:
    """One box for a long run, else a box for every cell."""
    if sum(last - first + 1 for _, first, last in pieces) >= SHORTEST_RUN:
        return [pieces]
    return [[(name, tap, tap)] for name, first, last in pieces for tap in range(first, last + 1)]


def _by_name(cells: Iterable[tuple[str, int]]) -> dict[str, list[int]]:
    """The taps that are named of each line."""
    taps: dict[str, list[int]] = {}
    for name, tap in cells:
        taps.setdefault(name, []).append(tap)
    return taps


def _readers(diagram: Diagram) -> dict[Signal, list[str]]:
    """Who reads each signal, in the order of the file; an output port reads under a name of its own."""
    readers: dict[Signal, list[str]] = {}
    for element in diagram.elements.values():
        match element:
            case Adder(name, terms):
                for term in terms:
                    readers.setdefault(term.signal, []).append(name)
            case Gain(name, _, signal) | Delay(name, signal):
                readers.setdefault(signal, []).append(name)
            case Input():
                pass
    for name, output in diagram.outputs.items():
        readers.setdefault(output.signal, []).append("output " + name)
    return readers
