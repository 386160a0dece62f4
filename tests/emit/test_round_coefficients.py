"""Coefficients are rounded to doubles once, from their exact value."""

from __future__ import annotations

import decimal
import math
from decimal import Decimal
from fractions import Fraction

import pytest
from hypothesis import given
from hypothesis import strategies as st

from flowgraph.diagram.diagram import Coefficient, Diagram
from flowgraph.diagram.expression import Expression, Function, Name, Negative, Number, Pi, Power, Product, Quotient, Sum
from flowgraph.emit.round_coefficients import round_coefficients
from flowgraph.source.diagnostic import Refused
from flowgraph.source.span import NOWHERE


def number(value: str) -> Number:
    return Number(Fraction(value))


def rounded(expression: Expression, **coefficients: Expression | None) -> float:
    named = {name: Coefficient(name, value) for name, value in coefficients.items()}
    return round_coefficients(Diagram("made", {}, {}, named))(expression, NOWHERE)


@given(st.decimals("1e-30", "1e30", places=None, allow_nan=False))
def test_sqrt_and_exp_equal_correctly_rounded_decimals(value: Decimal) -> None:
    """The decimal module of Python rounds sqrt and exp correctly; at 60 digits its double is the nearest one."""
    fraction = Number(Fraction(value))
    small = Number(Fraction(value) / 10**30)
    with decimal.localcontext(decimal.Context(prec=60)):
        assert rounded(Function("sqrt", fraction)) == float(value.sqrt())
        assert rounded(Function("exp", small)) == float((value / 10**30).exp())


def test_powers_of_ten_for_decibels_are_rounded_once() -> None:
    """10^(-6/20) equals the decimal power at 60 digits, rounded."""
    with decimal.localcontext(decimal.Context(prec=60)):
        assert rounded(Power(number("10"), Fraction(-6, 20))) == float(Decimal(10) ** Decimal("-0.3"))


def test_the_whole_expression_is_rounded_not_its_parts() -> None:
    """sqrt(2)^2 - 2 + 2^-60 is 2^-60; 4*cos(2*pi/5) + 1 is sqrt(5); pi itself is the double next to pi."""
    root = Function("sqrt", number("2"))
    tiny = Number(Fraction(1, 2**60))
    assert rounded(Sum((Power(root, Fraction(2)), number("-2"), tiny))) == 2.0**-60
    fifth = Function("cos", Quotient(Product((number("2"), Pi())), number("5")))
    assert rounded(Sum((Product((number("4"), fifth)), number("1")))) == math.sqrt(5)
    assert rounded(Pi()) == math.pi


def test_coefficients_that_follow_others_are_exact_up_to_the_end() -> None:
    """c = r*r with r = 0.1 is the double next to 1/100, not the rounded product 0.1*0.1."""
    assert rounded(Negative(Name("c")), c=Product((Name("r"), Name("r"))), r=number("0.1")) == -0.01
    assert -0.1 * 0.1 != -0.01


@pytest.mark.parametrize(
    ("expression", "message"),
    [
        (Name("open"), "the coefficient open is open, so nothing can be computed with it"),
        (number("1e400"), "this coefficient cannot be a double: the value lies outside the range of doubles"),
        (Quotient(number("1"), number("0")), "this coefficient cannot be a double: the value is not a real number"),
        (Function("sqrt", number("-2")), "this coefficient cannot be a double: the value is not a real number"),
        (Function("exp", number("1000")), "this coefficient cannot be a double: the value lies outside the range"),
    ],
)
def test_what_has_no_double_is_refused(expression: Expression, message: str) -> None:
    """Open, infinite, undefined and huge values never become numbers."""
    with pytest.raises(Refused) as caught:
        rounded(expression, open=None)
    assert str(caught.value)[: len(message)] == message
