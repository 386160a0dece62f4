"""The oracle: exact responses that textbooks print, starting contents, and values of expressions."""

from __future__ import annotations

from fractions import Fraction

import pytest
from exact_values import exact_values

from flowgraph.diagram.diagram import Coefficient, Diagram
from flowgraph.diagram.elements import Adder, Delay, Element, Gain, Input, Output, Signal, Term
from flowgraph.diagram.expression import Name, Number
from flowgraph.diagram.simulate import simulate

ONE = Fraction(1)
ZERO = Fraction(0)


def number(value: str) -> Number:
    return Number(Fraction(value))


def diagram(*elements: Element, outputs: tuple[str, ...], **coefficients: Coefficient) -> Diagram:
    return Diagram(
        "made",
        {element.name: element for element in elements},
        {name: Output(name, Signal(name)) for name in outputs},
        coefficients,
    )


def run(made: Diagram, samples: int, **inputs: list[Fraction]) -> dict[str, list[Fraction]]:
    return simulate(made, exact_values(made), inputs, samples, ZERO)


def test_leaky_integrator_decays_by_its_factor() -> None:
    """y = x + r*y1 answers an impulse with 1, r, r^2, .."""
    made = diagram(
        Input("x"),
        Delay("y1", Signal("y")),
        Adder("y", (Term(Signal("x")), Term(Signal("y1", 1), coefficient=Name("r")))),
        outputs=("y",),
        r=Coefficient("r", number("0.95")),
    )
    assert run(made, 5, x=[ONE])["y"] == [Fraction(19, 20) ** n for n in range(5)]


def test_integer_low_pass_has_its_published_response() -> None:
    """y = 2y1 - y2 + x - 2x6 + x12 answers 1 2 3 4 5 6 5 4 3 2 1 (Pan and Tompkins 1985)."""
    made = diagram(
        Input("x"),
        Delay("past", Signal("x"), 12),
        Delay("back", Signal("y"), 2),
        Adder(
            "y",
            (
                Term(Signal("back", 1), coefficient=number("2")),
                Term(Signal("back", 2), negative=True),
                Term(Signal("x")),
                Term(Signal("past", 6), negative=True, coefficient=number("2")),
                Term(Signal("past", 12)),
            ),
        ),
        outputs=("y",),
    )
    assert run(made, 15, x=[ONE])["y"] == [1, 2, 3, 4, 5, 6, 5, 4, 3, 2, 1, 0, 0, 0, 0]


def test_starting_contents_come_out_tap_by_tap() -> None:
    """starts v1, v2, v3 are what taps 1, 2, 3 show at n = 0; they leave through the far end in reverse."""
    made = diagram(
        Input("x"),
        Delay("line", Signal("x"), 3, (number("7"), number("8"), number("9"))),
        Gain("y", number("1"), Signal("line", 3)),
        outputs=("y",),
    )
    assert run(made, 5, x=[Fraction(1), Fraction(2)])["y"] == [9, 8, 7, 1, 2]


def test_two_cells_that_feed_each_other_swap() -> None:
    """d1 = d2, d2 = d1 is a legal diagram; the contents change places at every sample."""
    made = diagram(
        Delay("d1", Signal("d2", 1), 1, (number("1"),)),
        Delay("d2", Signal("d1", 1), 1, (number("2"),)),
        Adder("y", (Term(Signal("d1", 1)), Term(Signal("d2", 1), coefficient=number("10")))),
        outputs=("y",),
    )
    assert run(made, 4)["y"] == [21, 12, 21, 12]


def test_watched_signals_are_told_beside_the_ports() -> None:
    """A watched signal may be any tap, and is returned under the key it was asked by."""
    made = diagram(Input("x"), Delay("line", Signal("x"), 2), Gain("y", number("3"), Signal("line", 2)), outputs=("y",))
    told = simulate(made, exact_values(made), {"x": [ONE]}, 3, ZERO, {"late": Signal("line", 1)})
    assert told == {"y": [0, 0, 3], "late": [0, 1, 0]}


def test_a_loop_without_a_delay_is_refused() -> None:
    """Nothing can be computed first in y = x + u, u = 2*y."""
    made = diagram(
        Input("x"),
        Adder("y", (Term(Signal("x")), Term(Signal("u")))),
        Gain("u", number("2"), Signal("y")),
        outputs=("y",),
    )
    with pytest.raises(ValueError, match="a loop without a delay: y, u"):
        run(made, 1)
