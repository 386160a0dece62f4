"""The emitted Python class: the float rule bit for bit, safe names, any size."""

from __future__ import annotations

import math
import struct
import subprocess
import sys
from collections.abc import Callable
from fractions import Fraction
from pathlib import Path
from random import Random
from typing import Protocol, cast

import numpy as np
import pytest
import scipy.signal
from exact_values import exact_values
from hypothesis import given
from hypothesis import strategies as st
from random_diagrams import ANY_GAIN, SAMPLES, exact_outputs, small_samples, wired_diagrams

from flowgraph.diagram.diagram import Coefficient, Diagram
from flowgraph.diagram.elements import Adder, Delay, Element, Gain, Input, Output, Signal, Term
from flowgraph.diagram.expression import Expression, Name, Negative, Number
from flowgraph.diagram.simulate import simulate
from flowgraph.emit.print_python import print_python, python_class_name
from flowgraph.schedule.schedule import schedule
from flowgraph.source.diagnostic import Refused


class Computer(Protocol):
    """An object of an emitted class."""

    def step(self, *samples: float) -> float | tuple[float, ...]: ...
    def process(self, *columns: list[float] | int) -> list[float] | tuple[list[float], ...]: ...
    def reset(self) -> None: ...


def computer(diagram: Diagram) -> Computer:
    """An object of the class that is printed for a diagram."""
    space: dict[str, object] = {}
    exec(compile(print_python(diagram, schedule(diagram)), "emitted", "exec"), space)
    return cast(Callable[[], Computer], space[python_class_name(diagram)])()


def made(*elements: Element, outputs: dict[str, Signal], name: str = "made", **coefficients: Expression) -> Diagram:
    return Diagram(
        name,
        {element.name: element for element in elements},
        {port: Output(port, signal) for port, signal in outputs.items()},
        {given: Coefficient(given, value) for given, value in coefficients.items()},
    )


def number(value: float | str) -> Number:
    return Number(Fraction(value))


def term(signal: str, factor: Expression | None = None, negative: bool = False, tap: int = 0) -> Term:
    return Term(Signal(signal, tap), negative, factor)


def bits(values: list[float]) -> list[bytes]:
    return [struct.pack("<d", value) for value in values]


def columns(result: object) -> list[list[float]]:
    """The results of `process` as a list of columns also where there is one."""
    return list(result) if isinstance(result, tuple) else [cast(list[float], result)]


@given(wired_diagrams(), st.data())
def test_the_class_equals_the_exact_simulator_where_doubles_are_exact(diagram: Diagram, data: st.DataObject) -> None:
    """By samples, as a recording, and as a recording in two pieces."""
    inputs = {port.name: data.draw(small_samples()) for port in diagram.inputs()}
    exact = list(exact_outputs(diagram, inputs).values())
    fitting = len(exact[0])
    floats = [[float(value) for value in column] for column in inputs.values()]
    made_class = computer(diagram)
    whole = columns(made_class.process(*(floats or [SAMPLES])))
    assert [column[:fitting] for column in whole] == exact
    made_class.reset()
    cut = data.draw(st.integers(0, SAMPLES))
    first = columns(made_class.process(*([column[:cut] for column in floats] or [cut])))
    second = columns(made_class.process(*([column[cut:] for column in floats] or [SAMPLES - cut])))
    assert [bits(a + b) for a, b in zip(first, second, strict=True)] == [bits(column) for column in whole]
    made_class.reset()
    single = [made_class.step(*(column[n] for column in floats)) for n in range(SAMPLES)]
    rows = [value if isinstance(value, tuple) else (value,) for value in single]
    assert [bits(list(column)) for column in zip(*rows, strict=True)] == [bits(column) for column in whole]


@given(wired_diagrams(ANY_GAIN), st.data())
def test_the_class_rounds_as_the_float_rule_says(diagram: Diagram, data: st.DataObject) -> None:
    """The simulator over doubles rounds each product, then adds from left to right; the class does the same."""
    double = exact_values(diagram)
    samples = st.lists(st.floats(-1e3, 1e3), min_size=SAMPLES, max_size=SAMPLES)
    inputs = {port.name: data.draw(samples) for port in diagram.inputs()}
    expected = simulate(diagram, lambda expression: float(double(expression)), inputs, SAMPLES, 0.0)
    assert columns(computer(diagram).process(*(inputs.values() or [SAMPLES]))) == list(expected.values())


def transposed_section(b: list[float], a: list[float]) -> Diagram:
    """Transposed form II: y = b0*x + s1, s1' = b1*x - a1*y + s2, s2' = b2*x - a2*y, in the order lfilter adds."""
    return made(
        Input("x"),
        Adder("y", (term("z1", tap=1), term("x", number(b[0])))),
        Adder("v1", (term("z2", tap=1), term("x", number(b[1])), term("y", number(a[1]), True))),
        Adder("v2", (term("x", number(b[2])), term("y", number(a[2]), True))),
        Delay("z1", Signal("v1")),
        Delay("z2", Signal("v2")),
        outputs={"y": Signal("y")},
    )


def stable_section(random: Random) -> tuple[list[float], list[float]]:
    """Random zeros and a random pole pair inside the unit circle."""
    radius, angle = random.uniform(0.1, 0.99), random.uniform(0, math.pi)
    return [random.uniform(-2, 2) for _ in range(3)], [1.0, -2 * radius * math.cos(angle), radius * radius]


@pytest.mark.parametrize("seed", range(20))
def test_transposed_form_equals_lfilter_bit_for_bit(seed: int) -> None:
    """scipy.signal.lfilter computes transposed direct form II in this very order of operations."""
    random = Random(seed)
    b, a = stable_section(random)
    x = [random.gauss(0, 1) for _ in range(300)]
    ours = columns(computer(transposed_section(b, a)).process(x))[0]
    assert bits(ours) == bits(scipy.signal.lfilter(b, a, x).tolist())


@pytest.mark.parametrize("seed", range(10))
def test_direct_form_agrees_with_lfilter_closely(seed: int) -> None:
    """Another order of operations differs by roundings only: 1e-12 of the largest sample."""
    random = Random(seed)
    b, a = stable_section(random)
    section = made(
        Input("x"),
        Delay("past", Signal("x"), 2),
        Delay("back", Signal("y"), 2),
        Adder(
            "y",
            (
                term("x", number(b[0])),
                term("past", number(b[1]), tap=1),
                term("past", number(b[2]), tap=2),
                term("back", number(a[1]), True, 1),
                term("back", number(a[2]), True, 2),
            ),
        ),
        outputs={"y": Signal("y")},
    )
    x = [random.gauss(0, 1) for _ in range(300)]
    expected = scipy.signal.lfilter(b, a, x)
    ours = np.array(columns(computer(section).process(x))[0])
    assert np.max(np.abs(ours - expected)) <= 1e-12 * np.max(np.abs(expected))


def test_a_cascade_of_transposed_sections_equals_sosfilt_bit_for_bit() -> None:
    """scipy.signal.sosfilt runs its sections in transposed direct form II, one sample through all of them."""
    sos = scipy.signal.butter(6, 0.2, output="sos")
    elements: list[Element] = [Input("x")]
    source = "x"
    for k, (b0, b1, b2, _, a1, a2) in enumerate(sos.tolist()):
        y, v1, v2, z1, z2 = (f"{name}[{k}]" for name in ("y", "v1", "v2", "z1", "z2"))
        elements += [
            Adder(y, (term(source, number(b0)), term(z1, tap=1))),
            Adder(v1, (term(source, number(b1)), term(y, number(a1), True), term(z2, tap=1))),
            Adder(v2, (term(source, number(b2)), term(y, number(a2), True))),
            Delay(z1, Signal(v1)),
            Delay(z2, Signal(v2)),
        ]
        source = y
    x = np.random.default_rng(1).normal(size=400)
    ours = columns(computer(made(*elements, outputs={"out": Signal(source)})).process(x.tolist()))[0]
    assert bits(ours) == bits(scipy.signal.sosfilt(sos, x).tolist())


def test_products_are_rounded_before_the_sum_and_terms_go_from_left_to_right() -> None:
    """IEEE 754 without a fused multiply-add: 0.1*3 - 0.3 is 2^-54, and 1e16 + 1 - 1e16 is 0 in this order."""
    diagram = made(
        Input("a"),
        Input("b"),
        Adder("p", (term("a", number("0.1")), term("b", negative=True))),
        Gain("big", number("1e16"), Signal("a")),
        Gain("same", number("1e16"), Signal("a")),
        Adder("q", (term("big"), term("a"), term("same", negative=True))),
        outputs={"p": Signal("p"), "q": Signal("q")},
    )
    assert computer(diagram).step(3.0, 0.3) == (0.1 * 3.0 - 0.3, 3e16 + 3.0 - 3e16)
    assert 0.1 * 3.0 - 0.3 != 0.0
    assert 3e16 + 3.0 - 3e16 == 4.0


def test_a_leading_minus_negates_its_term() -> None:
    """-a*y is -(a*y), down to the sign of zero."""
    diagram = made(
        Input("x"),
        Input("u"),
        Adder("y", (term("x", number("0.5"), True), term("u", negative=True))),
        Adder("v", (term("x", number("-0.5"), True), term("u"))),
        Gain("g", number("-3"), Signal("x")),
        outputs={"y": Signal("y"), "v": Signal("v"), "g": Signal("g")},
    )
    result = computer(diagram).step(0.0, 0.0)
    assert isinstance(result, tuple)
    assert [math.copysign(1, value) for value in result] == [-1.0, 1.0, -1.0]


def test_a_coefficient_is_the_whole_expression_rounded_once() -> None:
    """0.1 + 0.2 - 0.3 is exactly 0, and 1/3 of 3 is exactly 1, in front of a signal."""
    exact_zero = made(
        Input("x"),
        Gain("y", Name("c"), Signal("x")),
        outputs={"y": Signal("y")},
        c=Name("d"),
        d=Negative(Number(Fraction("0.1") + Fraction("0.2") - Fraction("0.30000000000000001"))),
    )
    assert computer(exact_zero).step(1.0) == 1e-17


def test_integers_are_taken_as_doubles() -> None:
    """A caller's whole number does not carry Python's unlimited integers into the diagram."""
    diagram = made(
        Input("x"), Delay("d", Signal("y")), Adder("y", (term("x"), term("d", tap=1))), outputs={"y": Signal("y")}
    )
    summing = computer(diagram)
    assert [summing.step(2**53), summing.step(1)] == [2.0**53, 2.0**53]
    assert columns(computer(diagram).process([2**53, 1]))[0] == [2.0**53, 2.0**53]


def test_names_of_any_kind_are_safe_and_never_meet() -> None:
    """Keywords, the class's own words, dots and brackets, leading underscores, and names that would coincide."""
    awkward = ["lambda", "self", "step", "process", "float", "low.w1", "low_w1", "f[3]", "f_3", "__init__", "_", "y"]
    elements: list[Element] = [Input("None")]
    source = "None"
    for name in awkward:
        elements.append(Gain(name, number("2"), Signal(source)))
        elements.append(Delay(f"{name}[1]", Signal(name), 1 + len(name) % 2))
        source = name
    diagram = made(*elements, outputs={"y": Signal("y"), "y at": Signal("self[1]", 1)}, name="True")
    assert computer(diagram).step(1.0) == (2.0 ** len(awkward), 0.0)
    assert columns(computer(diagram).process([1.0, 1.0]))[1] == [0.0, 4.0]


def test_the_title_stays_inside_its_comment() -> None:
    """Line ends and control characters of a title never become program text."""
    diagram = made(Input("x"), Gain("y", number("2"), Signal("x")), outputs={"y": Signal("y")})
    titled = Diagram("made", diagram.elements, diagram.outputs, title="a\nraise SystemExit\r\x0c\x00#", version="1\n2")
    assert computer(titled).step(1.0) == 2.0


def test_a_long_adder_and_a_diagram_of_many_elements_are_digested() -> None:
    """30 000 terms in one adder and 6 000 elements in a row: several statements, several methods."""
    taps = tuple(term("line", number(k % 3), k % 2 == 1, k) for k in range(1, 30_001))
    wide = made(Input("x"), Delay("line", Signal("x"), 30_000), Adder("y", taps), outputs={"y": Signal("y")})
    assert columns(computer(wide).process([1.0, 0.0, 0.0, 0.0]))[0] == [0.0, -1.0, 2.0, 0.0]
    chain: list[Element] = [Input("x"), Delay("back", Signal("g2999"), 1, (number("0.5"),))]
    for k in range(3000):
        chain.append(Gain(f"g{k}", number(-1), Signal(f"g{k - 1}" if k else "x")))
        chain.append(Delay(f"d{k}", Signal(f"d{k - 1}" if k else "x", int(k > 0)), 1, (number(k),)))
    long = made(*chain, outputs={"y": Signal("g2999"), "late": Signal("d2999", 1), "back": Signal("back", 1)})
    many = computer(long)
    assert columns(many.process([7.0, 8.0, 9.0])) == [[7.0, 8.0, 9.0], [2999.0, 2998.0, 2997.0], [0.5, 7.0, 8.0]]
    many.reset()
    assert many.step(7.0) == (7.0, 2999.0, 0.5)


def test_inputs_of_unequal_length_move_no_cell() -> None:
    """A recording that is refused leaves the object as it was."""
    diagram = made(
        Input("x"),
        Input("u"),
        Adder("y", (term("x"), term("u"), term("d", tap=1))),
        Delay("d", Signal("y")),
        outputs={"y": Signal("y")},
    )
    adding = computer(diagram)
    with pytest.raises(ValueError, match="shorter"):
        adding.process([1.0, 2.0], [1.0])
    assert adding.step(0.0, 0.0) == 0.0


def test_an_open_coefficient_is_refused_with_the_mend() -> None:
    """Nothing is printed that would compute with a value nobody gave."""
    diagram = Diagram(
        "made",
        {"x": Input("x"), "y": Gain("y", Name("b0"), Signal("x"))},
        {"y": Output("y", Signal("y"))},
        {"b0": Coefficient("b0")},
    )
    with pytest.raises(Refused, match="the coefficient b0 is open") as caught:
        print_python(diagram, schedule(diagram))
    assert caught.value.diagnostics[0].help == "give it a value: `coef b0 = 0.5` in the file, or --with b0=0.5"


def test_a_coefficient_too_large_for_a_double_is_refused() -> None:
    """10^400 is no infinity in disguise."""
    diagram = made(Input("x"), Gain("y", number(10**400), Signal("x")), outputs={"y": Signal("y")})
    with pytest.raises(Refused, match="lies outside the range of doubles"):
        print_python(diagram, schedule(diagram))


def test_the_text_is_the_same_every_time_and_runs_alone(tmp_path: Path) -> None:
    """Same bytes from two runs, and the file needs nothing but Python."""
    diagram = transposed_section([0.25, 0.5, 0.25], [1.0, -0.5, 0.25])
    text = print_python(diagram, schedule(diagram))
    assert text == print_python(diagram, schedule(diagram))
    script = tmp_path / "section.py"
    script.write_text(text + "\nprint(Made().process([1.0, 0.0]))\n", encoding="utf-8")
    told = subprocess.run([sys.executable, "-I", "-S", str(script)], capture_output=True, text=True, check=True)
    assert told.stdout == "[0.25, 0.625]\n"


def test_the_printed_class_reads_as_expected() -> None:
    """The whole text of a leaky integrator, to the letter."""
    diagram = Diagram(
        "leaky_level",
        {
            "level": Input("level"),
            "mean1": Delay("mean1", Signal("mean")),
            "mean": Adder("mean", (term("level", number("0.05")), term("mean1", number("0.95"), tap=1))),
        },
        {"mean": Output("mean", Signal("mean"))},
        title="Smoothed water level",
        rate=Fraction(10),
    )
    assert print_python(diagram, schedule(diagram)) == (
        "# leaky_level: Smoothed water level\n"
        "#\n"
        "# Double precision; every product and every sum is rounded once, in the order of the diagram.\n"
        "#\n"
        "# The tool that printed this is an aid for a qualified engineer and no certified tool. Where the result\n"
        "# can hurt someone (hearing, motion, medical or vehicle functions), the applicable functional-safety\n"
        "# standard, local code and licensed practice decide. Try audio at low level first, drives without load.\n"
        "\n"
        "\n"
        "class LeakyLevel:\n"
        "    inputs = ('level',)\n"
        "    outputs = ('mean',)\n"
        "    rate = 10.0  # samples a second\n"
        "\n"
        "    def __init__(self):\n"
        "        self.reset()\n"
        "\n"
        "    def reset(self):\n"
        '        """Puts the starting contents into the cells."""\n'
        "        self.mean1 = 0.0\n"
        "\n"
        "    def step(self, level):\n"
        '        """Computes one sample: mean."""\n'
        "        level = float(level)\n"
        "        mean = 0.05 * level + 0.95 * self.mean1\n"
        "        self.mean1 = mean\n"
        "        return mean\n"
        "\n"
        "    def process(self, level):\n"
        '        """Computes a recording, one list a port; goes on where the last call ended: mean."""\n'
        "        samples = list(map(float, level))\n"
        "        mean1 = self.mean1\n"
        "        mean_samples = []\n"
        "        for level in samples:\n"
        "            mean = 0.05 * level + 0.95 * mean1\n"
        "            mean1 = mean\n"
        "            mean_samples.append(mean)\n"
        "        self.mean1 = mean1\n"
        "        return mean_samples\n"
    )
