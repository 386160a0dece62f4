"""Random diagrams, exact in doubles by default: feedback, cell swaps, self-holding cells, long lines."""

from __future__ import annotations

from fractions import Fraction

from exact_values import exact_values
from hypothesis import strategies as st

from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.elements import Adder, Delay, Element, Gain, Input, Output, Signal, Term
from flowgraph.diagram.expression import Expression, Number
from flowgraph.diagram.simulate import simulate

DYADIC_GAIN = st.sampled_from([Number(Fraction(text)) for text in ("1/2", "-1/2", "1", "-1", "2", "-2")])
SAMPLES = 12

ANY_GAIN = st.fractions(-2, 2).map(Number)


@st.composite
def wired_diagrams(draw: st.DrawFn, gains: st.SearchStrategy[Number] = DYADIC_GAIN) -> Diagram:
    """Any wiring without a delay-free loop; delays read anything, themselves included."""
    inputs = [Input(f"x{k}") for k in range(draw(st.integers(0, 2)))]
    lengths = draw(st.lists(st.integers(1, 5), min_size=0 if inputs else 1, max_size=5))
    taps = [Signal(f"d{k}", tap) for k, length in enumerate(lengths) for tap in range(1, length + 1)]
    ready = [Signal(port.name) for port in inputs] + taps
    computed: list[Element] = []
    for k in range(draw(st.integers(0, 5))):
        computed.append(draw(computations(f"s{k}", ready, gains)))
        ready.append(Signal(f"s{k}"))
    delays = [
        Delay(f"d{k}", draw(st.sampled_from(ready)), length, draw(starting_contents(length)))
        for k, length in enumerate(lengths)
    ]
    elements = draw(st.permutations([*inputs, *computed, *delays]))
    shown = draw(st.lists(st.sampled_from(ready), min_size=1, max_size=3))
    return Diagram(
        "made",
        {element.name: element for element in elements},
        {f"y{k}": Output(f"y{k}", signal) for k, signal in enumerate(shown)},
    )


@st.composite
def computations(draw: st.DrawFn, name: str, ready: list[Signal], gains: st.SearchStrategy[Number]) -> Element:
    """A gain or an adder over signals that are there already, none twice in one adder."""
    if len(ready) == 1 or draw(st.integers(0, 3)) == 0:
        return Gain(name, draw(gains), draw(st.sampled_from(ready)))
    read = draw(st.lists(st.sampled_from(ready), min_size=2, max_size=4, unique=True))
    factor = st.none() | gains
    return Adder(name, tuple(Term(signal, draw(st.booleans()), draw(factor)) for signal in read))


def starting_contents(length: int) -> st.SearchStrategy[tuple[Expression, ...]]:
    """All zero, or a small whole number in every cell."""
    held = st.integers(-3, 3).map(lambda value: Number(Fraction(value)))
    return st.just(()) | st.tuples(*[held] * length)


def small_samples() -> st.SearchStrategy[list[Fraction]]:
    """A dozen multiples of 1/4."""
    return st.lists(st.integers(-16, 16).map(lambda value: Fraction(value, 4)), min_size=SAMPLES, max_size=SAMPLES)


def exact_outputs(diagram: Diagram, inputs: dict[str, list[Fraction]]) -> dict[str, list[Fraction]]:
    """What the oracle says for as many of the dozen samples as all signals fit into 44 bits.

    Adders have at most four terms and gains move the point by one bit, so up to there every
    product and every partial sum is exact in a double too.
    """
    inner = {f"inner {name}": Signal(name, isinstance(element, Delay)) for name, element in diagram.elements.items()}
    told = simulate(diagram, exact_values(diagram), inputs, SAMPLES, Fraction(0), inner)
    fitting = 0
    while fitting < SAMPLES and all(_fits(values[fitting]) for values in told.values()):
        fitting += 1
    return {name: told[name][:fitting] for name in diagram.outputs}


def _fits(value: Fraction) -> bool:
    return abs(value.numerator) < 2**22 * value.denominator and value.denominator <= 2**22
