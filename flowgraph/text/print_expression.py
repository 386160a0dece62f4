"""Exact expressions -> text that reads back as the same expression."""

from __future__ import annotations

from collections.abc import Mapping
from fractions import Fraction

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
    Sample,
    Sum,
)
from flowgraph.text.exact import UNITS

DIGITS = 30
"""Decimals longer than this are written as a fraction."""


def print_expression(expression: Expression, names: Mapping[str, str] | None = None) -> str:
    """The text of an expression; `names` says how names are written that change their spelling."""
    return _Printer(names or {}).text(expression)


def print_factor(expression: Expression, names: Mapping[str, str] | None = None) -> str:
    """The text of an expression as it stands in front of `* signal`."""
    return _Printer(names or {}).first_factor(expression)


def print_number(value: Fraction, unit: str = "") -> str:
    """A number in base units, written in `unit`: a decimal where it ends, else a fraction in brackets."""
    in_unit = value / UNITS[unit]
    digits = _decimal(abs(in_unit))
    sign = "-" if value < 0 else ""
    space = "" if unit in ("", "%") else " "
    if digits is not None:
        return f"{sign}{digits}{space}{unit}"
    return f"({sign}{abs(in_unit.numerator)}{space}{unit}/{in_unit.denominator})"


def print_frequency(value: Fraction) -> str:
    """A frequency in kHz where that is a short number, else in Hz."""
    return print_number(value, "kHz" if value and value % 100 == 0 and value >= 1000 else "Hz")


def _decimal(value: Fraction) -> str | None:
    """The digits of a number >= 0 that ends in decimals, or None if it does not or is very long."""
    places = 0
    rest = value.denominator
    for prime in (2, 5):
        power = 0
        while rest % prime == 0:
            rest //= prime
            power += 1
        places = max(places, power)
    if rest != 1 or places > DIGITS:
        return None
    digits = str(value.numerator * 10**places // value.denominator).rjust(places + 1, "0")
    return f"{digits[:-places]}.{digits[-places:]}" if places else digits


class _Printer:
    """Writes brackets where the reader would group otherwise."""

    def __init__(self, names: Mapping[str, str]) -> None:
        self._names = names

    def text(self, expression: Expression) -> str:
        match expression:
            case Sum(terms):
                return "".join(self._term(term, k == 0) for k, term in enumerate(terms))
            case Negative(inner):
                return f"-{self._behind_sign(inner)}"
            case Product() | Quotient():
                return self._product(expression)
            case Number(value, unit):
                return print_number(value, unit)
            case _:
                return self._atom(expression)

    def first_factor(self, expression: Expression) -> str:
        match expression:
            case Sum() | Negative():
                return self._bracket(expression)
            case Number(value) if value < 0:
                return self._bracket(expression)
            case _:
                return self.text(expression)

    def _term(self, term: Expression, first: bool) -> str:
        if isinstance(term, Negative):
            return f"{'-' if first else ' - '}{self._behind_sign(term.inner)}"
        return f"{'' if first else ' + '}{self._behind_sign(term)}"

    def _behind_sign(self, term: Expression) -> str:
        """What a sign stands in front of: a product, never a sum or another sign."""
        return self.first_factor(term)

    def _product(self, expression: Expression) -> str:
        match expression:
            case Product(factors):
                first = self._bracket(factors[0]) if isinstance(factors[0], Product) else self.first_factor(factors[0])
                return "*".join([first, *(self._tight(factor) for factor in factors[1:])])
            case Quotient(upper, lower):
                return f"{self.first_factor(upper)}/{self._tight(lower)}"
            case _:
                return self._atom(expression)

    def _tight(self, expression: Expression) -> str:
        """A factor that is not the first."""
        match expression:
            case Sum() | Negative() | Product() | Quotient():
                return self._bracket(expression)
            case Number(value) if value < 0:
                return self._bracket(expression)
            case _:
                return self.text(expression)

    def _bracket(self, expression: Expression) -> str:
        text = self.text(expression)
        whole_number = isinstance(expression, Number) and text.startswith("(")
        return text if whole_number else f"({text})"

    def _atom(self, expression: Expression) -> str:
        match expression:
            case Name(name):
                return self._names.get(name, name)
            case Pi():
                return "pi"
            case Function(name, argument):
                return f"{name}({self.text(argument)})"
            case Sample(signal, late):
                return f"{signal}[n-{late}]" if late > 0 else f"{signal}[n+{-late}]" if late else f"{signal}[n]"
            case Power(base, exponent):
                simple = isinstance(base, Name | Pi | Function) or (isinstance(base, Number) and base.value >= 0)
                raised = str(exponent) if exponent.denominator == 1 else f"({exponent})"
                return f"{self.text(base) if simple else self._bracket(base)}^{raised}"
            case _:
                return self.text(expression)
