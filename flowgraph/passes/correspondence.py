"""The proof of a step that only lets elements share work: element by element, exact, in linear time.

A map leads from signals before to signals after. Where each starting content agrees, each cell takes
in the image of what its counterpart takes in, and each sum has the images of its counterpart's terms,
both diagrams compute the same samples under the map: by induction over the samples and, within one,
over the order in which the diagram before is computed (it has no delay-free loop). Around feedback
loops this is the coarsest-partition argument (Hopcroft 1971; for weighted sums Boreale 2009).
"""

from __future__ import annotations

from collections.abc import Mapping

from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.elements import Delay, Input, Signal, signals_read
from flowgraph.diagram.expression import ZERO
from flowgraph.passes.linear import UNIT, Weight, collected, product, terms_of
from flowgraph.passes.proof import Keys, NotProved, Proof


def prove_correspondence(before: Diagram, after: Diagram, moved: Mapping[Signal, Signal]) -> Proof:
    """The proof that each port shows what it showed, starting contents included. Raises NotProved."""
    walk = _Walk(before, after, moved)
    for name, output in before.outputs.items():
        shown = walk.reach(output.signal)
        if shown != after.outputs[name].signal:
            raise NotProved(f"the port {name} shows another signal")
    walk.finish()
    return Proof("exact", 0, walk.keeps_rounding)


class _Walk:
    """Every signal that the ports rest on, each compared with its image once."""

    def __init__(self, before: Diagram, after: Diagram, moved: Mapping[Signal, Signal]) -> None:
        self.keeps_rounding = True
        self._before, self._after, self._moved = before, after, moved
        self._moved_names = {signal.name for signal in moved}
        self._keys = Keys(before)
        self._zero = self._keys.of_expression(ZERO)
        self._seen: set[Signal] = set()
        self._gone: dict[str, list[tuple[Signal, Weight]]] = {}
        self._waiting: list[Signal] = []

    def reach(self, signal: Signal) -> Signal | None:
        """The image of a signal, which is compared later; None where the signal has none."""
        image = self._moved.get(signal)
        if image is None:
            if signal.name not in self._after.elements:
                return None
            image = signal
        elif image.name not in self._after.elements:
            raise NotProved(f"{signal.name} became {image.name}, which is not there")
        if signal not in self._seen:
            self._seen.add(signal)
            self._waiting.append(signal)
        return image

    def finish(self) -> None:
        """Compares every signal reached with its image."""
        while self._waiting:
            signal = self._waiting.pop()
            image = self._moved.get(signal, signal)
            element = self._before.elements[signal.name]
            match element:
                case Input():
                    if image != signal:
                        raise NotProved(f"the input {signal.name} became {image.name}")
                case Delay() if signal.name in self._moved_names:
                    self._compare_cell(element, signal, image)
                case Delay():
                    self._compare_line(element)
                case _:
                    self._compare_sum(signal, image)

    def _compare_cell(self, line: Delay, signal: Signal, image: Signal) -> None:
        """One cell: its starting content, and what it takes in."""
        other = self._after.elements[image.name]
        if not isinstance(other, Delay) or not 1 <= image.tap <= other.length:
            raise NotProved(f"cell {signal.tap} of {signal.name} is no cell any more")
        if self._start(line, signal.tap) != self._start(other, image.tap):
            raise NotProved(f"cell {signal.tap} of {signal.name} starts with another content")
        taken_in = line.signal if signal.tap == 1 else Signal(signal.name, signal.tap - 1)
        taken_after = other.signal if image.tap == 1 else Signal(image.name, image.tap - 1)
        if self.reach(taken_in) != taken_after:
            raise NotProved(f"cell {signal.tap} of {signal.name} takes in another signal")

    def _compare_line(self, line: Delay) -> None:
        """All cells of a line that kept its name, as far as both lines go."""
        other = self._after.elements[line.name]
        if not isinstance(other, Delay) or self.reach(line.signal) != other.signal:
            raise NotProved(f"{line.name} takes in another signal")
        kept = min(line.length, other.length)
        if line.starts[:kept] != other.starts[:kept]:
            for tap in range(1, kept + 1):
                if self._start(line, tap) != self._start(other, tap):
                    raise NotProved(f"cell {tap} of {line.name} starts with another content")

    def _start(self, line: Delay, tap: int) -> object:
        return self._keys.of_expression(line.starts[tap - 1]) if line.starts else self._zero

    def _compare_sum(self, signal: Signal, image: Signal) -> None:
        """An adder or gain: the images of its terms must add up to its image."""
        element = self._before.elements[signal.name]
        other = self._after.elements[image.name]
        if image == signal and other == element and all(self.reach(read) == read for read in signals_read(element)):
            return
        found = self._mapped_terms(signal.name)
        if found == [(image, UNIT)]:
            return
        wanted = terms_of(other)
        if wanted is None or self._is_wire(found, image):
            wanted = [(image, UNIT)]
        # a + b = b + a in every word, so that the first two terms may change places.
        if self._one_by_one(found, wanted) or self._one_by_one([*found[1::-1], *found[2:]], wanted):
            return
        self.keeps_rounding = False
        left, right = _by_signal(found), _by_signal(wanted)
        for read in left.keys() | right.keys():
            if not self._same(left.get(read, []), right.get(read, [])):
                raise NotProved(f"{signal.name} and {image.name} weigh {read.name} differently")

    def _one_by_one(self, left: list[tuple[Signal, Weight]], right: list[tuple[Signal, Weight]]) -> bool:
        """Whether the same products are added in the same order."""
        return [read for read, _ in left] == [read for read, _ in right] and all(
            self._same([weight], [other]) for (_, weight), (_, other) in zip(left, right, strict=True)
        )

    def _mapped_terms(self, name: str) -> list[tuple[Signal, Weight]]:
        """The terms of a sum in signals of the diagram after; sums that are gone are worked in, inner ones first."""
        waiting = self._gone_in(name)
        while waiting:
            inner = waiting[-1]
            deeper = [gone for gone in self._gone_in(inner) if gone not in self._gone]
            waiting.extend(deeper)
            if not deeper:
                waiting.pop()
                self._gone[inner] = collected(self._worked_in(inner))
        return self._worked_in(name)

    def _gone_in(self, name: str) -> list[str]:
        """The sums an adder or gain reads that have no image."""
        terms = terms_of(self._before.elements[name])
        if terms is None:
            raise NotProved(f"{name} is gone")
        return [signal.name for signal, _ in terms if self.reach(signal) is None]

    def _worked_in(self, name: str) -> list[tuple[Signal, Weight]]:
        mapped: list[tuple[Signal, Weight]] = []
        for signal, weight in terms_of(self._before.elements[name]) or ():
            image = self.reach(signal)
            if image is not None:
                mapped.append((image, weight))
                continue
            inner = self._gone[signal.name]
            if len(terms_of(self._before.elements[signal.name]) or ()) > 1:
                self.keeps_rounding = False
            for inner_signal, inner_weight in inner:
                if weight.coefficient is not None and inner_weight.coefficient is not None:
                    self.keeps_rounding = False
                mapped.append((inner_signal, product(weight, inner_weight)))
        return mapped

    def _is_wire(self, found: list[tuple[Signal, Weight]], image: Signal) -> bool:
        """Whether the terms come to the image alone."""
        weights = _by_signal(found)
        return image in weights and all(
            self._same(weight, [UNIT] if signal == image else []) for signal, weight in weights.items()
        )

    def _same(self, left: list[Weight], right: list[Weight]) -> bool:
        if left == right:
            return True
        return self._keys.of_weights(left or [_NOTHING]) == self._keys.of_weights(right or [_NOTHING])


_NOTHING = Weight(False, ZERO)


def _by_signal(terms: list[tuple[Signal, Weight]]) -> dict[Signal, list[Weight]]:
    weights: dict[Signal, list[Weight]] = {}
    for signal, weight in terms:
        weights.setdefault(signal, []).append(weight)
    return weights
