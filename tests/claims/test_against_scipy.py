"""Responses, poles, zeros, state matrices and gains of random structures, held against scipy.signal."""

from __future__ import annotations

from collections.abc import Callable
from fractions import Fraction
from math import pi
from random import Random

import numpy
import pytest
from exact_values import exact_values
from random_sections import Factor, Section, direct_one, direct_two, transposed
from read_diagram import read_diagram
from scipy import signal

from flowgraph.algebra.states import state_matrices
from flowgraph.algebra.transfer import NumberTransfer
from flowgraph.claims.analysis import Root, analyse, zeros
from flowgraph.claims.verify import verify
from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.expression import Expression
from flowgraph.diagram.simulate import simulate

SEEDS = range(12)
RATE = 48_000


def stable_section(random: Random) -> Section:
    """A second-order section with rational coefficients and all poles inside the circle of radius 0.95."""
    b = [Fraction(random.choice([-1, 1]) * random.randint(1, 200), 100) for _ in range(3)]
    if random.random() < 0.5:
        radius, c = Fraction(random.randint(10, 95), 100), Fraction(random.randint(-9, 9) or 1, 10)
        a = [-2 * radius * c, radius**2]
    else:
        p, q = (Fraction(random.choice([-1, 1]) * random.randint(10, 90), 100) for _ in range(2))
        a = [-(p + q) or Fraction(1, 1000), p * q]
    return Section(tuple(map(Factor, b)), tuple(map(Factor, a)))


def row(section: Section) -> list[float]:
    """The section as scipy writes it: b0 b1 b2 1 a1 a2."""
    return [*(float(f.number) for f in section.b), 1.0, *(float(f.number) for f in section.a)]


def drawn(*lines: str) -> Diagram:
    return read_diagram("\n".join(["diagram d {", "rate 48 kHz", "input x", "output y", *lines, "}"]))


def impulse_response(diagram: Diagram, samples: int) -> list[float]:
    pulse = {"x": [Fraction(1)]}
    return [float(value) for value in simulate(diagram, exact_values(diagram), pulse, samples, Fraction(0))["y"]]


def pulse(samples: int) -> numpy.ndarray:
    return numpy.eye(1, samples)[0]


Shape = Callable[[Section, str, str], list[str]]
Made = Callable[[Random, int], tuple[list[Section], list[str]]]
SHAPES: list[Shape] = [direct_one, direct_two, transposed]


def cascade(random: Random, count: int) -> tuple[list[Section], list[str]]:
    sections = [stable_section(random) for _ in range(count)]
    names = ["x", *(f"v{k}" for k in range(count - 1)), "y"]
    lines: list[str] = []
    for k, section in enumerate(sections):
        lines += random.choice(SHAPES)(section, names[k], names[k + 1])
    return sections, lines


def parallel(random: Random, count: int) -> tuple[list[Section], list[str]]:
    sections = [stable_section(random) for _ in range(count)]
    lines = [f"adder y = {' + '.join(f'v{k}' for k in range(count))}"]
    for k, section in enumerate(sections):
        lines += random.choice(SHAPES)(section, "x", f"v{k}")
    return sections, lines


def lattice(random: Random, stages: int) -> tuple[list[float], list[str]]:
    """An all-pole lattice, and its denominator from the reflection coefficients by the Levinson step-up."""
    ks = [Fraction(random.choice([-1, 1]) * random.randint(5, 85), 100) for _ in range(stages)]
    denominator = [Fraction(1)]
    for k in ks:
        padded = [*denominator, Fraction(0)]
        denominator = [value + k * mirrored for value, mirrored in zip(padded, padded[::-1], strict=True)]
    lines = []
    for m in range(stages, 0, -1):
        source = "x" if m == stages else f"f{m}"
        target = "y" if m == 1 else f"f{m - 1}"
        lines.append(f"adder {target} = {source} {'-' if ks[m - 1] > 0 else '+'} {abs(ks[m - 1])}*s{m}")
        lines.append(f"delay s{m} = {'y' if m == 1 else f'g{m - 1}'}")
        if m < stages:
            lines.append(f"adder g{m} = {'' if ks[m - 1] > 0 else '- '}{abs(ks[m - 1])}*{target} + s{m}")
    return [float(value) for value in denominator], lines


@pytest.mark.parametrize("seed", SEEDS)
@pytest.mark.parametrize("shape", SHAPES)
def test_single_sections_answer_like_lfilter(shape: Shape, seed: int) -> None:
    """Direct form I, II and transposed II."""
    section = stable_section(Random(seed))
    b, a = row(section)[:3], row(section)[3:]
    found = impulse_response(drawn(*shape(section, "x", "y")), 60)
    assert found == pytest.approx(signal.lfilter(b, a, pulse(60)), rel=1e-9, abs=1e-12)


@pytest.mark.parametrize("seed", SEEDS)
def test_cascades_answer_like_sosfilt(seed: int) -> None:
    """Two to four sections, each in a structure of its own."""
    random = Random(seed)
    sections, lines = cascade(random, random.randint(2, 4))
    expected = signal.sosfilt([row(section) for section in sections], pulse(60))
    assert impulse_response(drawn(*lines), 60) == pytest.approx(expected, rel=1e-9, abs=1e-11)


@pytest.mark.parametrize("seed", SEEDS)
def test_parallel_sections_answer_like_the_sum_of_lfilters(seed: int) -> None:
    """Two or three sections side by side."""
    random = Random(seed)
    sections, lines = parallel(random, random.randint(2, 3))
    expected = sum(signal.lfilter(row(section)[:3], row(section)[3:], pulse(60)) for section in sections)
    assert impulse_response(drawn(*lines), 60) == pytest.approx(expected, rel=1e-9, abs=1e-11)


@pytest.mark.parametrize("seed", SEEDS)
def test_lattices_answer_like_lfilter(seed: int) -> None:
    """Two to six stages."""
    random = Random(seed)
    denominator, lines = lattice(random, random.randint(2, 6))
    expected = signal.lfilter([1.0], denominator, pulse(60))
    diagram = drawn(*lines)
    assert impulse_response(diagram, 60) == pytest.approx(expected, rel=1e-9, abs=1e-11)
    assert [float(value) for value in coefficients(diagram).denominator.coeffs()] == pytest.approx(denominator)


def coefficients(diagram: Diagram) -> NumberTransfer:
    numbers = analyse(diagram).numbers
    assert numbers is not None
    return numbers[("y", "x")]


def matched(found: list[Root] | None, expected: numpy.ndarray, tolerance: float) -> bool:
    """Whether both hold the same points: each of ours takes the nearest of theirs away."""
    assert found is not None
    left = list(expected)
    for real, imaginary, multiplicity in found:
        for _ in range(multiplicity):
            nearest = min(left, key=lambda other: abs(other - complex(real, imaginary)))
            if abs(nearest - complex(real, imaginary)) > tolerance:
                return False
            left.remove(nearest)
    return not left


@pytest.mark.parametrize("seed", SEEDS)
def test_poles_and_zeros_are_those_of_tf2zpk(seed: int) -> None:
    """Of a section without redundant cells, and of a cascade of two (from its sections)."""
    random = Random(seed)
    sections, names = [stable_section(random) for _ in range(2)], ["x", "v", "y"]
    lines = [text for k in (0, 1) for text in transposed(sections[k], names[k], names[k + 1])]
    diagram = drawn(*lines)
    zpk = [signal.tf2zpk(row(section)[:3], row(section)[3:]) for section in sections]
    found = analyse(diagram)
    assert matched(found.poles, numpy.concatenate([part[1] for part in zpk]), 1e-6)
    assert matched(zeros(coefficients(diagram)), numpy.concatenate([part[0] for part in zpk]), 1e-6)
    assert found.stability == "stable"


class Doubles:
    """Numbers of the file as doubles: a ring for the state matrices."""

    zero, one, invertible = 0.0, 1.0, False

    def __init__(self, diagram: Diagram) -> None:
        self.value = exact_values(diagram)

    def coefficient(self, expression: Expression) -> float:
        return float(self.value(expression))

    def late(self, samples: int) -> float:
        raise TypeError("cells are states here")

    def times(self, left: float, right: float) -> float:
        return left * right

    def plus(self, left: float, right: float) -> float:
        return left + right

    def minus(self, left: float, right: float) -> float:
        return left - right

    def quotient(self, upper: float, lower: float) -> float:
        return upper / lower


def dense(rows: list[dict[int, float]], columns: int) -> numpy.ndarray:
    return numpy.array([[row.get(column, 0.0) for column in range(columns)] for row in rows])


@pytest.mark.parametrize("seed", SEEDS)
@pytest.mark.parametrize("made", [cascade, parallel])
def test_state_matrices_give_the_transfer_function_by_ss2tf(made: Made, seed: int) -> None:
    """scipy's transfer function of our matrices is our transfer function, but for cancelled factors."""
    _, lines = made(Random(seed), 2)
    diagram = drawn(*lines)
    states = state_matrices(diagram, Doubles(diagram))
    size = len(states.cells)
    upper, lower = signal.ss2tf(dense(states.a, size), dense(states.b, 1), dense(states.c, size), dense(states.d, 1))
    transfer = coefficients(diagram)
    ours = [[float(value) for value in side.coeffs()] for side in (transfer.numerator, transfer.denominator)]
    left, right = numpy.polymul(upper[0], ours[1]), numpy.polymul(ours[0], lower)
    width = max(len(left), len(right))
    padded = [numpy.pad(side, (0, width - len(side))) for side in (left, right)]
    assert padded[0] == pytest.approx(padded[1], abs=1e-9)


@pytest.mark.parametrize("seed", SEEDS)
def test_gain_requirements_turn_at_the_gain_of_freqz(seed: int) -> None:
    """A millionth of a decibel above and below what scipy computes, at frequencies up to half the rate."""
    random = Random(seed)
    section = stable_section(random)
    frequencies = [0, 24_000, *(random.randint(1, 23_999) for _ in range(4))]
    _, response = signal.freqz(row(section)[:3], row(section)[3:], worN=[2 * pi * f / RATE for f in frequencies])
    claims = []
    for frequency, value in zip(frequencies, response, strict=True):
        gain = 20 * numpy.log10(abs(value))
        place = f"require gain y / x at {frequency} Hz"
        claims += [f"{place} within {gain - 1e-6:.12f} .. {gain + 1e-6:.12f} dB"]
        claims += [f"{place} <= {gain - 1e-6:.12f} dB", f"{place} >= {gain + 1e-6:.12f} dB"]
    verdicts = verify(drawn(*random.choice(SHAPES)(section, "x", "y"), *claims))
    assert [verdict.outcome for verdict in verdicts] == ["proved", "refuted", "refuted"] * len(frequencies)
