"""The oracle: exact responses that textbooks print, starting contents, and values of expressions."""

from __future__ import annotations

from fractions import Fraction
from itertools import pairwise

import pytest

from flowgraph.diagram.diagram import Coefficient, Diagram
from flowgraph.diagram.elements import Adder, Delay, Element, Gain, Input, Output, Signal, Term
from flowgraph.diagram.expression import Function, Name, Negative, Number, Pi, Power, Product, Quotient, Sum
from flowgraph.diagram.simulate import NoExactValueError, OpenCoefficientError, exact_values, simulate

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
    made = diagram(
        Input("x"), Delay("line", Signal("x"), 2), Gain("y", number("3"), Signal("line", 2)), outputs=("y",)
    )
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


def test_values_are_exact_through_coefficients_that_follow_others() -> None:
    """c = -r^2/(1 - r) with r = 1/3 is -1/6, whatever the order of definition."""
    made = diagram(
        outputs=(),
        c=Coefficient(
            "c", Quotient(Negative(Power(Name("r"), Fraction(2))), Sum((number("1"), Negative(Name("r")))))
        ),
        r=Coefficient("r", number("1/3")),
    )
    assert exact_values(made)(Product((Name("c"), number("2")))) == Fraction(-1, 3)


def test_a_hundred_thousand_coefficients_in_a_row_are_resolved() -> None:
    """Following is resolved without recursion."""
    names = [f"c{k}" for k in range(100_000)]
    chain = {
        name: Coefficient(name, Name(following)) for name, following in pairwise(names)
    } | {names[-1]: Coefficient(names[-1], number("0.5"))}
    made = diagram(outputs=(), **chain)
    assert exact_values(made)(Name("c0")) == Fraction(1, 2)


@pytest.mark.parametrize(
    ("expression", "said"),
    [
        (Function("sqrt", number("2")), "sqrt has no exact value as a fraction"),
        (Pi(), "pi has no exact value as a fraction"),
        (Power(number("10"), Fraction(-3, 10)), "the power -3/10 has no exact value as a fraction"),
        (Quotient(number("1"), Sum((number("1"), number("-1")))), "a coefficient divides by zero"),
        (Power(number("0"), Fraction(-1)), "a coefficient divides by zero"),
        (Name("loop"), "the coefficient loop follows itself"),
    ],
)
def test_what_is_no_fraction_says_why(expression: Function, said: str) -> None:
    """Irrational values, divisions by zero and coefficients that follow themselves are refused by name."""
    made = diagram(outputs=(), loop=Coefficient("loop", Name("loop")))
    with pytest.raises(NoExactValueError, match=said):
        exact_values(made)(expression)


def test_an_open_coefficient_is_named() -> None:
    """A coefficient without a value is no zero."""
    made = diagram(outputs=(), b0=Coefficient("b0"))
    with pytest.raises(OpenCoefficientError) as caught:
        exact_values(made)(Name("b0"))
    assert caught.value.name == "b0"
