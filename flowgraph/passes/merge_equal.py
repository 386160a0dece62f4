"""Elements and cells that carry the same samples, along lines and around feedback loops."""

from __future__ import annotations

from collections.abc import Hashable
from dataclasses import replace

from flowgraph.algebra.residues import ResidueArithmetic, drawn
from flowgraph.algebra.valuation import Valuation
from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.elements import Delay, Element, Input, Signal, redirected
from flowgraph.diagram.expression import ZERO, Number
from flowgraph.passes.change import Change
from flowgraph.passes.cost import cost
from flowgraph.passes.linear import Weight, collected, element_of, multiplies_in, terms_of
from flowgraph.passes.naming import Names
from flowgraph.passes.partition import MODULUS, coarsest_partition
from flowgraph.passes.proof import Keys
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
    """The classes of equal signals of a diagram, and for each the one signal that stays."""

    def __init__(self, diagram: Diagram, apart: frozenset[str]) -> None:
        self._diagram = diagram
        self._first_node: dict[str, int] = {}
        self._class_of: list[int] = []
        self._stays: dict[int, Signal] = {}
        self.doubled: dict[str, None] = {}
        signals = self._number_signals()
        groups = coarsest_partition(self._labels(apart), self._readers(len(signals)))
        self._class_of = [0] * len(signals)
        for at, group in enumerate(groups):
            for node in group:
                self._class_of[node] = at
        self._signals = signals
        self._groups = groups

    def change(self) -> Change | None:
        """The merged diagram; None where every signal is the only one of its class."""
        if len(self._groups) == len(self._signals):
            return None
        self._choose_sums()
        pieces = self._choose_cells()
        moved = {
            signal: self._stays[at]
            for signal, at in zip(self._signals, self._class_of, strict=True)
            if self._stays[at] != signal
        }
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

    def _number_signals(self) -> list[Signal]:
        """Every signal once: a node for each element that is no delay, one for each cell of a delay."""
        signals: list[Signal] = []
        for name, element in self._diagram.elements.items():
            self._first_node[name] = len(signals)
            if isinstance(element, Delay):
                signals.extend(Signal(name, tap) for tap in range(1, element.length + 1))
            else:
                signals.append(Signal(name))
        return signals

    def _node(self, signal: Signal) -> int:
        return self._first_node[signal.name] + max(signal.tap - 1, 0)

    def _labels(self, apart: frozenset[str]) -> list[Hashable]:
        """What tells signals apart at once: inputs by name, cells by content, sums not at all."""
        keys = Keys(self._diagram)
        rest = keys.of_expression(ZERO)
        labels: list[Hashable] = []
        for name, element in self._diagram.elements.items():
            if isinstance(element, Delay):
                starts = [keys.of_expression(start) for start in element.starts] or [rest] * element.length
                labels.extend(("cell", start) for start in starts)
            elif isinstance(element, Input) or name in apart:
                labels.append(("alone", name))
            else:
                labels.append(("sum", None))
        return labels

    def _readers(self, nodes: int) -> list[list[tuple[int, int]]]:
        """Who reads each node, and with which weight as a residue."""
        value = Valuation(ResidueArithmetic(MODULUS, _SEED), self._diagram.coefficients, at_values=False)
        readers: list[list[tuple[int, int]]] = [[] for _ in range(nodes)]
        for name, element in self._diagram.elements.items():
            node = self._first_node[name]
            if isinstance(element, Delay):
                readers[self._node(element.signal)].append((node, 1))
                for tap in range(1, element.length):
                    readers[node + tap - 1].append((node + tap, 1))
            else:
                for signal, weight in terms_of(element) or ():
                    readers[self._node(signal)].append((node, _residue(weight, value)))
        return readers

    def _choose_sums(self) -> None:
        """Of equal sums the one that needs the fewest multiplies and adds stays, the first in the file among those."""
        for at, group in enumerate(self._groups):
            if self._signals[group[0]].tap == 0:
                self._stays[at] = self._signals[group[0] if len(group) == 1 else self._cheapest(group)]

    def _cheapest(self, group: list[int]) -> int:
        """Equal sums cost the same where each reads every class at most once, and as many classes."""
        terms_in = {
            node: [
                (self._class_of[self._node(signal)], weight)
                for signal, weight in terms_of(self._diagram.elements[self._signals[node].name]) or ()
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
            classes = self._classes_of(line)
            if self._stays.keys().isdisjoint(classes) and len(set(classes)) == line.length:
                self._stays.update((at, Signal(line.name, tap)) for tap, at in enumerate(classes, start=1))
                pieces[line.name] = [line]
            else:
                cut.append(line)
        for line in cut:
            taken: dict[int, int] = {}
            for tap, at in enumerate(self._classes_of(line), start=1):
                if at not in self._stays:
                    taken.setdefault(at, tap)
            pieces[line.name] = self._pieces(line, list(taken.values()), names)
        return pieces

    def _classes_of(self, line: Delay) -> list[int]:
        first = self._first_node[line.name]
        return self._class_of[first : first + line.length]

    def _pieces(self, line: Delay, taps: list[int], names: Names) -> list[Delay]:
        """One line for each unbroken run of the cells that stay."""
        made: list[Delay] = []
        for run in _runs(taps):
            name = line.name if not made else names.fresh(line.name)
            source = line.signal if run[0] == 1 else Signal(line.name, run[0] - 1)
            starts = line.starts[run[0] - 1 : run[-1]]
            made.append(Delay(name, source, len(run), starts, line.span))
            for tap in run:
                at = self._class_of[self._first_node[line.name] + tap - 1]
                self._stays[at] = Signal(name, tap - run[0] + 1)
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
        cells = sum(len(group) - 1 for group in self._groups if self._signals[group[0]].tap)
        sums = sum(len(group) - 1 for group in self._groups if not self._signals[group[0]].tap)
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


def _runs(taps: list[int]) -> list[list[int]]:
    """Rising numbers, cut where one is left out."""
    runs: list[list[int]] = []
    for tap in taps:
        if runs and runs[-1][-1] == tap - 1:
            runs[-1].append(tap)
        else:
            runs.append([tap])
    return runs
