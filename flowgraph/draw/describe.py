"""The picture in sentences, for those who hear it: counts, then one sentence for every element."""

from __future__ import annotations

from flowgraph.diagram.diagram import Diagram, count
from flowgraph.diagram.elements import Adder, Delay, Element, Gain, Input, Signal, Term
from flowgraph.draw.labels import expression_label

MOST_SENTENCES = 200


def describe(diagram: Diagram) -> str:
    """Counts and one sentence for every element: "w = x minus a1 times w1; w1 = w delayed by 1; ..."."""
    counts = count(diagram)
    delays = {delay.name: delay for delay in diagram.delays()}
    sentences = [_sentence(element, delays) for element in diagram.elements.values() if not isinstance(element, Input)]
    sentences += [
        f"output {output.name} = {_signal(output.signal, delays)}"
        for output in diagram.outputs.values()
        if output.name != output.signal.name
    ]
    if len(sentences) > MOST_SENTENCES:
        sentences = [*sentences[:MOST_SENTENCES], f"and {len(sentences) - MOST_SENTENCES} more"]
    inputs = ", ".join(element.name for element in diagram.inputs()) or "none"
    outputs = ", ".join(diagram.outputs) or "none"
    head = (
        f"Block diagram with {_many(counts.cells, 'delay cell')}, {counts.multiplies} "
        f"{'multiply' if counts.multiplies == 1 else 'multiplies'} and {_many(counts.adds, 'add')}; "
        f"inputs: {inputs}; outputs: {outputs}."
    )
    return head + (" " + "; ".join(sentences) + "." if sentences else "")


def _many(number: int, word: str) -> str:
    return f"{number} {word}{'' if number == 1 else 's'}"


def _signal(signal: Signal, delays: dict[str, Delay]) -> str:
    delay = delays.get(signal.name)
    return f"{signal.name} after {signal.tap}" if delay is not None and delay.length > 1 else signal.name


def _sentence(element: Element, delays: dict[str, Delay]) -> str:
    match element:
        case Adder(name, terms):
            return f"{name} = " + " ".join(_term(term, at == 0, delays) for at, term in enumerate(terms))
        case Gain(name, coefficient, signal):
            return f"{name} = {expression_label(coefficient)} times {_signal(signal, delays)}"
        case Delay(name, signal, length, starts):
            begins = " starting at " + ", ".join(expression_label(value) for value in starts[:4]) if starts else ""
            return f"{name} = {_signal(signal, delays)} delayed by {length}{begins}"
        case Input(name):
            return f"input {name}"


def _term(term: Term, first: bool, delays: dict[str, Delay]) -> str:
    sign = "minus " if term.negative else "" if first else "plus "
    scale = f"{expression_label(term.coefficient)} times " if term.coefficient is not None else ""
    return sign + scale + _signal(term.signal, delays)
