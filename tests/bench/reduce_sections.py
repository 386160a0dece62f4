"""How long 50 direct form I sections take to reduce to the two-cell form, every step proved.

Run from the top of the project: python tests/bench/reduce_sections.py [sections]
"""

from __future__ import annotations

import sys
import time
from fractions import Fraction

from flowgraph.diagram.diagram import Coefficient, Diagram
from flowgraph.diagram.elements import Adder, Delay, Element, Input, Output, Signal, Term
from flowgraph.diagram.expression import Expression, Name, Number
from flowgraph.passes.reduce import reduce_diagram

COEFFICIENTS = ("b0", "b1", "b2", "a1", "a2")


def cascade(sections: int, *, named: bool) -> Diagram:
    """Direct form I sections, each drawn with one adder, their coefficients open names or numbers."""
    elements: dict[str, Element] = {"x": Input("x")}
    coefficients: dict[str, Coefficient] = {}
    before = "x"
    for section in range(1, sections + 1):
        signal = f"y[{section}]"
        line: dict[str, str] = {}
        for short, source in (("x1", before), ("y1", signal)):
            first, second = f"{short}[{section}]", f"{short[0]}2[{section}]"
            elements[first] = Delay(first, Signal(source, 0))
            elements[second] = Delay(second, Signal(first, 1))
            line[short], line[f"{short[0]}2"] = first, second
        values: list[Expression] = []
        for at, name in enumerate(COEFFICIENTS):
            own = f"{name}[{section}]"
            if named:
                coefficients[own] = Coefficient(own)
            values.append(Name(own) if named else Number(Fraction(2 * at + section + 1, 64 + 7 * section)))
        reads = [Signal(before, 0), *(Signal(line[name], 1) for name in ("x1", "x2", "y1", "y2"))]
        terms = [Term(read, at > 2, value) for at, (read, value) in enumerate(zip(reads, values, strict=True))]
        elements[signal] = Adder(signal, tuple(terms))
        before = signal
    return Diagram("sections", elements, {"y": Output("y", Signal(before, 0))}, coefficients)


def main() -> None:
    """Prints the time, the counts and the proofs, for numbers and for names."""
    sections = int(sys.argv[1]) if len(sys.argv) > 1 else 50
    for named in (False, True):
        diagram = cascade(sections, named=named)
        started = time.perf_counter()
        reduction = reduce_diagram(diagram)
        elapsed = time.perf_counter() - started
        before, after = reduction.counts()
        kind = "names" if named else "numbers"
        print(f"{sections} sections, {kind}: {before.cells} -> {after.cells} cells, {elapsed:.2f} s")
        for step in reduction.steps:
            print(f"  {step.name}: {step.message} ({step.proof})")


if __name__ == "__main__":
    main()
