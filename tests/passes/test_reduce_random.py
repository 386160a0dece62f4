"""What reducing promises for every diagram, tried on random ones."""

import itertools
import random

from drawn import behaviour, cascades, diagram_of, reordered
from hypothesis import given
from hypothesis import strategies as st
from strategies import diagrams

from flowgraph.diagram.diagram import Counts, Diagram, count
from flowgraph.diagram.elements import Delay
from flowgraph.passes.cost import cost
from flowgraph.passes.reduce import reduce_diagram
from flowgraph.text.load import load_text
from flowgraph.text.printer import print_diagram

ANY = diagrams() | cascades()

BESIDE_THE_POINT = {"claim-missing"}
"""These diagrams make no claims."""


@given(ANY)
def test_behaviour_stays(diagram: Diagram) -> None:
    """The reduced diagram gives the same samples in exact arithmetic, from its starting contents on."""
    assert behaviour(reduce_diagram(diagram).after) == behaviour(diagram)


@given(ANY)
def test_every_step_costs_less(diagram: Diagram) -> None:
    """Cells, multiplies, adds and elements, in this order, fall with each step, and a second run finds no step."""
    reduction = reduce_diagram(diagram)
    costs = [cost(diagram), *(cost(step.after) for step in reduction.steps)]
    assert costs == sorted(costs, reverse=True)
    assert len(set(costs)) == len(costs)
    assert reduce_diagram(reduction.after).steps == ()


@given(ANY, st.randoms(use_true_random=False))
def test_counts_do_not_depend_on_the_order_of_lines(diagram: Diagram, chance: random.Random) -> None:
    """The same lines in another order reduce to the same counts."""
    names = list(diagram.elements)
    chance.shuffle(names)
    assert reduce_diagram(reordered(diagram, names)).counts() == reduce_diagram(diagram).counts()


def test_the_file_does_not_choose_between_gains() -> None:
    """Of two gains of one signal that an adder cannot both take over for nothing, it is the same in any order."""
    lines = ["gain twice = -2*u", "gain other = -3*u", "gain third = 1/3*u", "adder y = twice - 3*third - x"]
    ports = "input x, u\noutput y, other\n"
    found = {
        reduce_diagram(diagram_of(ports + "\n".join(order))).counts()[1] for order in itertools.permutations(lines)
    }
    assert found == {Counts(0, 1, 2)}


@given(ANY)
def test_every_cell_left_does_the_work_of_one(diagram: Diagram) -> None:
    """Each cell of the diagram before leads to a cell that is there, and each cell left is led to or new in name."""
    reduction = reduce_diagram(diagram)
    lengths = {line.name: line.length for line in reduction.after.delays()}
    for before, after in reduction.merged().items():
        assert isinstance(diagram.elements[before.name], Delay)
        assert 1 <= after.tap <= lengths[after.name]


@given(ANY)
def test_the_same_diagram_gives_the_same_steps(diagram: Diagram) -> None:
    """Two runs agree in every word and name."""
    first, second = reduce_diagram(diagram), reduce_diagram(diagram)
    assert [step.message for step in first.steps] == [step.message for step in second.steps]
    assert list(first.after.elements.items()) == list(second.after.elements.items())


@given(ANY)
def test_the_reduced_text_reads_back(diagram: Diagram) -> None:
    """The text of the reduced diagram breaks no rule of structure and means the same diagram."""
    reduced = reduce_diagram(diagram).after
    loaded = load_text(print_diagram(reduced))
    errors = [found for found in loaded.findings if found.severity == "error" and found.code not in BESIDE_THE_POINT]
    assert [found.message for found in errors] == []
    [again] = loaded.diagrams
    assert behaviour(again) == behaviour(reduced)
    assert count(again).cells == count(reduced).cells
