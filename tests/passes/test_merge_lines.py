"""Lines are merged by stretches of cells: nothing is missed, and every cell that shares is told."""

from dataclasses import replace
from fractions import Fraction

import pytest
from drawn import behaviour, diagram_of
from hypothesis import assume, given
from hypothesis import strategies as st

from flowgraph.diagram.diagram import Diagram, count
from flowgraph.diagram.elements import Adder, Delay, Element, Input, Output, Signal, Term, redirected
from flowgraph.diagram.expression import Number
from flowgraph.passes.carried import shared
from flowgraph.passes.merge_equal import merge_equal
from flowgraph.passes.proof import Keys
from flowgraph.passes.reduce import reduce_diagram, take_step
from flowgraph.passes.stretches import Numbering
from flowgraph.passes.well_formed import faults_of_rewriting

CONTENTS = [Number(Fraction(0)), Number(Fraction(1))]


@st.composite
def networks_of_lines(draw: st.DrawFn) -> Diagram:
    """Two to six lines, some with contents, that read an input, each other (in rings, too) and one or two adders."""
    lengths = draw(st.lists(st.sampled_from([1, 1, 2, 3, 5]), min_size=2, max_size=6))
    cells = [Signal(f"d{k}", tap) for k, length in enumerate(lengths) for tap in range(1, length + 1)]
    adders = [Signal(f"s{k}") for k in range(draw(st.integers(1, 2)))]
    anything = st.sampled_from([Signal("x"), *adders, *cells])
    elements: dict[str, Element] = {"x": Input("x")}
    for k, length in enumerate(lengths):
        starts = draw(st.just(()) | st.tuples(*[st.sampled_from(CONTENTS)] * length))
        elements[f"d{k}"] = Delay(f"d{k}", draw(anything), length, starts)
    for adder in adders:
        read = draw(st.lists(anything, min_size=2, max_size=3, unique=True))
        elements[adder.name] = Adder(adder.name, tuple(Term(signal, draw(st.booleans())) for signal in read))
    outputs = {name: Output(name, draw(anything)) for name in ("y", "v")}
    diagram = Diagram("lines", elements, outputs)
    assume(not faults_of_rewriting(diagram, diagram))
    return diagram


def cell_by_cell(diagram: Diagram) -> Diagram:
    """The same diagram with each line drawn as delays of one cell."""
    to = {
        Signal(line.name, tap): Signal(f"{line.name} {tap}", 1)
        for line in diagram.delays()
        for tap in range(1, line.length + 1)
    }
    elements: dict[str, Element] = {}
    for name, element in diagram.elements.items():
        if not isinstance(element, Delay):
            elements[name] = redirected(element, to)
            continue
        source = to.get(element.signal, element.signal)
        for tap in range(1, element.length + 1):
            cell = Delay(f"{name} {tap}", source, 1, element.starts[tap - 1 : tap])
            elements[cell.name] = cell
            source = Signal(cell.name, 1)
    outputs = {name: Output(name, to.get(port.signal, port.signal)) for name, port in diagram.outputs.items()}
    return replace(diagram, elements=elements, outputs=outputs)


def merged(diagram: Diagram) -> Diagram:
    """The diagram after merging, proved, as often as that finds anything."""
    while (step := take_step(merge_equal, diagram)) is not None:
        diagram = step.after
    return diagram


@given(networks_of_lines())
def test_a_line_merges_as_its_cells_do(diagram: Diagram) -> None:
    """A line and the same cells drawn one by one come to the same counts."""
    assert count(merged(diagram)) == count(merged(cell_by_cell(diagram)))
    assert behaviour(merged(diagram)) == behaviour(diagram)


@given(networks_of_lines())
def test_every_cell_that_shares_is_told(diagram: Diagram) -> None:
    """The runs told are those of a walk through the steps cell by cell."""
    reduction = reduce_diagram(diagram)
    now = {Signal(line.name, tap): Signal(line.name, tap) for line in diagram.delays() for tap in range(1, 6)}
    now = {cell: image for cell, image in now.items() if cell.tap <= count_of(diagram, cell.name)}
    for step in reduction.steps:
        images = {cell: step.moved.get(image, image) for cell, image in now.items()}
        now = {cell: image for cell, image in images.items() if 1 <= image.tap <= count_of(step.after, image.name)}
    assert reduction.merged() == now
    wanted: dict[Signal, set[Signal]] = {}
    for cell, image in now.items():
        wanted.setdefault(image, set()).add(cell)
    told = {
        Signal(found.image.name, found.image.tap + at): {Signal(name, tap + at) for name, tap in found.sources}
        for found in shared(reduction.carried())
        for at in range(found.cells)
    }
    assert told == {image: cells for image, cells in wanted.items() if len(cells) > 1}


def count_of(diagram: Diagram, name: str) -> int:
    """The cells of a line; 0 where there is none of that name."""
    line = diagram.elements.get(name)
    return line.length if isinstance(line, Delay) else 0


@pytest.mark.parametrize("starts", ["", "starts 1/3"])
def test_a_long_line_is_a_few_stretches(starts: str) -> None:
    """A line of a million cells, at rest or filled, is cut only where something is read."""
    lines = f"delay line = x by 10^6 {starts}\ndelay x1 = x {starts}"
    diagram = diagram_of(f"input x\noutput y\n{lines}\nadder y = x1 + line[end]")
    assert len(Numbering(diagram, Keys(diagram)).stretches) == 5
    assert count(merged(diagram)).cells == 10**6


def test_two_summands_may_change_places() -> None:
    """a + b and b + a are one to the bit; of three summands only the first two may change places."""

    def keeps_rounding(first: str, second: str) -> bool:
        diagram = diagram_of(f"input a, b, c\noutput y, v\nadder y = {first}\nadder v = {second}")
        step = take_step(merge_equal, diagram)
        assert step is not None
        assert step.proof.method == "exact"
        assert count(step.after).adds == len(first.split("+")) - 1
        return step.proof.keeps_rounding

    assert keeps_rounding("a + b", "b + a")
    assert keeps_rounding("-a + 3*b", "3*b - a")
    assert keeps_rounding("a + b + c", "b + a + c")
    assert not keeps_rounding("a + b + c", "a + c + b")
    assert not keeps_rounding("a + b + c", "c + b + a")
