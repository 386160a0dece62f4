"""Where roots lie is decided exactly."""

from __future__ import annotations

from fractions import Fraction
from random import Random

import pytest
from flint import fmpq, fmpq_poly
from read_diagram import read_diagram

from flowgraph.algebra.stability import stability_of_factors
from flowgraph.algebra.stability_at_values import stability_at_values
from flowgraph.diagram.diagram import Diagram


def verdict(*coefficients: str) -> str:
    """The verdict on a polynomial in z, highest power first: read in w = 1/z it is rising."""
    values = [Fraction(text) for text in coefficients]
    return stability_of_factors([fmpq_poly([fmpq(value.numerator, value.denominator) for value in values])])[0]


# K. Ogata, Discrete-Time Control Systems, and NPTEL Digital Control, module 3: (a), (b).
# (c) and (d) from memory; (e) and (f) from published exercises, radii recomputed.
@pytest.mark.parametrize(
    ("polynomial", "expected"),
    [
        (("1", "-1.2", "0.07", "0.3", "-0.08"), "stable"),
        (("1", "-1.3", "-0.08", "0.24"), "unstable"),
        (("1", "-1.1", "-0.1", "0.2"), "marginal"),
        (("1", "-1.75", "-0.5"), "unstable"),
        (("1", "0.2", "0", "1", "0.3", "-0.1"), "unstable"),
        (("1", "-0.25", "0.1", "0.4", "0.3", "-0.1"), "stable"),
    ],
)
def test_the_published_set_of_jury_examples(polynomial: tuple[str, ...], expected: str) -> None:
    """The verdicts of the published Jury and Schur-Cohn examples."""
    assert verdict(*polynomial) == expected


# The stability triangle |a2| < 1, |a1| < 1 + a2 and its corners (textbook, from memory).
@pytest.mark.parametrize(
    ("a1", "a2", "expected"),
    [
        ("2", "1", "unstable"),
        ("-2", "1", "unstable"),
        ("0", "1", "marginal"),
        ("0", "-1", "marginal"),
        ("1", "1", "marginal"),
        ("1.9", "0.95", "stable"),
        ("1.96", "0.95", "unstable"),
        ("1.95", "0.95", "marginal"),
    ],
)
def test_the_stability_triangle(a1: str, a2: str, expected: str) -> None:
    """Inside, on and outside the triangle of a second-order section."""
    assert verdict("1", a1, a2) == expected


def test_the_verdict_follows_the_roots_a_polynomial_was_made_from() -> None:
    """Products of factors with known radius, down to 1 - 2^-40, are sorted without error."""
    random = Random(3)
    for _ in range(200):
        product = fmpq_poly([1])
        inside = True
        for _ in range(random.randint(1, 5)):
            near = Fraction(1) - Fraction(random.choice([1, -1, 1, 1, 1]), 2 ** random.randint(2, 40))
            inside = inside and near < 1
            c = Fraction(random.randint(-9, 9), 10)
            # z^2 - 2 r c z + r^2 has radius r for |c| < 1
            coefficients = [Fraction(1), -2 * near * c, near * near]
            product = product * fmpq_poly([fmpq(value.numerator, value.denominator) for value in coefficients])
        assert stability_of_factors([product])[0] == ("stable" if inside else "unstable")


def two_integrators(chained: bool, cells: int) -> Diagram:
    """Two running sums, one after the other or side by side, behind a line of some cells."""
    second = "s1" if chained else "line[end]"
    return read_diagram(f"""
        diagram d {{
            input x
            output y
            delay line = x by {cells}
            adder s1 = line[end] + m1
            delay m1 = s1
            adder s2 = {second} + m2
            delay m2 = s2
            adder y = s1 + s2
        }}""")


def test_repeated_modes_on_the_circle_are_unstable_only_where_one_drives_the_other() -> None:
    """Side by side two sums stay where they are; in a chain the second runs away."""
    assert stability_at_values(two_integrators(True, 3)).stability == "unstable"
    assert stability_at_values(two_integrators(False, 3)).stability == "marginal"


def test_repeated_modes_among_very_many_cells_are_not_told() -> None:
    """Beyond the size at which this is looked at, nothing is claimed."""
    assert stability_at_values(two_integrators(False, 1000)).stability is None
