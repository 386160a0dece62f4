"""Names and coefficients as textbooks set them."""

from __future__ import annotations

from fractions import Fraction

import pytest

from flowgraph.diagram.expression import (
    Expression,
    Function,
    Name,
    Negative,
    Number,
    Pi,
    Power,
    Product,
    Quotient,
    Sum,
)
from flowgraph.draw.labels import coefficient_label, delay_label, name_label, number_label, port_label, text_width

TWO = Number(Fraction(2))
R = Name("r")


@pytest.mark.parametrize(
    ("name", "label"),
    [
        ("x", "x"), ("b0", "b₀"), ("a11", "a₁₁"), ("h[3]", "h₃"), ("low.b0", "low.b₀"), ("in[left]", "in[left]"),
        ("b0[2]", "b₀[2]"), ("d[2][3]", "d[2,3]"), ("omega", "ω"), ("omega0", "ω₀"), ("slow_mean", "slow_mean"),
        ("w_1", "w₁"), ("h[3].b0", "h₃.b₀"),
    ],
)  # fmt: skip
def test_names_become_textbook_labels(name: str, label: str) -> None:
    """Digits at the end and single indices go below the line; what would be ambiguous stays as written."""
    assert name_label(name) == label


def test_long_names_are_cut() -> None:
    """A label never grows over the picture; the full name is in the title."""
    assert name_label("a_name_of_more_than_thirty_letters") == "a_name_of_more_than_thi…"


@pytest.mark.parametrize(
    ("value", "label"),
    [
        (Fraction(19, 20), "0.95"), (Fraction(-1, 2), "−0.5"), (Fraction(1, 3), "1/3"), (Fraction(3), "3"),
        (Fraction(314159, 100000), "3.142"), (Fraction(1, 10**9), "1·10⁻⁹"), (Fraction(-22, 7), "−22/7"),
        (Fraction(10**7), "1·10⁷"),
    ],
)  # fmt: skip
def test_numbers_have_four_digits_and_a_true_minus(value: Fraction, label: str) -> None:
    """Short decimals as they are, ratios of small numbers as ratios, all else to four digits."""
    assert number_label(value) == label


def test_huge_and_tiny_numbers_do_not_fail() -> None:
    """Numbers beyond a double's range still get a short label."""
    assert number_label(Fraction(10**400)) == "10^400"
    assert len(number_label(Fraction(1, 10**400))) < 12


@pytest.mark.parametrize(
    ("expression", "label"),
    [
        (Product((TWO, R, Function("cos", Name("w")))), "2·r·cos(w)"),
        (Power(R, Fraction(2)), "r²"),
        (Negative(Power(R, Fraction(2))), "−r²"),
        (Quotient(Number(Fraction(1)), Number(Fraction(8))), "1/8"),
        (Product((R, Sum((Number(Fraction(1)), Negative(R))))), "r·(1−r)"),
        (Quotient(R, Product((TWO, Pi()))), "r/(2·π)"),
        (Function("sqrt", TWO), "√(2)"),
    ],
)
def test_coefficients_are_set_as_formulas(expression: Expression, label: str) -> None:
    """Raised exponents, dots for products, brackets where they are needed."""
    assert coefficient_label(expression) == label


def test_delays_and_ports() -> None:
    """A delay shows its power of z, a port its signal at n."""
    assert delay_label(1200) == "z⁻¹²⁰⁰"
    assert port_label("u1") == "u₁[n]"


def test_widths_grow_with_text_and_size() -> None:
    """The measure is one of the widest font: an m is wider than an i, twice the size twice the width."""
    assert text_width("m", 12) > text_width("i", 12)
    assert text_width("abc", 24) == 2 * text_width("abc", 12)
