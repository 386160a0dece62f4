"""The two roads to equality, transfer functions and impulse responses, never part."""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction

import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from random_diagrams import DYADIC_GAIN, wired_diagrams

from flowgraph.algebra.behaviour import DiagramBehaviour
from flowgraph.algebra.compare import _identity_test, compare
from flowgraph.algebra.samples import compare_by_samples
from flowgraph.algebra.solve import STARTS
from flowgraph.diagram.diagram import Coefficient, Diagram
from flowgraph.diagram.elements import Adder, Delay, Element, Gain, Input, Output, Signal, Term
from flowgraph.diagram.expression import Expression, Name, Number, Product, Quotient, Sum

NAMED = st.sampled_from(
    [
        Name("a"),
        Name("b"),
        Product((Name("a"), Name("b"))),
        Quotient(Name("a"), Sum((Number(Fraction(1)), Name("b")))),
        Number(Fraction(1, 2)),
    ]
)
COEFFICIENTS = {name: Coefficient(name) for name in ("a", "b")}


@st.composite
def slipped(draw: st.DrawFn, diagram: Diagram) -> Diagram:
    """The diagram with one element changed: a sign turned, a delay lengthened, a coefficient or content replaced."""
    name = draw(st.sampled_from(sorted(diagram.elements)))
    return replace(diagram, elements={**diagram.elements, name: draw(changed(diagram.elements[name]))})


@st.composite
def changed(draw: st.DrawFn, element: Element) -> Element:
    match element:
        case Adder(terms=terms):
            at = draw(st.integers(0, len(terms) - 1))
            turned = replace(terms[at], negative=not terms[at].negative)
            return replace(element, terms=(*terms[:at], turned, *terms[at + 1 :]))
        case Gain():
            return replace(element, coefficient=draw(NAMED))
        case Delay(length=length):
            contents = tuple(draw(DYADIC_GAIN) for _ in range(length))
            return replace(element, starts=contents)
        case Input():
            return element


def gains_made_named(diagram: Diagram, names: list[Expression]) -> Diagram:
    """Every gain line gets a named coefficient instead of its number."""
    turn = iter(names * len(diagram.elements))
    elements = {
        name: replace(element, coefficient=next(turn)) if isinstance(element, Gain) else element
        for name, element in diagram.elements.items()
    }
    return replace(diagram, elements=elements, coefficients=COEFFICIENTS)


@given(st.data())
@settings(max_examples=150)
def test_both_roads_agree_on_a_diagram_and_its_slip(data: st.DataObject) -> None:
    """Algebra and exact samples give the same answer, with named coefficients and starting contents."""
    diagram = data.draw(wired_diagrams())
    assume(diagram.elements)
    diagram = gains_made_named(diagram, data.draw(st.lists(NAMED, min_size=1, max_size=4)))
    other = data.draw(slipped(diagram))
    assert compare(diagram, other).equal == compare_by_samples(diagram, other).equal


@given(st.data())
@settings(max_examples=150)
def test_the_identity_test_agrees_with_the_exact_answer(data: st.DataObject) -> None:
    """Two random points modulo two random primes tell the same as polynomials do."""
    diagram = data.draw(wired_diagrams())
    assume(diagram.elements)
    other = data.draw(slipped(diagram))
    sources = [*(port.name for port in diagram.inputs()), STARTS]
    pairs = [(output, source) for output in diagram.outputs for source in sources]
    tested = _identity_test(DiagramBehaviour(diagram), DiagramBehaviour(other), pairs, {})
    assert tested.equal == compare(diagram, other).equal


@given(st.data())
@settings(max_examples=60)
def test_a_diagram_equals_itself_whatever_the_order_of_its_lines(data: st.DataObject) -> None:
    """The order of lines is no part of the behaviour."""
    diagram = data.draw(wired_diagrams())
    shuffled = dict(data.draw(st.permutations(list(diagram.elements.items()))))
    assert compare(diagram, replace(diagram, elements=shuffled)).equal


def all_pole_lattice(cells: int, coefficient: dict[int, Expression], names: dict[str, Coefficient]) -> Diagram:
    """f_(m-1) = f_m - k_m s_m, g_m = k_m f_(m-1) + s_m, s_(m+1) = g_m one sample ago."""
    elements: dict[str, Element] = {"x": Input("x")}
    for m in range(cells, 0, -1):
        source = Signal("x") if m == cells else Signal(f"f{m}")
        elements[f"f{m - 1}"] = Adder(f"f{m - 1}", (Term(source), Term(Signal(f"s{m}", 1), True, coefficient[m])))
    for m in range(1, cells + 1):
        elements[f"s{m}"] = Delay(f"s{m}", Signal("f0") if m == 1 else Signal(f"g{m - 1}"))
        elements[f"g{m}"] = Adder(f"g{m}", (Term(Signal(f"f{m - 1}"), False, coefficient[m]), Term(Signal(f"s{m}", 1))))
    return Diagram("lattice", elements, {"y": Output("y", Signal("f0")), "b": Output("b", Signal(f"g{cells}"))}, names)


def turned_terms(diagram: Diagram) -> Diagram:
    """The same sums written the other way round."""
    elements = {
        name: replace(element, terms=element.terms[::-1]) if isinstance(element, Adder) else element
        for name, element in diagram.elements.items()
    }
    return replace(diagram, elements=elements)


def test_a_lattice_of_twelve_cells_with_names_is_compared_exactly() -> None:
    """Polynomials with 2^12 terms are still decided without chance."""
    names = {f"k{m}": Coefficient(f"k{m}") for m in range(1, 13)}
    lattice = all_pole_lattice(12, {m: Name(f"k{m}") for m in range(1, 13)}, names)
    answer = compare(lattice, turned_terms(lattice))
    assert (answer.equal, answer.method) == (True, "exact")


def test_a_lattice_of_fifty_cells_with_names_is_compared_by_identity_test() -> None:
    """Where 2^50 terms stand in the way, two random points decide, and the bound is stated."""
    names = {f"k{m}": Coefficient(f"k{m}") for m in range(1, 51)}
    lattice = all_pole_lattice(50, {m: Name(f"k{m}") for m in range(1, 51)}, names)
    answer = compare(lattice, turned_terms(lattice))
    assert (answer.equal, answer.method) == (True, "identity test")
    assert answer.error_below >= 80


def test_a_lattice_of_fifty_cells_with_numbers_is_compared_exactly() -> None:
    """Numbers alone keep the polynomials small enough for an exact answer."""
    values: dict[int, Expression] = {m: Number(Fraction((m * 7919) % 15000 - 7000, 16384)) for m in range(1, 51)}
    lattice = all_pole_lattice(50, values, {})
    assert compare(lattice, turned_terms(lattice)).method == "exact"
    wrong = all_pole_lattice(50, {**values, 50: Number(Fraction(1, 16384))}, {})
    assert compare(lattice, wrong).differs_at == ("y", "x")


@pytest.mark.parametrize("same", [True, False])
def test_starting_contents_count(same: bool) -> None:
    """Two equal filters with different contents are different diagrams."""

    def held(value: int) -> Diagram:
        contents = (Number(Fraction(value)),)
        elements: dict[str, Element] = {
            "x": Input("x"),
            "y": Adder("y", (Term(Signal("x")), Term(Signal("y1", 1), False, Number(Fraction(1, 2))))),
            "y1": Delay("y1", Signal("y"), 1, contents),
        }
        return Diagram("held", elements, {"y": Output("y", Signal("y"))})

    answer = compare(held(1), held(1 if same else 2))
    assert answer.equal == same
    assert same or answer.differs_at == ("y", STARTS)
