"""Elements and cells that carry the same samples, along lines and around feedback loops."""

from __future__ import annotations

from collections.abc import Hashable, Mapping
from dataclasses import replace

from flowgraph.algebra.residues import ResidueArithmetic, drawn
from flowgraph.algebra.valuation import Valuation
from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.elements import Delay, Element, Input, Signal, redirected
from flowgraph.diagram.expression import Number
from flowgraph.passes.change import Change
from flowgraph.passes.cost import cost
from flowgraph.passes.linear import Weight, collected, element_of, multiplies_in, terms_of
from flowgraph.passes.naming import Names
from flowgraph.passes.partition import MODULUS, coarsest_partition
from flowgraph.passes.proof import Keys
from flowgraph.passes.stretches import Numbering, Stretch
from flowgraph.passes.wording import counted, listed, moves_text


def merge_equal(diagram: Diagram) -> Change | None:
    """Cells with equal starting contents that take in equal signals hold equal samples, and so do equal sums.

    `delay x1, x2 = x` twice -> once; `delay line = x by 12` beside it serves line[1] for x1. The
    signals are parted as coarsely as the wires allow, so two equal feedback loops become one.
    """
    merging = _Merging(diagram, frozenset())
    change = merging.change()
    if change is None or not merging.doubled or cost(change.after) < cost(diagram):
        return change
    # The sum of two equal signals in one adder would need a further multiply: those stay apart.
    change = _Merging(diagram, frozenset(merging.doubled)).change()
    return change if change is not None and cost(change.after) < cost(diagram) else None


_SEED = "equal signals"
"""Residues only find what may be equal; the driver proves it with exact keys."""


class _Merging:
    """The classes of equal signals of a diagram, and for each the one stretch of cells or the one sum that stays."""

    def __init__(self, diagram: Diagram, apart: frozenset[str]) -> None:
        self._diagram = diagram
        self._stays: dict[int, Stretch] = {}
        self.doubled: dict[str, None] = {}
        self._number = Numbering(diagram, Keys(diagram))
        self._groups = coarsest_partition(self._labels(apart), self._readers())
        self._class_of = [0] * len(self._number.stretches)
        for at, group in enumerate(self._groups):
            for node in group:
                self._class_of[node] = at

    def change(self) -> Change | None:
        """The merged diagram; None where every signal is the only one of its class."""
        if len(self._groups) == len(self._number.stretches):
            return None
        self._choose_sums()
        pieces = self._choose_cells()
        moved = self._moved()
        kept: dict[str, Element] = {}
        for name, element in self._diagram.elements.items():
            if isinstance(element, Delay):
                for piece in pieces[name]:
                    kept[piece.name] = redirected(piece, moved)
            elif Signal(name) not in moved:
                kept[name] = self._reading_merged(element, moved)
        outputs = {
            name: replace(output, signal=moved.get(output.signal, output.signal))
            for name, output in self._diagram.outputs.items()
        }
        after = replace(self._diagram, elements=kept, outputs=outputs)
        return Change(after, self._message(after, moved), moved)

    def _labels(self, apart: frozenset[str]) -> list[Hashable]:
        """What tells signals apart at once: inputs by name, cells by content, sums not at all."""
        labels: list[Hashable] = []
        for node, stretch in enumerate(self._number.stretches):
            if stretch.last:
                labels.append(("cell", self._number.labels[node]))
            elif stretch.name in apart or isinstance(self._diagram.elements[stretch.name], Input):
                labels.append(("alone", stretch.name))
            else:
                labels.append(("sum", None))
        return labels

    def _readers(self) -> list[list[tuple[int, int]]]:
        """Who reads each node, and with which weight as a residue."""
        value = Valuation(ResidueArithmetic(MODULUS, _SEED), self._diagram.coefficients, at_values=False)
        readers: list[list[tuple[int, int]]] = [[] for _ in self._number.stretches]
        for element in self._diagram.elements.values():
            if isinstance(element, Delay):
                source = self._number.of(element.signal)
                for node in self._number.along(element):
                    readers[source].append((node, 1))
                    source = node
            else:
                node = self._number.first[element.name]
                for signal, weight in terms_of(element) or ():
                    readers[self._number.of(signal)].append((node, _residue(weight, value)))
        return readers

    def _moved(self) -> dict[Signal, Signal]:
        """For each signal that does not stay the one that does its work."""
        moved: dict[Signal, Signal] = {}
        for stretch, at in zip(self._number.stretches, self._class_of, strict=True):
            stays = self._stays[at]
            if stays != stretch:
                for cell in range(stretch.cells or 1):
                    moved[Signal(stretch.name, stretch.first + cell)] = Signal(stays.name, stays.first + cell)
        return moved

    def _choose_sums(self) -> None:
        """Of equal sums the one that needs the fewest multiplies and adds stays, the first in the file among those."""
        stretches = self._number.stretches
        for at, group in enumerate(self._groups):
            if not stretches[group[0]].last:
                self._stays[at] = stretches[group[0] if len(group) == 1 else self._cheapest(group)]

    def _cheapest(self, group: list[int]) -> int:
        """Equal sums cost the same where each reads every class at most once, and as many classes."""
        terms_in = {
            node: [
                (self._class_of[self._number.of(signal)], weight)
                for signal, weight in terms_of(self._diagram.elements[self._number.stretches[node].name]) or ()
            ]
            for node in group
        }
        sizes = {(len(terms), len({at for at, _ in terms})) for terms in terms_in.values()}
        if len(sizes) == 1 and all(terms == classes for terms, classes in sizes):
            return group[0]
        totals = {node: collected(terms) for node, terms in terms_in.items()}
        return min(group, key=lambda node: (multiplies_in(totals[node]), len(totals[node]), node))

    def _choose_cells(self) -> dict[str, list[Delay]]:
        """What stays of each delay: whole ones first, long before short, then by the order of the file."""
        pieces: dict[str, list[Delay]] = {}
        names = Names(self._diagram)
        longest_first = sorted(self._diagram.delays(), key=lambda line: -line.length)
        cut: list[Delay] = []
        for line in longest_first:
            nodes = self._number.along(line)
            classes = [self._class_of[node] for node in nodes]
            if self._stays.keys().isdisjoint(classes) and len(set(classes)) == len(classes):
                self._stays.update((at, self._number.stretches[node]) for at, node in zip(classes, nodes, strict=True))
                pieces[line.name] = [line]
            else:
                cut.append(line)
        for line in cut:
            taken: dict[int, Stretch] = {}
            for node in self._number.along(line):
                if self._class_of[node] not in self._stays:
                    taken.setdefault(self._class_of[node], self._number.stretches[node])
            pieces[line.name] = self._pieces(line, taken, names)
        return pieces

    def _pieces(self, line: Delay, taken: dict[int, Stretch], names: Names) -> list[Delay]:
        """One line for each unbroken run of the cells that stay."""
        made: list[Delay] = []
        for run in _runs(taken):
            name = line.name if not made else names.fresh(line.name)
            first, last = taken[run[0]].first, taken[run[-1]].last
            source = line.signal if first == 1 else Signal(line.name, first - 1)
            made.append(Delay(name, source, last - first + 1, line.starts[first - 1 : last], line.span))
            for at in run:
                self._stays[at] = Stretch(name, taken[at].first - first + 1, taken[at].last - first + 1)
        return made

    def _reading_merged(self, element: Element, moved: dict[Signal, Signal]) -> Element:
        """The element reading what stays; a signal that now stands twice in it becomes one term."""
        terms = terms_of(element)
        if terms is None or not any(signal in moved for signal, _ in terms):
            return element
        images = [moved.get(signal, signal) for signal, _ in terms]
        if len(set(images)) == len(images):
            return redirected(element, moved)
        twice = {image for image in images if images.count(image) > 1}
        for (signal, _), image in zip(terms, images, strict=True):
            if image in twice and signal.tap == 0:
                self.doubled[signal.name] = None
        merged_terms = [(image, weight) for image, (_, weight) in zip(images, terms, strict=True)]
        return element_of(element.name, collected(merged_terms), element.span)

    def _message(self, after: Diagram, moved: dict[Signal, Signal]) -> str:
        merged = [(len(group) - 1, self._number.stretches[group[0]]) for group in self._groups]
        cells = sum(saved * stretch.cells for saved, stretch in merged)
        sums = sum(saved for saved, stretch in merged if not stretch.last)
        said = [counted(cells, "cell")] if cells else []
        said += [counted(sums, "sum")] if sums else []
        return f"merged {' and '.join(said)}: {listed(moves_text(moved, self._diagram, after))}"


def _residue(weight: Weight, value: Valuation[int]) -> int:
    """A weight at one scattered point: equal for equal weights, different but for a chance near 2^-60."""
    if weight.coefficient is None:
        return -1 if weight.negative else 1
    try:
        match weight.coefficient:
            case Number(number) if number:
                found = number.numerator * pow(number.denominator, -1, MODULUS)
            case coefficient:
                found = value(coefficient)
    except (ZeroDivisionError, ValueError):
        found = drawn(_SEED, repr(weight.coefficient), MODULUS)
    return -found if weight.negative else found


def _runs(taken: Mapping[int, Stretch]) -> list[list[int]]:
    """The classes of neighbouring stretches, cut where one is left out."""
    runs: list[list[int]] = []
    for at, stretch in taken.items():
        if runs and taken[runs[-1][-1]].last == stretch.first - 1:
            runs[-1].append(at)
        else:
            runs.append([at])
    return runs
