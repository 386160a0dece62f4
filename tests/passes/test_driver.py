"""The driver trusts no pass: whatever one gets wrong is named, with both diagrams."""

from dataclasses import replace
from fractions import Fraction

import pytest
from drawn import diagram_of

from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.elements import Adder, Delay, Gain, Signal, Term, redirected
from flowgraph.diagram.expression import Number
from flowgraph.passes.change import Change
from flowgraph.passes.reduce import BrokenPassError, Pass, reduce_diagram, take_step

TWICE = diagram_of("""
    coef   r
    input  x
    output y
    delay  x1 = x starts 1
    delay  u1 = x starts 2
    adder  s = x + r*s1
    delay  s1 = s
    adder  t = x + r*t1
    delay  t1 = t starts 3
    adder  y = x1 + u1 + s + t
""")

TWO = Number(Fraction(2))


def without(name: str, moved: dict[Signal, Signal] | None = None) -> Pass:
    """A pass that leaves one element out and lets its readers read another."""
    leads = moved or {}

    def broken(diagram: Diagram) -> Change:
        kept = {other: redirected(element, leads) for other, element in diagram.elements.items() if other != name}
        return Change(replace(diagram, elements=kept), "left out", leads)

    return broken


def put(element: Adder | Gain | Delay, *gone: str) -> Pass:
    """A pass that puts an element in place of the one of its name, and leaves others out."""

    def broken(diagram: Diagram) -> Change:
        kept = {name: old for name, old in diagram.elements.items() if name not in gone}
        return Change(replace(diagram, elements={**kept, element.name: element}), "put")

    return broken


def reason(wrong: Pass) -> str:
    """What the driver says of a pass, without its name."""
    with pytest.raises(BrokenPassError) as raised:
        take_step(wrong, TWICE)
    assert raised.value.name == "broken"
    assert raised.value.before is TWICE
    assert raised.value.after is not TWICE
    return raised.value.reason


def test_a_signal_that_is_gone() -> None:
    """An element that is still read may not go."""
    assert reason(without("x1")) == "y reads x1, which is not there"


def test_a_loop_without_a_delay() -> None:
    """A pass may not close a loop that no delay opens."""
    wrong = put(Adder("s", (Term(Signal("x")), Term(Signal("y")))), "s1")
    assert reason(wrong) == "a loop without a delay: s, y"


def test_an_adder_with_a_signal_twice() -> None:
    """The rules of the language hold for what passes make."""
    wrong = put(Adder("y", (Term(Signal("x")), Term(Signal("x")))))
    assert reason(wrong) == "the adder y has one input, or one signal twice"


def test_a_cost_that_does_not_fall() -> None:
    """A step that saves nothing is refused, so that rewriting ends."""
    wrong = put(Delay("spare", Signal("x")))
    assert reason(wrong) == "the cost did not fall: (4, 2, 5, 8) to (5, 2, 5, 9)"


def test_loops_with_other_contents() -> None:
    """Two loops that differ in a starting content alone are told apart."""

    def broken(diagram: Diagram) -> Change:
        kept = {name: element for name, element in diagram.elements.items() if name not in ("t", "t1")}
        terms = (Term(Signal("x1", 1)), Term(Signal("u1", 1)), Term(Signal("s"), False, TWO))
        kept["y"] = Adder("y", terms)
        return Change(
            replace(diagram, elements=kept), "merged", {Signal("t"): Signal("s"), Signal("t1", 1): Signal("s1", 1)}
        )

    assert reason(broken) == "behaviour is not proved unchanged: cell 1 of t1 starts with another content"


def test_a_region_that_changed() -> None:
    """A region is compared as a diagram, and its elements are named."""
    wrong = put(Gain("y", TWO, Signal("x")), "x1", "u1", "s", "s1", "t", "t1")

    def broken(diagram: Diagram) -> Change:
        change = wrong(diagram)
        assert change is not None
        return replace(change, regions=(frozenset(diagram.elements) - {"x"},))

    assert reason(broken) == (
        "behaviour is not proved unchanged: the outputs of the region s, s1, t, t1, u1, x1, y changed"
    )


def test_a_change_outside_its_regions() -> None:
    """Every changed element must stand in a region."""
    wrong = put(Gain("y", TWO, Signal("x")), "x1", "u1", "s", "s1", "t", "t1")

    def broken(diagram: Diagram) -> Change:
        change = wrong(diagram)
        assert change is not None
        return replace(change, regions=(frozenset({"y"}),))

    assert reason(broken) == "behaviour is not proved unchanged: x1 changed and stands in 0 regions"


def test_a_signal_that_becomes_nothing() -> None:
    """A signal may only become one that is there."""

    def broken(diagram: Diagram) -> Change:
        change = put(Gain("y", TWO, Signal("x")), "x1", "u1", "s", "s1", "t", "t1")(diagram)
        assert change is not None
        return replace(change, moved={Signal("s"): Signal("q")})

    assert reason(broken) == "behaviour is not proved unchanged: s became q, which is not there"


def test_a_diagram_with_a_loop_without_a_delay() -> None:
    """Nothing can be proved of a diagram that cannot be computed, so it is refused."""
    loop = replace(TWICE, elements={**TWICE.elements, "s": Adder("s", (Term(Signal("x")), Term(Signal("y"))))})
    with pytest.raises(ValueError, match=r"^a loop without a delay: s, y$"):
        reduce_diagram(loop)
