"""The double of a coefficient is the one nearest to its exact value, and what has none says why."""

from __future__ import annotations

from decimal import Decimal, getcontext, localcontext
from fractions import Fraction
from itertools import pairwise
from math import copysign
from random import Random

import pytest

from flowgraph.algebra.values import NoExactValueError, OpenCoefficientError, Values
from flowgraph.diagram.diagram import Coefficient
from flowgraph.diagram.expression import Expression, Function, Name, Negative, Number, Pi, Power, Product, Quotient, Sum

PI = Decimal("3.14159265358979323846264338327950288419716939937510582097494459230781640628620899862803482534211706798")
VALUES = Values({})


def number(text: str | int) -> Number:
    return Number(Fraction(text))


def sine(angle: Decimal) -> Decimal:
    """The power series of the sine, for angles below 4."""
    total = term = angle
    for k in range(1, 80):
        term = -term * angle * angle / (2 * k * (2 * k + 1))
        total += term
    return total


def nearest(value: Decimal) -> float:
    """The double nearest to a decimal of many more digits than a double has."""
    return float(value)


@pytest.fixture(autouse=True)
def _ninety_digits() -> object:
    with localcontext():
        getcontext().prec = 90
        yield


@pytest.mark.parametrize("seed", range(20))
def test_functions_are_rounded_correctly(seed: int) -> None:
    """sqrt, exp, sin, cos, tan and powers of ten against decimals of ninety digits."""
    random = Random(seed)
    tenth = random.randint(1, 30)
    argument, decimal = number(Fraction(tenth, 10)), Decimal(tenth) / 10
    cosine = sine(PI / 2 - decimal) if tenth < 30 else -sine(decimal - PI / 2)
    expected: list[tuple[Expression, Decimal]] = [
        (Function("sqrt", argument), decimal.sqrt()),
        (Function("exp", argument), decimal.exp()),
        (Function("exp", Negative(argument)), (-decimal).exp()),
        (Function("sin", argument), sine(decimal)),
        (Function("cos", argument), cosine),
        (Function("tan", argument), sine(decimal) / cosine),
        (Power(number(10), Fraction(-tenth, 20)), Decimal(10) ** (Decimal(-tenth) / 20)),
        (Product((Pi(), argument)), PI * decimal),
        (Quotient(argument, number(97)), decimal / 97),
    ]
    for expression, exact in expected:
        assert VALUES.double(expression) == nearest(exact)


def test_a_gain_in_decibels_is_rounded_once() -> None:
    """10^(-6/20), from tables of decibels: 0.5011872336272722850..."""
    assert VALUES.double(Power(number(10), Fraction(-6, 20))) == 0.50118723362727228500


@pytest.mark.parametrize(
    ("expression", "value"),
    [
        (Function("sqrt", number(4)), 2.0),
        (Function("sqrt", number(0)), 0.0),
        (Function("sin", number(0)), 0.0),
        (Function("exp", number(0)), 1.0),
        (Function("cos", Quotient(Pi(), number(3))), 0.5),
        (Function("tan", Quotient(Pi(), number(4))), 1.0),
        (Power(Function("sqrt", number(2)), Fraction(2)), 2.0),
        (Sum((number(1), number(Fraction(1, 2**53)))), 1.0),
        (Sum((number(1), number(Fraction(3, 2**53)))), 1.0 + 2**-51),
        (number(Fraction(1, 3 * 2**1074)), 0.0),
        (number(Fraction(2, 3 * 2**1074)), 5e-324),
    ],
)
def test_values_that_doubles_hold_come_out_exactly(expression: Expression, value: float) -> None:
    """Also through functions; ties go to the even one, and what is small becomes subnormal or 0."""
    assert VALUES.double(expression) == value


@pytest.mark.parametrize(
    "expression", [Function("sin", Pi()), Negative(Function("sin", Pi())), Function("cos", Quotient(Pi(), number(2)))]
)
def test_what_no_precision_tells_from_zero_is_plus_zero(expression: Expression) -> None:
    """sin(pi) is 0.0, neither -0.0 nor 1.2e-16."""
    value = VALUES.double(expression)
    assert (value, copysign(1, value)) == (0.0, 1.0)


@pytest.mark.parametrize("exponent", [1000, 10**11, 10**40])
def test_the_smallest_values_keep_their_sign(exponent: int) -> None:
    """exp(-1000) is below all doubles: 0 of its sign, however far below it is."""
    tiny = Function("exp", number(-exponent))
    assert copysign(1, VALUES.double(tiny)) == 1
    assert (VALUES.double(Negative(tiny)), copysign(1, VALUES.double(Negative(tiny)))) == (0.0, -1.0)


HUGE = Function("exp", number(10**11))


@pytest.mark.parametrize(
    ("expression", "reason"),
    [
        (Function("exp", number(1000)), "the value lies outside the range of doubles"),
        (Negative(Function("exp", number(1000))), "the value lies outside the range of doubles"),
        (HUGE, "the value lies outside the range of doubles"),
        (Function("exp", number(10**40)), "the value lies outside the range of doubles"),
        (Function("exp", number("709.782712893384")), "the value lies outside the range of doubles"),
        (number(10**400), "the value lies outside the range of doubles"),
        (Function("sqrt", number(-1)), "the value is not a real number, or not finite"),
        (Function("tan", Quotient(Pi(), number(2))), "the value is not a real number, or not finite"),
        (Quotient(number(1), Function("sin", Pi())), "the value is not a real number, or not finite"),
        (Quotient(number(1), number(0)), "the value is not a real number: it divides by zero"),
        (Quotient(number(0), number(0)), "the value is not a real number: it divides by zero"),
        (Power(number(0), Fraction(-1)), "the value is not a real number: it divides by zero"),
        (
            Sum((number(1), Quotient(Power(Function("sqrt", number(2)), Fraction(2)), number(2**54)))),
            "the value lies too near the middle of two doubles to be rounded",
        ),
        (Sum((HUGE, Pi(), Negative(HUGE))), "the value lies too near the middle of two doubles to be rounded"),
    ],
)
def test_what_has_no_double_says_why(expression: Expression, reason: str) -> None:
    """One kind of error for all of them, whatever their size."""
    with pytest.raises(NoExactValueError, match=f"^{reason}$"):
        VALUES.double(expression)


def test_the_largest_double_is_still_a_value() -> None:
    """Up to half a step above it, everything is rounded to it."""
    largest = Fraction(2) ** 1024 - Fraction(2) ** 971
    assert VALUES.double(Number(largest + Fraction(2) ** 969)) == float(largest)
    assert VALUES.double(Function("exp", number("709.782712893383"))) == nearest(Decimal("709.782712893383").exp())


def test_an_open_coefficient_is_named() -> None:
    """A value that reads it, however deep, is refused with its name."""
    values = Values({"a": Coefficient("a"), "b": Coefficient("b", Function("exp", Name("a")))})
    with pytest.raises(OpenCoefficientError, match="the coefficient a is open"):
        values.double(Sum((number(1), Name("b"))))


def test_values_are_exact_through_coefficients_that_follow_others() -> None:
    """c = -r^2/(1 - r) with r = 1/3 is -1/6, whatever the order of definition."""
    falling = Quotient(Negative(Power(Name("r"), Fraction(2))), Sum((number("1"), Negative(Name("r")))))
    values = Values({"c": Coefficient("c", falling), "r": Coefficient("r", number("1/3"))})
    assert values.fraction(Product((Name("c"), number("2")))) == Fraction(-1, 3)


def test_a_hundred_thousand_coefficients_in_a_row_are_resolved() -> None:
    """Following is resolved without recursion."""
    names = [f"c{k}" for k in range(100_000)]
    chain = {name: Coefficient(name, Name(following)) for name, following in pairwise(names)} | {
        names[-1]: Coefficient(names[-1], number("0.5"))
    }
    assert Values(chain).fraction(Name("c0")) == Fraction(1, 2)


@pytest.mark.parametrize(
    ("expression", "said"),
    [
        (Function("sqrt", number("2")), "sqrt has no exact value as a fraction"),
        (Pi(), "pi has no exact value as a fraction"),
        (Power(number("10"), Fraction(-3, 10)), "the power -3/10 has no exact value as a fraction"),
        (Quotient(number("1"), Sum((number("1"), number("-1")))), "a coefficient divides by zero"),
        (Power(number("0"), Fraction(-1)), "a coefficient divides by zero"),
    ],
)
def test_what_is_no_fraction_says_why(expression: Function, said: str) -> None:
    """Irrational values and divisions by zero are refused by name."""
    with pytest.raises(NoExactValueError, match=said):
        Values({}).fraction(expression)
