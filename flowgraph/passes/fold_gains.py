"""Gains that the elements reading them can do as well."""

from __future__ import annotations

from dataclasses import replace

from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.elements import Element, Signal, redirected, signals_read
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
    view = index(diagram)
    order, _ = instant_order(view)
    for at in order:
        folding.visit(view.names[at])
    if not folding.gone and not folding.cleared:
        return None
    outputs = {
        name: replace(output, signal=folding.wires.get(output.signal, output.signal))
        for name, output in diagram.outputs.items()
    }
    said = [f"folded {listed(folding.gone)}"] if folding.gone else []
    said += [f"left out terms by 0 in {listed(folding.cleared)}"] if folding.cleared else []
    after = replace(diagram, elements=folding.elements, outputs=outputs)
    return Change(after, "; ".join(said), folding.wires)


class _Folding:
    """The elements while gains are folded one after the other, each before the elements that read it.

    What a gain reads was visited before it, so it stays once it is read in the gain's place.
    """

    def __init__(self, diagram: Diagram) -> None:
        self.elements: dict[str, Element] = dict(diagram.elements)
        self.wires: dict[Signal, Signal] = {}
        self.gone: list[str] = []
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
        self.gone.append(name)
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
