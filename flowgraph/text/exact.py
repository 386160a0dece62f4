"""Exact numbers as written, and the bounds that keep every file harmless: bits, elements, levels."""

from __future__ import annotations

from fractions import Fraction
from functools import lru_cache

BITS = 4096
"""The most bits of a numerator or denominator."""
ELEMENTS = 2_000_000
"""The most elements of a diagram after expansion; every cell of a long line counts as one.
No claim looks further back either."""
DECIBELS = 10_000
"""The largest limit of a gain, of either sign."""
LEVELS = 64
"""The most levels of brackets, blocks, uses and includes."""
TERMS = 200_000
"""The most terms that total and product make of one line."""
LINE_LENGTH = 262_144
"""The most characters of one line, its continuations included."""
FILE_LENGTH = 64 * 2**20
"""The most bytes of one file."""

UNITS = {
    "": Fraction(1),
    "Hz": Fraction(1),
    "kHz": Fraction(1000),
    "MHz": Fraction(1_000_000),
    "s": Fraction(1),
    "ms": Fraction(1, 1000),
    "us": Fraction(1, 1_000_000),
    "%": Fraction(1, 100),
}
"""How much of the base unit (hertz, second, or none) each unit is."""
SECONDS = {"Hz": -1, "kHz": -1, "MHz": -1, "s": 1, "ms": 1, "us": 1}
"""The power of seconds of each unit that has one."""


class TooLargeError(ValueError):
    """A number beyond BITS bits; the text says which."""


@lru_cache(maxsize=4096)
def exact_number(text: str, unit: str = "") -> Fraction:
    """The exact value of a number as written, in base units: 0.95 is 19/20. Raises TooLargeError."""
    mantissa, _, exponent = text.replace("_", "").lower().partition("e")
    whole, _, places = mantissa.partition(".")
    if len(whole) + len(places) > BITS or len(exponent) > 6:
        raise TooLargeError("this number")
    shift = int(exponent or 0) - len(places)
    if abs(shift) > BITS:
        raise TooLargeError("this number")
    digits = int(whole + places)
    value = Fraction(digits * 10**shift) if shift >= 0 else Fraction(digits, 10**-shift)
    return within_bits(value * UNITS[unit] if unit else value)


def within_bits(value: Fraction) -> Fraction:
    """The same value. Raises TooLargeError if it has more than BITS bits above or below."""
    if value.numerator.bit_length() > BITS or value.denominator.bit_length() > BITS:
        raise TooLargeError("the value")
    return value


def exact_power(base: Fraction, exponent: int) -> Fraction:
    """base ^ exponent, found only if it stays within BITS. Raises TooLargeError and ZeroDivisionError."""
    bits = max(abs(base.numerator).bit_length(), base.denominator.bit_length()) - 1
    if base not in (0, 1, -1) and max(bits, 1) * abs(exponent) > 2 * BITS:
        raise TooLargeError("the power")
    if abs(base) == 1:
        return base if exponent % 2 else Fraction(1)
    if base == 0:
        exponent = min(exponent, 1) if exponent >= 0 else -1
    return within_bits(Fraction(base**exponent))
