"""The operations of a schedule as Python statements, by the float rule of the language.

Each product is rounded, then terms are added from left to right: this is what Python does with
`a + 0.5 * b - c`. A sign moves freely between a term and its coefficient, for rounding to nearest
is symmetric: x - (-0.5)*y and x + 0.5*y are the same double.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass
from math import copysign
from typing import assert_never

from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.elements import Adder, Delay, Gain, Signal, Term
from flowgraph.diagram.expression import Expression
from flowgraph.schedule.schedule import Operation
from flowgraph.source.span import Span

WIDTH = 100
TERMS_AT_ONCE = 40
"""Longer sums go on in a further statement, so that expressions never nest too deep for Python."""

Statement = list[str]
"""The lines of one statement, without the indent of the place where it stands."""


@dataclass(frozen=True, slots=True)
class Places:
    """Where signals are stored: `held` stands before cells, `passing` before values of this sample."""

    names: Mapping[str, str]
    lengths: Mapping[str, int]
    held: str
    passing: str

    def value(self, name: str) -> str:
        """The place of a value that lives for one sample."""
        return self.passing + self.names[name]

    def cell(self, name: str) -> str:
        """The place of a single cell, or of the list of cells of a long line."""
        return self.held + self.names[name]

    def newest(self, name: str) -> str:
        """The place of the position of a long line's newest cell in its list."""
        return self.held + self.names[f"{name} at"]

    def read(self, signal: Signal) -> str:
        """The text that reads a signal. Tap k of a long line stands k - 1 behind the newest, around the end."""
        if signal.tap == 0:
            return self.value(signal.name)
        length = self.lengths[signal.name]
        if length == 1:
            return self.cell(signal.name)
        return f"{self.cell(signal.name)}[{self.newest(signal.name)} - {length + 1 - signal.tap}]"


def statements(
    diagram: Diagram,
    operation: Operation,
    places: Places,
    double: Callable[[Expression, Span], float],
) -> list[Statement]:
    """The statements of one operation; none for inputs, which are there when a sample begins."""
    match operation.kind:
        case "input":
            return []
        case "adder" | "gain":
            terms = _signed_terms(diagram, operation.name, places, double)
            return list(_sum(places.value(operation.name), terms))
        case "output":
            shown = operation.reads[0]
            return [[f"{places.value(f'{operation.name} out')} = {places.read(shown)}"]] if shown.tap else []
        case "keep":
            return [[f"{places.value(operation.name)} = {places.read(operation.reads[0])}"]]
        case "update":
            return _update(operation, places)
        case _:
            assert_never(operation.kind)


def shown_at(port: str, signal: Signal, places: Places) -> str:
    """The text of the value of a port after all operations. A cell was copied, since it is moved on."""
    return places.value(f"{port} out" if signal.tap else signal.name)


def _update(operation: Operation, places: Places) -> list[Statement]:
    """A single cell takes its source; in a long line the source takes the oldest place and is the newest."""
    name, source = operation.name, places.read(operation.reads[0])
    if places.lengths[name] == 1:
        return [[f"{places.cell(name)} = {source}"]] if source != places.cell(name) else []
    newest = places.newest(name)
    return [
        [f"{places.cell(name)}[{newest} - 1] = {source}"],
        [f"{newest} = ({newest} - 1) % {places.lengths[name]}"],
    ]


def _signed_terms(
    diagram: Diagram, name: str, places: Places, double: Callable[[Expression, Span], float]
) -> list[tuple[str, str]]:
    """The terms of an adder, or the one of a gain, as a sign and the text of a product."""
    element = diagram.elements[name]
    match element:
        case Adder(terms=terms):
            pass
        case Gain(coefficient=coefficient, signal=signal, span=span):
            terms = (Term(signal, False, coefficient, span),)
        case _:
            raise TypeError(f"{name} is computed by no sum")
    signed = []
    for term in terms:
        factor = 1.0 if term.coefficient is None else double(term.coefficient, term.span)
        product = places.read(term.signal) if abs(factor) == 1.0 else f"{abs(factor)!r} * {places.read(term.signal)}"
        signed.append(("-" if term.negative != (copysign(1.0, factor) < 0.0) else "+", product))
    return signed


def _sum(target: str, signed: list[tuple[str, str]]) -> Iterator[Statement]:
    """target = the terms, added from left to right, in statements of a bearable size."""
    for start in range(0, len(signed), TERMS_AT_ONCE):
        pieces = [f"{sign} {product}" for sign, product in signed[start : start + TERMS_AT_ONCE]]
        if start:
            pieces.insert(0, target)
        else:
            sign, product = signed[0]
            pieces[0] = product if sign == "+" else f"-{product}"
        yield _filled(target, pieces)


def _filled(target: str, pieces: list[str]) -> Statement:
    """target = pieces, on one line where they fit, else filled into lines between brackets."""
    whole = f"{target} = {' '.join(pieces)}"
    if len(whole) <= WIDTH:
        return [whole]
    lines = [f"{target} = ("]
    line = "   "
    for piece in pieces:
        if len(line) + 1 + len(piece) > WIDTH and line.strip():
            lines.append(line)
            line = "   "
        line += f" {piece}"
    return [*lines, line, ")"]


def line_lengths(diagram: Diagram) -> dict[str, int]:
    """The number of cells of each delay."""
    return {name: element.length for name, element in diagram.elements.items() if isinstance(element, Delay)}
