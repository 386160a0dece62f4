"""Hidden modes and least order: known structures, and random ones against the rank of a Hankel matrix in numpy."""

from __future__ import annotations

from fractions import Fraction
from random import Random

import numpy
import pytest
from exact_values import exact_values
from random_sections import Factor, Section, direct_one, direct_two, transposed
from read_diagram import read_diagram

from flowgraph.claims.analysis import Analysis, analyse
from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.simulate import simulate
from flowgraph.text.load import load_text


def analysed(*lines: str) -> Analysis:
    return analyse(read_diagram("\n".join(["diagram d {", *lines, "}"])))


def hidden(found: Analysis) -> list[tuple[str, int, str, list[str]]]:
    """Factor in z, how often, why, and the cells it lives in."""
    return [
        (str(mode.factor), mode.multiplicity, mode.why, [f"{name}[{at}]" for name, at in mode.cells])
        for mode in found.hidden
    ]


def hankel_rank(diagram: Diagram) -> int:
    """The least order (Ho and Kalman 1966, from memory): the rank of [h(i + j + 1)], one block row an
    output, one block column an input or the pulse that the starting contents are."""
    cells = sum(delay.length for delay in diagram.delays())
    value = exact_values(diagram)

    def run(pulse: dict[str, list[Fraction]]) -> list[list[Fraction]]:
        return list(simulate(diagram, value, pulse, 2 * cells + 1, Fraction(0)).values())

    rest = run({})  # what the starting contents alone do; taken off, since everything is linear
    columns = [[[*line[:-1]] for line in rest]]  # an impulse one sample early: y(0), y(1) ..
    for port in diagram.inputs():
        driven = run({port.name: [Fraction(1)]})
        columns.append([[a - b for a, b in zip(x, y, strict=True)][1:] for x, y in zip(driven, rest, strict=True)])
    rows = [
        [float(column[output][i + j]) for column in columns for j in range(cells)]
        for output in range(len(diagram.outputs))
        for i in range(cells)
    ]
    return int(numpy.linalg.matrix_rank(numpy.array(rows), tol=1e-9)) if cells else 0


PAIR = ["input x", "output y", "adder v = x + 1/2*v1", "delay v1 = v", "adder w = x + 1/2*w1", "delay w1 = w"]


def test_two_equal_sections_side_by_side() -> None:
    """Their sum is moved and shown; their difference no input moves."""
    found = analysed(*PAIR, "adder y = v + w")
    assert (found.cells, found.order) == (2, 1)
    assert hidden(found) == [("2*x + (-1)", 1, "no input moves it", ["v1[1]", "w1[1]"])]


def test_two_equal_sections_that_cancel() -> None:
    """Their difference is never moved and their sum never shown: nothing is left."""
    found = analysed(*PAIR, "adder y = v - w")
    assert found.order == 0
    assert [mode[1:3] for mode in hidden(found)] == [(1, "no input moves it"), (1, "no output shows it")]


def test_two_sections_that_differ_hide_nothing() -> None:
    """Side by side, with poles of their own."""
    found = analysed(*PAIR[:-2], "adder w = x + 1/4*w1", PAIR[-1], "adder y = v + w")
    assert (found.order, hidden(found)) == (2, [])


def pole(source: str) -> list[str]:
    return [f"adder p = {source} + 3/4*p1", "delay p1 = p"]


def zero(source: str) -> list[str]:
    return [f"delay q1 = {source}", f"adder q = {source} - 3/4*q1"]


def test_a_pole_before_the_zero_that_cancels_it_is_not_shown() -> None:
    """The input moves it, but the zero stops it on its way out."""
    found = analysed("input x", "output y = q", *pole("x"), *zero("p"))
    assert found.order == 0
    reasons = {mode[2] for mode in hidden(found) if mode[0] == "4*x + (-3)"}
    assert reasons == {"no output shows it"}


def test_a_pole_behind_the_zero_that_cancels_it_is_not_moved() -> None:
    """The zero keeps the input away from it."""
    found = analysed("input x", "output y = p", *zero("x"), *pole("q"))
    assert found.order == 0
    reasons = {mode[2] for mode in hidden(found) if mode[0] == "4*x + (-3)"}
    assert reasons == {"no input moves it"}


@pytest.mark.parametrize("length", [4, 8, 30])
def test_the_recursive_moving_average(length: int) -> None:
    """y[n] = y[n-1] + x[n] - x[n-M]: M + 1 cells do the work of M - 1; the integrator at z = 1 is hidden."""
    sum_line = f"adder y = y1 + 1/{length}*x - 1/{length}*old[end]"
    found = analysed("input x", "output y", f"delay old = x by {length}", sum_line, "delay y1 = y")
    assert (found.cells, found.order) == (length + 1, length - 1)
    assert found.stability == "marginal"
    assert ("x + (-1)", "no input moves it") in [(mode[0], mode[2]) for mode in hidden(found)]


@pytest.mark.parametrize(("length", "stages"), [(2, 1), (4, 2), (3, 3)])
def test_combs_and_integrators(length: int, stages: int) -> None:
    """(1 - w^M)^N / (1 - w)^N has order N (M - 1); integrators first are moved but their modes not shown."""
    lines, source = ["input x"], "x"
    for k in range(stages):
        lines += [f"adder i{k} = {source} + i{k}z", f"delay i{k}z = i{k}"]
        source = f"i{k}"
    for k in range(stages):
        lines += [f"delay c{k}z = {source} by {length}", f"adder c{k} = {source} - c{k}z[end]"]
        source = f"c{k}"
    found = analysed(*lines, f"output y = {source}")
    assert (found.cells, found.order) == (stages * (length + 1), stages * (length - 1))
    at_one = [mode for mode in hidden(found) if mode[0] == "x + (-1)"]
    assert [mode[1:3] for mode in at_one] == [(stages, "no output shows it")]


OSCILLATOR = ["output y", "adder y = 3/2*y1 - y2", "delay y1, y2 = y"]


def test_an_oscillator_is_moved_by_its_starting_contents() -> None:
    """They are an impulse before the first sample, so its mode is not hidden."""
    found = analysed(*OSCILLATOR[:-1], OSCILLATOR[-1] + " starts 1, 0")
    assert (found.order, hidden(found), found.stability) == (2, [], "marginal")


def test_an_oscillator_that_nothing_starts_has_a_hidden_mode() -> None:
    """Two cells that hold 0 for ever do the work of none."""
    found = analysed("input x", "output s", "adder s = x + y", *OSCILLATOR[1:])
    assert found.order == 0
    assert hidden(found) == [("2*x^2 + (-3)*x + 2", 1, "no input moves it", ["y1[1]", "y2[1]"])]


def test_direct_form_one_has_redundant_cells_at_z_equal_0() -> None:
    """Four cells for order 2: what is hidden is at the origin, and stops by itself."""
    section = Section(tuple(Factor(Fraction(k, 4)) for k in (1, 3, -2)), tuple(Factor(Fraction(k, 8)) for k in (-5, 3)))
    found = analysed("input x", "output y", *direct_one(section, "x", "y"))
    assert (found.cells, found.order) == (4, 2)
    assert {mode[0] for mode in hidden(found)} == {"x"}
    assert sum(mode[1] for mode in hidden(found)) == 2


def test_several_inputs_and_outputs_count_together() -> None:
    """A mode is hidden only if no input moves it, or no output shows it."""
    lines = ["input a, b", "adder s = a + b", "adder p = s + 1/2*p1", "delay p1 = p"]
    lines += ["adder q = b - 1/2*q1", "delay q1 = q"]
    assert analysed(*lines, "output u = p", "output v = q").order == 2
    both = analysed(*lines, "adder r = q - q1", "adder t = p + r", "output u = t", "output v = p")
    assert (both.order, hidden(both)) == (2, [])


def test_open_coefficients_hide_what_is_hidden_for_every_value() -> None:
    """The moving mode of two sections with one open pole is hidden whatever that pole is."""
    lines = [line.replace("1/2", "a") for line in PAIR]
    assert analysed("coef a", *lines, "adder y = v + w").order == 1
    different = [line.replace("a*w1", "b*w1") for line in lines]
    assert analysed("coef a, b", *different, "adder y = v + w").order == 2


@pytest.mark.parametrize("seed", range(80))
def test_the_least_order_is_the_rank_of_the_hankel_matrix(seed: int) -> None:
    """Random small networks of sections with quarter values, one or two inputs and outputs, with contents."""
    random = Random(seed)

    def factors(low: int, high: int) -> tuple[Factor, ...]:
        return tuple(Factor(Fraction(random.choice([-2, -1, 1, 2]), 4)) for _ in range(random.randint(low, high)))

    inputs = [f"x{k}" for k in range(random.randint(1, 2))]
    lines = [f"input {', '.join(inputs)}"]
    ready = list(inputs)
    for k in range(random.randint(1, 3)):
        section = Section(factors(1, 2), factors(0, 2))
        if random.random() < 0.3:
            held = [tuple(random.randint(-1, 1) for _ in side) for side in (section.b[1:], section.a)]
            section = Section(section.b, section.a, *held)
        shape = direct_one if section.past_y or section.past_x else random.choice([direct_one, direct_two, transposed])
        lines += shape(section, random.choice(ready), f"s{k}")
        ready.append(f"s{k}")
    for k in range(random.randint(1, 2)):
        read = random.sample(ready, min(len(ready), 2))
        lines += [f"adder y{k} = {' + '.join(f'{random.choice([1, 2])}/4*{name}' for name in read)}", f"output y{k}"]
    # not read_diagram: a section that nobody reads is a finding, but no hindrance here
    diagram = load_text("\n".join(["diagram d {", *lines, "}"])).diagrams[-1]
    assert analyse(diagram).order == hankel_rank(diagram)
