"""How long scheduling, printing and running take: `python tests/bench/execution.py`."""

from __future__ import annotations

import gc
from collections.abc import Callable
from fractions import Fraction
from time import perf_counter
from typing import TypeVar

from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.elements import Adder, Delay, Element, Gain, Input, Output, Signal, Term
from flowgraph.diagram.expression import Number
from flowgraph.emit.print_python import print_python
from flowgraph.run.compute import computer
from flowgraph.schedule.schedule import schedule

T = TypeVar("T")


def timed(label: str, work: Callable[[], T]) -> T:
    gc.collect()
    began = perf_counter()
    result = work()
    print(f"{label:<52} {perf_counter() - began:8.3f} s")
    return result


def cascade(sections: int) -> Diagram:
    """One-pole sections in a row, three elements each."""
    third = Number(Fraction(1, 3))
    elements: dict[str, Element] = {"x": Input("x")}
    source = "x"
    for k in range(sections):
        y, d, g = f"y[{k}]", f"d[{k}]", f"g[{k}]"
        elements[y] = Adder(y, (Term(Signal(source)), Term(Signal(d, 1), True, third)))
        elements[d] = Delay(d, Signal(y))
        elements[g] = Gain(g, third, Signal(y))
        source = g
    return Diagram("cascade", elements, {"out": Output("out", Signal(source))})


def main() -> None:
    big = cascade(33_333)
    order = timed("schedule 100 000 elements", lambda: schedule(big))
    timed("print 100 000 elements as Python", lambda: print_python(big, order))
    ten = computer(cascade(10))
    timed("run 100 000 samples through 10 one-pole sections", lambda: ten.process([0.5] * 100_000))


if __name__ == "__main__":
    main()
