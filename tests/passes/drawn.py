"""Structures for the tests of passes: random cascades of sections, and how they behave."""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction

from exact_values import exact_values
from hypothesis import strategies as st

from flowgraph.diagram.diagram import Coefficient, Diagram
from flowgraph.diagram.elements import Adder, Delay, Element, Gain, Input, Output, Signal, Term
from flowgraph.diagram.expression import Expression, Name, Number
from flowgraph.diagram.simulate import simulate
from flowgraph.passes.reduce import tidied
from flowgraph.text.load import load_text

SAMPLES = 16


def diagram_of(body: str) -> Diagram:
    """The diagram with these lines; what is missing of claims does not matter here."""
    [diagram] = load_text("diagram tested {\n" + body + "\n}\n").diagrams
    return diagram


def behaviour(diagram: Diagram) -> dict[str, list[Fraction]]:
    """Exact outputs for a fixed input that is nowhere periodic, every open coefficient at a fraction of its own."""
    valued = {
        name: found if found.value is not None else Coefficient(name, Number(Fraction(k + 2, 7)))
        for k, (name, found) in enumerate(diagram.coefficients.items())
    }
    inputs = {
        port.name: [Fraction((3 * n * n + 5 * n + 7 * k) % 11 - 5) for n in range(SAMPLES)]
        for k, port in enumerate(diagram.inputs())
    }
    told = replace(diagram, coefficients=valued)
    return simulate(told, exact_values(told), inputs, SAMPLES, Fraction(0))


def reordered(diagram: Diagram, order: list[str]) -> Diagram:
    """The same diagram with its lines in another order; inputs keep theirs."""
    ports = {port.name: port for port in diagram.inputs()}
    rest = {name: diagram.elements[name] for name in order if name not in ports}
    return replace(diagram, elements={**ports, **rest})


@st.composite
def cascades(draw: st.DrawFn) -> Diagram:
    """One to four sections with or without loops, lines own or shared, one adder or two, with or without a gain."""
    elements: dict[str, Element] = {"x": Input("x")}
    shared = draw(st.booleans())
    lines: dict[str, list[str]] = {}

    def late(signal: str, cells: int, owner: str) -> Signal:
        if cells == 0:
            return Signal(signal)
        key = signal if shared else f"{signal} of {owner}"
        line = lines.setdefault(key, [])
        while len(line) < cells:
            name = f"d{len(elements)}"
            elements[name] = Delay(name, Signal(line[-1], 1) if line else Signal(signal))
            line.append(name)
        return Signal(line[cells - 1], 1)

    def factor() -> Expression | None:
        return draw(st.none() | st.sampled_from([Number(Fraction(1, 3)), Number(Fraction(3)), Name("a"), Name("b")]))

    signal = "x"
    for section in range(draw(st.integers(1, 4))):
        ahead = sorted(draw(st.sets(st.integers(0, 3), min_size=1, max_size=3)))
        back = sorted(draw(st.sets(st.integers(1, 3), max_size=2)))
        out, between = f"y{section}", f"v{section}"
        one_adder = draw(st.booleans())
        forward = [Term(late(signal, cells, f"in {section}"), draw(st.booleans()), factor()) for cells in ahead]
        loop = [Term(late(out, cells, f"out {section}"), draw(st.booleans()), factor()) for cells in back]
        if not one_adder and len(forward) > 1 and loop:
            elements[between] = Adder(between, tuple(forward))
            forward = [Term(Signal(between))]
        terms = draw(st.permutations([*forward, *loop]))
        if len(terms) == 1:
            elements[out] = Gain(out, terms[0].coefficient or Number(Fraction(2)), terms[0].signal)
        else:
            elements[out] = Adder(out, tuple(terms))
        signal = out
    outputs = {"y": Output("y", Signal(signal))}
    if draw(st.integers(0, 3)) == 0:
        inner = draw(st.sampled_from(sorted(elements)))
        outputs["inner"] = Output("inner", Signal(inner, int(isinstance(elements[inner], Delay))))
    coefficients = {"a": Coefficient("a"), "b": Coefficient("b", Number(Fraction(2, 5)))}
    return tidied(Diagram("chain", elements, outputs, coefficients))
