"""The state matrices of a diagram: what its cells hold next, from what they hold now and the inputs."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Generic, TypeVar

from flowgraph.algebra.ring import Ring
from flowgraph.algebra.solve import wires
from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.elements import Delay, Input, Signal
from flowgraph.diagram.index import index, instant_order

R = TypeVar("R")
Cell = tuple[str, int]
"""A delay and the number of the cell along its line, the first being 1: what tap k shows."""


@dataclass(frozen=True, slots=True)
class States(Generic[R]):
    """next = A cells + B inputs, outputs = C cells + D inputs; rows as sparse maps by column number."""

    cells: list[Cell]
    a: list[dict[int, R]]
    b: list[dict[int, R]]
    c: list[dict[int, R]]
    d: list[dict[int, R]]
    starts: list[R]


def cells_of(diagram: Diagram) -> list[Cell]:
    """All memory cells in the order of the file, along each line."""
    return [(delay.name, at) for delay in diagram.delays() for at in range(1, delay.length + 1)]


def state_matrices(diagram: Diagram, ring: Ring[R]) -> States[R]:
    """The state matrices over any ring; only sums and products are used, so polynomials stay so."""
    cells = cells_of(diagram)
    state = {cell: at for at, cell in enumerate(cells)}
    inputs = [port.name for port in diagram.inputs()]
    view = index(diagram)
    order, _ = instant_order(view)
    # A form maps a cell's number, or len(cells) + an input's number, to its factor.
    forms: dict[str, dict[int, R]] = {name: {len(cells) + at: ring.one} for at, name in enumerate(inputs)}

    def form(signal: Signal) -> dict[int, R]:
        return forms[signal.name] if signal.tap == 0 else {state[signal]: ring.one}

    for at in order:
        element = diagram.elements[view.names[at]]
        if isinstance(element, (Input, Delay)):
            continue
        total: dict[int, R] = {}
        for term in wires(element):
            factor = ring.one if term.coefficient is None else ring.coefficient(term.coefficient)
            if term.negative:
                factor = ring.minus(ring.zero, factor)
            for column, value in form(term.signal).items():
                product = ring.times(factor, value)
                total[column] = ring.plus(total[column], product) if column in total else product
        forms[element.name] = {column: value for column, value in total.items() if value != ring.zero}
    following = [
        form(delay.signal) if at == 1 else {state[(delay.name, at - 1)]: ring.one}
        for delay in diagram.delays()
        for at in range(1, delay.length + 1)
    ]
    shown = [form(output.signal) for output in diagram.outputs.values()]
    starts = [
        ring.coefficient(delay.starts[at]) if delay.starts else ring.zero
        for delay in diagram.delays()
        for at in range(delay.length)
    ]
    size = len(cells)
    return States(
        cells,
        [{column: value for column, value in row.items() if column < size} for row in following],
        [{column - size: value for column, value in row.items() if column >= size} for row in following],
        [{column: value for column, value in row.items() if column < size} for row in shown],
        [{column - size: value for column, value in row.items() if column >= size} for row in shown],
        starts,
    )
