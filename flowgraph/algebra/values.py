"""Coefficients at the values of the file: exact fractions where they are rational, certified balls else."""

from __future__ import annotations

from collections.abc import Mapping
from fractions import Fraction

from flint import arb, ctx, fmpq

from flowgraph.algebra.valuation import Valuation
from flowgraph.diagram.diagram import Coefficient
from flowgraph.diagram.expression import Expression, Function
from flowgraph.diagram.simulate import NoExactValueError, OpenCoefficientError

FIRST_BITS = 128
MOST_BITS = 8192


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
            raise NoExactValueError("a coefficient divides by zero")
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

        Raises NoExactValueError where it has none: not real, not finite, or beyond the doubles.
        """
        if self.is_rational(expression):
            try:
                return float(self.fraction(expression))
            except OverflowError:
                raise NoExactValueError("the value lies outside the range of doubles") from None
        bits = FIRST_BITS
        while bits <= MOST_BITS:
            enclosure = self.ball(expression, bits)
            if enclosure.is_finite():
                lowest, highest = ends(enclosure)
                if float(lowest) == float(highest):
                    return float(lowest)
            bits *= 2
        raise NoExactValueError("the value is not a real number, or not finite")


def ends(enclosure: arb) -> tuple[Fraction, Fraction]:
    """Both ends of a finite enclosure, exactly."""
    middle, radius = _exact(enclosure.mid()), _exact(enclosure.rad())
    return middle - radius, middle + radius


def _exact(point: arb) -> Fraction:
    mantissa, exponent = point.man_exp()
    return Fraction(int(mantissa)) * Fraction(2) ** int(exponent)
