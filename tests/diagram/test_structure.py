"""Questions about the shape of a diagram."""

from __future__ import annotations

from itertools import islice

import networkx
from hypothesis import given
from hypothesis import strategies as st

from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.elements import Adder, Element, Gain, Input, Output, Signal, Term
from flowgraph.diagram.expression import ONE
from flowgraph.diagram.index import Index, index
from flowgraph.diagram.structure import delay_free_loops, spread, unread_ends

WIRES = st.lists(st.tuples(st.integers(0, 6), st.integers(0, 6)), max_size=14, unique=True)


def wired(wires: list[tuple[int, int]]) -> Index:
    """Seven adders; each pair is a wire from the first to the second."""
    elements: dict[str, Element] = {
        f"s{at}": Adder(f"s{at}", tuple(Term(Signal(f"s{source}")) for source, reader in wires if reader == at))
        for at in range(7)
    }
    return index(Diagram("made", elements, {}))


@given(WIRES)
def test_every_elementary_loop_is_found_once(wires: list[tuple[int, int]]) -> None:
    """The loops are those that networkx finds in the whole graph, each from its first element."""
    found = list(delay_free_loops(wired(wires)))
    expected = [
        cycle[cycle.index(min(cycle)) :] + cycle[: cycle.index(min(cycle))]
        for cycle in networkx.simple_cycles(networkx.DiGraph(wires))
    ]
    assert sorted(found) == sorted(expected)


@given(WIRES)
def test_a_loop_runs_along_its_wires(wires: list[tuple[int, int]]) -> None:
    """Each element of a loop is read by the next, the last by the first."""
    for loop in delay_free_loops(wired(wires)):
        assert all(wire in wires for wire in zip(loop, loop[1:] + loop[:1], strict=True))


def test_the_first_loops_of_very_many_come_at_once() -> None:
    """Twenty adders that all read each other have far more loops than anyone can count."""
    names = [f"s{at}" for at in range(20)]
    elements: dict[str, Element] = {
        name: Adder(name, tuple(Term(Signal(other)) for other in names if other != name)) for name in names
    }
    assert len(list(islice(delay_free_loops(index(Diagram("made", elements, {}))), 20))) == 20


@given(WIRES, st.integers(0, 6))
def test_spread_marks_what_can_be_reached(wires: list[tuple[int, int]], root: int) -> None:
    """It agrees with the descendants that networkx finds."""
    graph = networkx.DiGraph(wires)
    graph.add_nodes_from(range(7))
    marked = spread(wired(wires).readers, [root])
    assert {at for at, here in enumerate(marked) if here} == networkx.descendants(graph, root) | {root}


def test_unread_signals_are_told_at_their_ends() -> None:
    """Of x -> a -> b and x -> c, with c shown, only b is an end: a follows from it."""
    elements: dict[str, Element] = {"x": Input("x")}
    for name, source in (("a", "x"), ("b", "a"), ("c", "x")):
        elements[name] = Gain(name, ONE, Signal(source))
    view = index(Diagram("made", elements, {"y": Output("y", Signal("c"))}))
    assert [view.names[at] for at in unread_ends(view, [view.number["c"]])] == ["b"]


def test_a_large_group_tells_the_shortest_loop_through_each_element() -> None:
    """A chain of 1000 adders that each read both neighbours has its loops of two told at once."""
    names = [f"s{at}" for at in range(1000)]
    elements: dict[str, Element] = {
        name: Adder(name, tuple(Term(Signal(names[near])) for near in (at - 1, at + 1) if 0 <= near < 1000))
        for at, name in enumerate(names)
    }
    loops = delay_free_loops(index(Diagram("made", elements, {})))
    assert list(islice(loops, 3)) == [[0, 1], [1, 2], [2, 3]]
