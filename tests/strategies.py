"""Hypothesis strategies for diagrams that obey every structural rule of the language."""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction

from hypothesis import assume
from hypothesis import strategies as st

from flowgraph.diagram.diagram import Coefficient, Diagram
from flowgraph.diagram.elements import Adder, Delay, Element, Gain, Input, Output, Signal, Term
from flowgraph.diagram.expression import Expression, Name, Number, names_in
from flowgraph.diagram.index import index
from flowgraph.diagram.structure import spread

NUMBERS = [Number(Fraction(text)) for text in ("1/2", "-1/2", "1", "-1", "2", "-2")]
NAMED = {
    "a": Coefficient("a"),
    "b": Coefficient("b", Number(Fraction(1, 2))),
    "c": Coefficient("c", Number(Fraction(-2))),
}


@st.composite
def diagrams(draw: st.DrawFn, *, most_elements: int = 12) -> Diagram:
    """A diagram with feedback, 1 or 2 inputs and outputs, cells with contents, and no delay-free loop.

    Elements are drawn in an order in which one sample can be computed; delays may read anything,
    so that loops close through them. What reaches no output is dropped. Claims are left out.
    """
    inputs = [Signal(name) for name in ("x", "u")[: draw(st.integers(1, 2))]]
    lengths = draw(st.lists(st.sampled_from([1, 1, 1, 2, 3]), min_size=1, max_size=4))
    cells = [Signal(f"d{k}", tap) for k, length in enumerate(lengths) for tap in range(1, length + 1)]
    ready = [*inputs, *cells]
    elements: dict[str, Element] = {signal.name: Input(signal.name) for signal in inputs}
    for k in range(draw(st.integers(1, most_elements - len(inputs) - len(lengths)))):
        elements[f"s{k}"] = draw(computed(f"s{k}", ready))
        ready.append(Signal(f"s{k}"))
    for k, length in enumerate(lengths):
        elements[f"d{k}"] = Delay(f"d{k}", draw(st.sampled_from(ready)), length, draw(contents(length)))
    shown = [ready[-1], *draw(st.lists(st.sampled_from(ready), max_size=1))]
    outputs = {name: Output(name, signal) for name, signal in zip(("y", "v"), shown, strict=False)}
    diagram = _read_only(Diagram("made", elements, outputs))
    assume(not _is_silent(diagram))
    return diagram


@st.composite
def computed(draw: st.DrawFn, name: str, ready: list[Signal]) -> Element:
    """An adder or a gain over signals that are there already; no signal twice."""
    if len(ready) < 2 or draw(st.integers(0, 3)) == 0:
        return Gain(name, draw(factors()), draw(st.sampled_from(ready)))
    read = draw(st.lists(st.sampled_from(ready), min_size=2, max_size=4, unique=True))
    return Adder(name, tuple(Term(signal, draw(st.booleans()), draw(st.none() | factors())) for signal in read))


def factors() -> st.SearchStrategy[Expression]:
    """+-1/2, +-1, +-2 or a named coefficient: a dozen samples stay exact in doubles."""
    return st.sampled_from([*NUMBERS, *(Name(name) for name in NAMED)])


def contents(length: int) -> st.SearchStrategy[tuple[Expression, ...]]:
    """Starting contents of a line: none, or one number for each cell."""
    return st.just(()) | st.tuples(*[st.sampled_from(NUMBERS)] * length)


def _read_only(diagram: Diagram) -> Diagram:
    """The diagram without what reaches no output, with the coefficients that are read."""
    view = index(diagram)
    reaches = spread(view.reads, [view.number[output.signal.name] for output in diagram.outputs.values()])
    elements = {name: diagram.elements[name] for name in view.names if reaches[view.number[name]]}
    read = {name for element in elements.values() for factor in _expressions(element) for name in names_in(factor)}
    coefficients = {name: coefficient for name, coefficient in NAMED.items() if name in read}
    return replace(diagram, elements=elements, coefficients=coefficients)


def _is_silent(diagram: Diagram) -> bool:
    """Whether an output is 0 for ever: neither an input nor starting contents reach it."""
    view = index(diagram)
    sources = [
        at
        for at, element in enumerate(diagram.elements.values())
        if isinstance(element, Input) or (isinstance(element, Delay) and element.starts)
    ]
    reached = spread(view.readers, sources)
    return not all(reached[view.number[output.signal.name]] for output in diagram.outputs.values())


def _expressions(element: Element) -> tuple[Expression, ...]:
    match element:
        case Adder(terms=terms):
            return tuple(term.coefficient for term in terms if term.coefficient is not None)
        case Gain(coefficient=coefficient):
            return (coefficient,)
        case Delay(starts=starts):
            return starts
        case Input():
            return ()
