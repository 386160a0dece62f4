"""Coefficients at the values of the file: exact fractions where they are rational, certified balls else."""

from __future__ import annotations

from collections.abc import Mapping
from fractions import Fraction
from math import inf, isinf

from flint import arb, ctx, fmpq

from flowgraph.algebra.valuation import Valuation
from flowgraph.diagram.diagram import Coefficient
from flowgraph.diagram.expression import Expression, Function

FIRST_BITS = 128
MOST_BITS = 8192

LARGEST = arb(2) ** 1024
SMALLEST = arb(2) ** -1076
"""Beyond the doubles, and what is rounded to zero."""


class NoExactValueError(ValueError):
    """An expression that has no rational value, and why."""


class OpenCoefficientError(NoExactValueError):
    """An expression that reads a coefficient without a value; `name` is that coefficient."""

    def __init__(self, name: str) -> None:
        super().__init__(f"the coefficient {name} is open: it has no value here")
        self.name = name


class DividesByZero(NoExactValueError):
    """An expression that divides by a rational number that is 0."""


class _Fractions:
    """Exact rationals; what has no rational value raises NoExactValueError."""

    def number(self, value: Fraction) -> Fraction:
        return value

    def symbol(self, name: str) -> Fraction:
        raise OpenCoefficientError(name)

    def pi(self) -> Fraction:
        raise NoExactValueError("pi has no exact value as a fraction")

    def function(self, function: Function, argument: Fraction) -> Fraction:
        raise NoExactValueError(f"{function.name} has no exact value as a fraction")

    def root_of(self, base: Fraction, exponent: Fraction) -> Fraction:
        raise NoExactValueError(f"the power {exponent} has no exact value as a fraction")

    def add(self, left: Fraction, right: Fraction) -> Fraction:
        return left + right

    def multiply(self, left: Fraction, right: Fraction) -> Fraction:
        return left * right

    def divide(self, upper: Fraction, lower: Fraction) -> Fraction:
        if lower == 0:
            raise DividesByZero("a coefficient divides by zero")
        return upper / lower


class _Balls:
    """Certified enclosures (arb) at the precision in force."""

    def number(self, value: Fraction) -> arb:
        return ball_of(value)

    def symbol(self, name: str) -> arb:
        raise OpenCoefficientError(name)

    def pi(self) -> arb:
        return arb.pi()

    def function(self, function: Function, argument: arb) -> arb:
        match function.name:
            case "sqrt":
                return argument.sqrt()
            case "sin":
                return argument.sin()
            case "cos":
                return argument.cos()
            case "tan":
                return argument.tan()
            case "exp":
                return argument.exp()

    def root_of(self, base: arb, exponent: Fraction) -> arb:
        return base ** ball_of(exponent)

    def add(self, left: arb, right: arb) -> arb:
        return left + right

    def multiply(self, left: arb, right: arb) -> arb:
        return left * right

    def divide(self, upper: arb, lower: arb) -> arb:
        return upper / lower


def ball_of(value: Fraction) -> arb:
    """The enclosure of a fraction at the precision in force."""
    return arb(fmpq(value.numerator, value.denominator))


class Values:
    """The values of coefficient expressions with the numbers of the file.

    All methods raise OpenCoefficientError where an expression reads a coefficient without a value.
    """

    def __init__(self, coefficients: Mapping[str, Coefficient]) -> None:
        self._coefficients = coefficients
        self._fractions = Valuation(_Fractions(), coefficients, at_values=True)
        self._balls: dict[int, Valuation[arb]] = {}

    def fraction(self, expression: Expression) -> Fraction:
        """The exact value. Raises NoExactValueError where it is not made of rational operations."""
        return self._fractions(expression)

    def is_rational(self, expression: Expression) -> bool:
        """Whether `fraction` gives a value."""
        try:
            self._fractions(expression)
        except OpenCoefficientError:
            raise
        except NoExactValueError:
            return False
        return True

    def ball(self, expression: Expression, bits: int = FIRST_BITS) -> arb:
        """A certified enclosure, computed with `bits` bits."""
        valuation = self._balls.get(bits)
        if valuation is None:
            valuation = self._balls[bits] = Valuation(_Balls(), self._coefficients, at_values=True)
        with ctx.workprec(bits):
            return valuation(expression)

    def double(self, expression: Expression) -> float:
        """The double nearest to the exact value (ties to even).

        A value that no precision tells from zero, such as sin(pi), is 0.0. Raises NoExactValueError
        where it has none: not real, not finite, or beyond the doubles.
        """
        try:
            value = _nearest(self.fraction(expression))
        except OpenCoefficientError:
            raise
        except DividesByZero:
            raise NoExactValueError("the value is not a real number: it divides by zero") from None
        except NoExactValueError:
            value = self._rounded(expression)
        if isinf(value):
            raise NoExactValueError("the value lies outside the range of doubles")
        return value

    def _rounded(self, expression: Expression) -> float:
        """The double that both ends of a narrow enough enclosure are rounded to."""
        reason = "the value is not a real number, or not finite"
        bits = FIRST_BITS
        while bits <= MOST_BITS:
            enclosure = self.ball(expression, bits)
            if enclosure.is_finite():
                lowest, highest = _doubles(enclosure)
                if lowest == highest:
                    return highest
                reason = "the value lies too near the middle of two doubles to be rounded"
            bits *= 2
        raise NoExactValueError(reason)


def _doubles(enclosure: arb) -> tuple[float, float]:
    """The doubles nearest to both ends of a finite enclosure, infinite beyond them.

    Far outside the doubles the ends are not written out: exp(10^11) has as many bits.
    """
    if abs(enclosure) > LARGEST:
        return (inf, inf) if enclosure > 0 else (-inf, -inf)
    if enclosure.rad() > LARGEST:
        return -inf, inf
    if abs(enclosure) < SMALLEST:
        return (-0.0, -0.0) if enclosure < 0 else (0.0, 0.0)
    lowest, highest = ends(enclosure)
    return _nearest(lowest), _nearest(highest)


def _nearest(value: Fraction) -> float:
    try:
        return float(value)
    except OverflowError:
        return inf if value > 0 else -inf


def ends(enclosure: arb) -> tuple[Fraction, Fraction]:
    """Both ends of a finite enclosure, exactly."""
    middle, radius = _exact(enclosure.mid()), _exact(enclosure.rad())
    return middle - radius, middle + radius


def _exact(point: arb) -> Fraction:
    mantissa, exponent = point.man_exp()
    return Fraction(int(mantissa)) * Fraction(2) ** int(exponent)
