"""Gains that the elements reading them can do as well."""

from __future__ import annotations

from dataclasses import replace

from flowgraph.diagram.diagram import Diagram, is_multiply
from flowgraph.diagram.elements import Element, Gain, Signal, redirected, signals_read
from flowgraph.diagram.index import index, instant_order
from flowgraph.passes.change import Change
from flowgraph.passes.linear import UNIT, Weight, collected, element_of, multiplies_in, product, terms_of
from flowgraph.passes.wording import listed


def fold_gains(diagram: Diagram) -> Change | None:
    """A gain of a gain is one gain, a gain by 1 is a wire, and a sum may scale its own terms.

    `gain g = c*x`, `adder y = g + u` -> `adder y = c*x + u`: c*x + u either way. A gain read in
    several places is folded only where that costs no further multiply; a term by 0 is left out.
    """
    folding = _Folding(diagram)
    for name in _visiting_order(diagram):
        folding.visit(name)
    if len(folding.elements) == len(diagram.elements) and not folding.cleared:
        return None
    outputs = {
        name: replace(output, signal=folding.wires.get(output.signal, output.signal))
        for name, output in diagram.outputs.items()
    }
    gone = [name for name in diagram.elements if name not in folding.elements]
    said = [f"folded {listed(gone)}"] if gone else []
    said += [f"left out terms by 0 in {listed(folding.cleared)}"] if folding.cleared else []
    after = replace(diagram, elements=folding.elements, outputs=outputs)
    return Change(after, "; ".join(said), folding.wires)


def _visiting_order(diagram: Diagram) -> list[str]:
    """Each element before those that read it, and else by what it computes; by the file only where that is alike.

    The order of the lines of a file is not to decide which of two gains an adder takes over.
    """
    view = index(diagram)
    order, _ = instant_order(view)
    level = [0] * len(order)
    for at in order:
        level[at] = 1 + max((level[read] for read in view.instant[at]), default=0)
    gains = [element if isinstance(element, Gain) else None for element in diagram.elements.values()]
    computed = [
        (0, 0, "") if gain is None else (-is_multiply(gain.coefficient), len(readers), repr(gain.coefficient))
        for gain, readers in zip(gains, view.readers, strict=True)
    ]
    return [view.names[at] for at in sorted(order, key=lambda at: (level[at], computed[at], at))]


class _Folding:
    """The elements while gains are folded one after the other, each before the elements that read it.

    What a gain reads was visited before it, so it stays once it is read in the gain's place.
    """

    def __init__(self, diagram: Diagram) -> None:
        self.elements: dict[str, Element] = dict(diagram.elements)
        self.wires: dict[Signal, Signal] = {}
        self.cleared: list[str] = []
        self._shown = {output.signal.name for output in diagram.outputs.values()}
        self._readers: dict[str, dict[str, None]] = {name: {} for name in diagram.elements}
        for name, element in diagram.elements.items():
            for signal in signals_read(element):
                self._readers[signal.name][name] = None

    def visit(self, name: str) -> None:
        """Folds the element where that is a gain; an adder loses its terms by 0."""
        element = self.elements[name]
        terms = terms_of(element)
        if terms is None:
            return
        kept = collected(terms)
        if len(kept) < len(terms):
            self.elements[name] = element_of(name, kept, element.span)
            self.cleared.append(name)
            left = {signal.name for signal, _ in kept}
            for signal, _ in terms:
                if signal.name not in left:
                    self._readers[signal.name].pop(name, None)
        if len(kept) == 1 and self._readers[name]:
            self._fold(name, *kept[0])
        elif len(kept) == 1 and kept[0][1] == UNIT:
            self._remove(name, *kept[0])

    def _fold(self, name: str, source: Signal, weight: Weight) -> None:
        """Lets every reader scale `source` itself, where all can and no multiply is added."""
        if weight != UNIT and name in self._shown:
            return
        folded: dict[str, Element] = {}
        before, after = multiplies_in([(source, weight)]), 0
        for reader in self._readers[name]:
            element = self.elements[reader]
            terms = terms_of(element)
            if terms is not None:
                scaled = _with_folded(terms, name, source, weight)
                before += multiplies_in(terms)
                after += multiplies_in(scaled)
                folded[reader] = element_of(reader, scaled, element.span)
            elif weight == UNIT:
                folded[reader] = redirected(element, {Signal(name): source})
            else:
                return
        if after <= before:
            self.elements.update(folded)
            self._remove(name, source, weight)

    def _remove(self, name: str, source: Signal, weight: Weight) -> None:
        del self.elements[name]
        self._readers[source.name].pop(name, None)
        self._readers[source.name].update(self._readers[name])
        if weight == UNIT:
            self.wires[Signal(name)] = source
            if name in self._shown:
                self._shown.add(source.name)


def _with_folded(
    terms: list[tuple[Signal, Weight]], name: str, source: Signal, weight: Weight
) -> list[tuple[Signal, Weight]]:
    """The terms with the gain's work done in them."""
    return collected((source, product(own, weight)) if signal.name == name else (signal, own) for signal, own in terms)
