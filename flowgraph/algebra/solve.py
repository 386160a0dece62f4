"""Solving a diagram: from its wires to how every output answers every input.

The elements are taken one strongly connected component after the other. Inside a component the
signals are eliminated (eliminate.py). A response is then a polynomial over the product of the
determinants of the components on its way; in a field it is a value, and nothing is left below it.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from typing import Generic, TypeVar

from flowgraph.algebra.eliminate import solve_component
from flowgraph.algebra.ring import Ring
from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.elements import Adder, Delay, Gain, Input, Signal, Term
from flowgraph.diagram.expression import ZERO
from flowgraph.diagram.index import Index, index, strong_components

R = TypeVar("R")

STARTS = ""
"""The source that stands for the starting contents: a unit pulse at n = 0 through each of them."""


@dataclass(frozen=True, slots=True)
class Response(Generic[R]):
    """`numerators[source]` over the product of the determinants of the components in `below`."""

    numerators: dict[str, R]
    below: frozenset[int]


@dataclass(frozen=True, slots=True)
class Solution(Generic[R]):
    """What every output answers to every input and to the starting contents.

    `determinants[c]` is det(I - W) of component c; their product over all of them is the
    characteristic polynomial of the whole diagram in w, hidden modes included.
    """

    outputs: dict[str, Response[R]]
    determinants: dict[int, R]
    members: dict[int, list[str]]

    def pair(self, output: str, source: str, ring: Ring[R]) -> tuple[R, list[R]]:
        """Numerator and the factors of the denominator of one response."""
        response = self.outputs[output]
        numerator = response.numerators.get(source, ring.zero)
        return numerator, [self.determinants[at] for at in sorted(response.below)]


def solve(diagram: Diagram, ring: Ring[R], outputs: Iterable[str] | None = None) -> Solution[R]:
    """The responses at the chosen outputs (all when None). The diagram must have no delay-free loop."""
    view = index(diagram)
    shown = {name: diagram.outputs[name].signal for name in (diagram.outputs if outputs is None else outputs)}
    shown_names = {signal.name for signal in shown.values()}
    solving = _Solving(diagram, ring)
    for number, group in enumerate(strong_components(view.reads)):
        names = [view.names[at] for at in group]
        if not _has_loop(group, view):
            solving.take_single(names[0])
            continue
        inside = set(group)
        wanted = [
            place
            for place, at in enumerate(group)
            if view.names[at] in shown_names or any(reader not in inside for reader in view.readers[at])
        ]
        solving.take_component(number, names, wanted)
    results = {name: solving.combined([(ring.one, signal)]) for name, signal in shown.items()}
    return Solution(results, solving.determinants, solving.members)


def determinants(diagram: Diagram, ring: Ring[R]) -> list[R]:
    """det(I - W) of every component with loops: their product has all modes of the diagram."""
    view = index(diagram)
    solving = _Solving(diagram, ring)
    found: list[R] = []
    for group in strong_components(view.reads):
        if _has_loop(group, view):
            rows, _, _ = solving.component([view.names[at] for at in group])
            found.append(solve_component(rows, [{} for _ in group], [], ring)[0])
    return found


def _has_loop(group: list[int], view: Index) -> bool:
    return len(group) > 1 or group[0] in view.reads[group[0]]


def wires(element: Adder | Gain | Delay) -> tuple[Term, ...]:
    """What an element sums, as signed and scaled terms."""
    match element:
        case Adder(terms=terms):
            return terms
        case Gain(coefficient=coefficient, signal=signal):
            return (Term(signal, coefficient=coefficient),)
        case Delay(signal=signal):
            return (Term(signal),)


class _Solving(Generic[R]):
    """The state of one solution: what is known of every signal so far."""

    def __init__(self, diagram: Diagram, ring: Ring[R]) -> None:
        self.diagram = diagram
        self.ring = ring
        self.known: dict[str, Response[R]] = {}
        self.determinants: dict[int, R] = {}
        self.members: dict[int, list[str]] = {}

    def factor(self, term: Term) -> R:
        """The signed coefficient of a term, without the delay of its tap."""
        ring = self.ring
        value = ring.one if term.coefficient is None else ring.coefficient(term.coefficient)
        return ring.minus(ring.zero, value) if term.negative else value

    def starting(self, signal: Signal) -> R:
        """What a tap shows of its line's starting contents: the sum of starts[tap - n] * w^n for n < tap."""
        ring = self.ring
        element = self.diagram.elements[signal.name]
        total = ring.zero
        if isinstance(element, Delay) and element.starts:
            for n in range(signal.tap):
                content = element.starts[signal.tap - n - 1]
                if content != ZERO:
                    total = ring.plus(total, ring.times(ring.coefficient(content), ring.late(n)))
        return total

    def combined(self, terms: list[tuple[R, Signal]]) -> Response[R]:
        """The sum of scaled signals, brought over one denominator."""
        ring = self.ring
        below: frozenset[int] = frozenset().union(*(self.known[signal.name].below for _, signal in terms))
        numerators: dict[str, R] = {}
        for factor, signal in terms:
            response = self.known[signal.name]
            scale = factor if signal.tap == 0 else ring.times(factor, ring.late(signal.tap))
            for at in sorted(below - response.below):
                scale = ring.times(scale, self.determinants[at])
            for source, value in response.numerators.items():
                self._add(numerators, source, ring.times(scale, value))
            if signal.tap:
                start = self.starting(signal)
                if start != ring.zero:
                    raised = ring.times(factor, start)
                    for at in sorted(below):
                        raised = ring.times(raised, self.determinants[at])
                    self._add(numerators, STARTS, raised)
        return Response(numerators, below)

    def _add(self, numerators: dict[str, R], source: str, value: R) -> None:
        if source in numerators:
            value = self.ring.plus(numerators[source], value)
        if value == self.ring.zero:
            numerators.pop(source, None)
        else:
            numerators[source] = value

    def take_single(self, name: str) -> None:
        element = self.diagram.elements[name]
        if isinstance(element, Input):
            self.known[name] = Response({name: self.ring.one}, frozenset())
        else:
            self.known[name] = self.combined([(self.factor(term), term.signal) for term in wires(element)])

    def take_component(self, number: int, names: list[str], wanted: list[int]) -> None:
        """Solves a component with loops; its determinant joins those below its signals."""
        ring = self.ring
        rows, outer, starts = self.component(names)
        combined = [self.combined(terms) for terms in outer]
        below: frozenset[int] = frozenset().union(*(response.below for response in combined))
        right = [self._lifted(response, below, start) for response, start in zip(combined, starts, strict=True)]
        determinant, values = solve_component(rows, right, wanted, ring)
        self.determinants[number] = determinant
        self.members[number] = names
        if not ring.invertible:
            below = below | {number}
        for at, numerators in values.items():
            self.known[names[at]] = Response(numerators, below)

    def component(self, names: list[str]) -> tuple[list[dict[int, R]], list[list[tuple[R, Signal]]], list[R]]:
        """The equations of a component: what each signal reads inside, outside, and of starting contents."""
        ring = self.ring
        inside = {name: at for at, name in enumerate(names)}
        rows: list[dict[int, R]] = []
        outer: list[list[tuple[R, Signal]]] = []
        starts: list[R] = []
        for name in names:
            element = self.diagram.elements[name]
            assert not isinstance(element, Input)
            row: dict[int, R] = {}
            outside: list[tuple[R, Signal]] = []
            start = ring.zero
            for term in wires(element):
                factor = self.factor(term)
                at = inside.get(term.signal.name)
                if at is None:
                    outside.append((factor, term.signal))
                    continue
                if term.signal.tap:
                    start = ring.plus(start, ring.times(factor, self.starting(term.signal)))
                    factor = ring.times(factor, ring.late(term.signal.tap))
                row[at] = ring.plus(row[at], factor) if at in row else factor
            rows.append({at: value for at, value in row.items() if value != ring.zero})
            outer.append(outside)
            starts.append(start)
        return rows, outer, starts

    def _lifted(self, response: Response[R], below: frozenset[int], start: R) -> dict[str, R]:
        """Numerators over the denominators in `below`, with a starting content added."""
        ring = self.ring
        scale = ring.one
        for at in sorted(below - response.below):
            scale = ring.times(scale, self.determinants[at])
        numerators = {source: ring.times(scale, value) for source, value in response.numerators.items()}
        if start != ring.zero:
            for at in sorted(below):
                start = ring.times(start, self.determinants[at])
            self._add(numerators, STARTS, start)
        return numerators
