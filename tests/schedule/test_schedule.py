"""The schedule: carried out to the letter it computes what the diagram means."""

from __future__ import annotations

from fractions import Fraction

import pytest
from exact_values import exact_values
from hypothesis import given
from hypothesis import strategies as st
from random_diagrams import SAMPLES, small_samples, wired_diagrams

from flowgraph.diagram.diagram import Counts, Diagram
from flowgraph.diagram.elements import Adder, Delay, Element, Gain, Input, Output, Signal, Term
from flowgraph.diagram.expression import Number
from flowgraph.diagram.simulate import simulate
from flowgraph.schedule.schedule import DelayFreeLoopError, Operation, schedule


def carried_out(diagram: Diagram, inputs: dict[str, list[Fraction]]) -> dict[str, list[Fraction]]:
    """Carries out the operations one by one on named storage; what no operation reads any more is taken away."""
    value = exact_values(diagram)
    cells = {
        delay.name: [value(start) for start in delay.starts] or [Fraction(0)] * delay.length
        for delay in diagram.delays()
    }
    operations = schedule(diagram).operations
    last_read = {signal.name: at for at, step in enumerate(operations) for signal in step.reads}
    result: dict[str, list[Fraction]] = {name: [] for name in diagram.outputs}
    for n in range(SAMPLES):
        values: dict[str, Fraction] = {}
        for at, step in enumerate(operations):
            read = [cells[name][tap - 1] if tap else values[name] for name, tap in step.reads]
            match step.kind:
                case "input":
                    values[step.name] = inputs[step.name][n]
                case "adder" | "gain":
                    values[step.name] = computed(diagram.elements[step.name], read, diagram)
                case "output":
                    result[step.name].append(read[0])
                case "keep":
                    values[step.name] = read[0]
                case "update":
                    cells[step.name] = [read[0], *cells[step.name][:-1]]
            for signal in step.reads:
                if last_read[signal.name] == at:
                    values.pop(signal.name, None)
    return result


def computed(element: Element, read: list[Fraction], diagram: Diagram) -> Fraction:
    """The value of an adder or a gain from the values it reads, in their order."""
    value = exact_values(diagram)
    if isinstance(element, Gain):
        return value(element.coefficient) * read[0]
    assert isinstance(element, Adder)
    products = [
        (-1 if term.negative else 1) * (Fraction(1) if term.coefficient is None else value(term.coefficient)) * signal
        for term, signal in zip(element.terms, read, strict=True)
    ]
    return sum(products, Fraction(0))


@given(wired_diagrams(), st.data())
def test_the_schedule_carried_out_to_the_letter_equals_the_oracle(diagram: Diagram, data: st.DataObject) -> None:
    """With feedback, swaps, self-holding cells and long lines, each storage place used once and overwritten."""
    inputs = {port.name: data.draw(small_samples()) for port in diagram.inputs()}
    assert carried_out(diagram, inputs) == simulate(diagram, exact_values(diagram), inputs, SAMPLES, Fraction(0))


@given(wired_diagrams())
def test_every_element_and_port_is_scheduled_exactly_once(diagram: Diagram) -> None:
    """Inputs, computations, outputs and updates are all there; keeps come on top, at most one for two delays."""
    operations = schedule(diagram).operations
    plain = [step.name for step in operations if step.kind not in ("keep", "output")]
    keeps = [step for step in operations if step.kind == "keep"]
    assert sorted(plain) == sorted(diagram.elements)
    assert [step.name for step in operations if step.kind == "output"] == list(diagram.outputs)
    assert 2 * len(keeps) <= len(diagram.delays())


def steps(*elements: Element, outputs: dict[str, Signal]) -> list[Operation]:
    made = Diagram(
        "made",
        {element.name: element for element in elements},
        {name: Output(name, signal) for name, signal in outputs.items()},
    )
    return list(schedule(made).operations)


def test_a_line_of_single_cells_moves_from_its_far_end() -> None:
    """In x -> x1 -> x2 the cell x2 takes x1 before x1 takes x."""
    found = steps(
        Input("x"),
        Delay("x1", Signal("x")),
        Delay("x2", Signal("x1", 1)),
        outputs={"y": Signal("x2", 1)},
    )
    assert found == [
        Operation("x", "input", ()),
        Operation("y", "output", (Signal("x2", 1),)),
        Operation("x2", "update", (Signal("x1", 1),)),
        Operation("x1", "update", (Signal("x"),)),
    ]


def test_cells_that_swap_need_one_place_more() -> None:
    """In d1 = d2, d2 = d1 the next content of d1 is kept before d2 is overwritten."""
    found = steps(
        Delay("d1", Signal("d2", 1)),
        Delay("d2", Signal("d1", 1)),
        outputs={"y": Signal("d1", 1)},
    )
    assert found == [
        Operation("y", "output", (Signal("d1", 1),)),
        Operation("d1.next", "keep", (Signal("d2", 1),)),
        Operation("d2", "update", (Signal("d1", 1),)),
        Operation("d1", "update", (Signal("d1.next"),)),
    ]


def test_ports_keep_the_order_of_the_file_and_values_come_before_they_are_read() -> None:
    """Direct form II of one section: the adder of the loop first, then the output; 2 cells, 5 multiplies, 4 adds."""
    third = Number(Fraction(1, 3))

    def term(name: str, tap: int = 0, negative: bool = False) -> Term:
        return Term(Signal(name, tap), negative, third)

    made = Diagram(
        "section",
        {
            "y": Adder("y", (term("w"), term("w1", 1), term("w2", 1))),
            "w": Adder("w", (Term(Signal("x")), term("w1", 1, True), term("w2", 1, True))),
            "w1": Delay("w1", Signal("w")),
            "w2": Delay("w2", Signal("w1", 1)),
            "x": Input("x"),
        },
        {"y": Output("y", Signal("y"))},
    )
    found = schedule(made)
    assert [step.name for step in found.operations] == ["x", "w", "y", "y", "w2", "w1"]
    assert found.counts == Counts(cells=2, multiplies=5, adds=4)


def test_a_loop_without_a_delay_has_no_schedule() -> None:
    """The refusal names the elements of the loop."""
    with pytest.raises(DelayFreeLoopError, match="a loop without a delay runs through u, y"):
        steps(
            Input("x"),
            Gain("u", Number(Fraction(2)), Signal("y")),
            Adder("y", (Term(Signal("x")), Term(Signal("u")))),
            outputs={"y": Signal("y")},
        )


def test_a_hundred_thousand_cells_in_a_ring_are_scheduled() -> None:
    """Nothing recurses; one value is kept, and the ring turns."""
    size = 100_000
    ring = [Delay(f"d{k}", Signal(f"d{(k - 1) % size}", 1)) for k in range(size)]
    found = steps(*ring, outputs={"y": Signal("d7", 1)})
    assert [step.name for step in found[:3]] == ["y", "d0.next", f"d{size - 1}"]
    assert found[-1] == Operation("d0", "update", (Signal("d0.next"),))
    assert len(found) == size + 2
