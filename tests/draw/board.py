"""Diagrams built by hand in a line or two each, for tests of drawing that need no text."""

from __future__ import annotations

import re
from fractions import Fraction

from flowgraph.diagram.diagram import Coefficient, Diagram
from flowgraph.diagram.elements import Adder, Delay, Element, Gain, Input, Output, Signal, Term
from flowgraph.diagram.expression import Expression, Name, Number


def board(name: str, *lines: str, title: str = "") -> Diagram:
    """A diagram from lines such as `input x`, `adder y = x - a*y1`, `delay y1 = y by 3`, `gain g = c*x`, `output y`."""
    elements: dict[str, Element] = {}
    outputs: dict[str, Output] = {}
    coefficients: dict[str, Coefficient] = {}
    written = [part.strip() for joined in lines for part in joined.split(";")]
    lengths = {
        found[1]: int(found[2] or 1) for line in written if (found := re.match(r"delay (\S+) = \S+(?: by (\d+))?", line))
    }

    def signal(text: str) -> Signal:
        """`line@3` is a tap; a bare delay is its last tap."""
        name, _, tap = text.strip().partition("@")
        return Signal(name, int(tap) if tap else lengths.get(name, 0))

    for line in written:
        word, _, rest = line.partition(" ")
        left, _, right = (piece.strip() for piece in rest.partition("="))
        if word == "input":
            elements[left] = Input(left)
        elif word == "output":
            outputs[left] = Output(left, signal(right or left))
        elif word == "delay":
            source, _, length = right.partition(" by ")
            elements[left] = Delay(left, signal(source), int(length or 1))
        elif word == "gain":
            coefficient, _, read = right.rpartition("*")
            elements[left] = Gain(left, _coefficient(coefficient, coefficients), signal(read))
        else:
            terms = []
            for sign, body in re.findall(r"([+-]?)\s*([^\s+-]+)", right):
                coefficient, _, read = body.rpartition("*")
                scale = _coefficient(coefficient, coefficients) if coefficient else None
                terms.append(Term(signal(read), sign == "-", scale))
            elements[left] = Adder(left, tuple(terms))
    return Diagram(name, elements, outputs, coefficients, title=title)


def _coefficient(text: str, known: dict[str, Coefficient]) -> Expression:
    text = text.strip()
    if re.fullmatch(r"[0-9./]+", text):
        return Number(Fraction(text))
    known.setdefault(text, Coefficient(text))
    return Name(text)
