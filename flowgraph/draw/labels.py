"""What stands beside the symbols: names as textbook labels, coefficients in a few characters, widths.

A label never decides anything; the full names and values are in the titles and the description.
"""

from __future__ import annotations

import re
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

LONGEST_COEFFICIENT = 18
LONGEST_NAME = 24

_SUBSCRIPTS = str.maketrans("0123456789", "₀₁₂₃₄₅₆₇₈₉")
_SUPERSCRIPTS = str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹")
_GREEK = dict(
    zip(
        [
            "alpha",
            "beta",
            "gamma",
            "delta",
            "epsilon",
            "zeta",
            "eta",
            "theta",
            "kappa",
            "lambda",
            "mu",
            "nu",
            "xi",
            "rho",
            "sigma",
            "tau",
            "phi",
            "chi",
            "psi",
            "omega",
        ],
        "αβγδεζηθκλμνξρστφχψω",
        strict=True,
    )
)
_NAME = re.compile(r"([A-Za-z_]*[A-Za-z])_?(\d{1,4})")

# Advance widths in thousandths of the type size, of the widest font such a label is likely to be
# shown in (DejaVu Sans; from memory, rounded up). What fits with these fits with all others.
_WIDTHS = {
    **dict.fromkeys("ijl'|", 280),
    **dict.fromkeys("I", 300),
    **dict.fromkeys(" .,;:/!", 340),
    **dict.fromkeys("ft()[]-", 395),
    **dict.fromkeys("r₀₁₂₃₄₅₆₇₈₉⁰¹²³⁴⁵⁶⁷⁸⁹·", 420),
    **dict.fromkeys("sz_⁻–", 530),
    **dict.fromkeys("ckvxyL", 600),
    **dict.fromkeys("wCGOQDHN", 820),
    **dict.fromkeys("mMW", 990),
    **dict.fromkeys("−+×=<>→…√", 1000),
}


def text_width(text: str, size: float) -> float:
    """The width of a line of text in points, in the widest font it is likely to be shown in."""
    return sum(_WIDTHS.get(character, 700 if character.isupper() else 640) for character in text) * size / 1000


def superscript(whole: int) -> str:
    """A whole number raised: -8 is ⁻⁸."""
    return str(whole).translate(_SUPERSCRIPTS)


def name_label(name: str) -> str:
    """`b0` -> b₀, `h[3]` -> h₃, `low.b0` -> low.b₀, `d[2][3]` -> d[2,3], `omega` -> ω; long ones are cut."""
    return shortened(".".join(_part_label(part) for part in name.split(".")), LONGEST_NAME)


def _part_label(part: str) -> str:
    base, *indices = part.replace("]", "").split("[")
    numbered = _NAME.fullmatch(base)
    word, digits = (numbered[1], numbered[2]) if numbered else (base, "")
    word = _GREEK.get(word, word)
    if not indices:
        return word + digits.translate(_SUBSCRIPTS)
    if not digits and len(indices) == 1 and indices[0].isdecimal():
        return word + indices[0].translate(_SUBSCRIPTS)
    return f"{word}{digits.translate(_SUBSCRIPTS)}[{','.join(indices)}]"


def port_label(name: str) -> str:
    """The signal at a port: `x` -> x[n], `u1` -> u₁[n]."""
    return name_label(name) + "[n]"


def delay_label(length: int) -> str:
    """What stands in the box of a delay by `length` samples."""
    return "z" + superscript(-length)


def shortened(text: str, longest: int) -> str:
    """The text, or its beginning and an ellipsis."""
    return text if len(text) <= longest else text[: longest - 1] + "…"


def coefficient_label(coefficient: Expression) -> str:
    """A coefficient in at most `LONGEST_COEFFICIENT` characters, numbers to four significant digits."""
    return shortened(expression_label(coefficient), LONGEST_COEFFICIENT)


def number_label(value: Fraction) -> str:
    """Four significant digits; a ratio of small whole numbers that is no short decimal stays a ratio."""
    sign = "−" if value < 0 else ""
    size = abs(value)
    if size.denominator == 1 and size < 100_000:
        return f"{sign}{size.numerator}"
    rounded = f"{float(size):.4g}" if size < 10**300 else f"10^{len(str(size.numerator // size.denominator)) - 1}"
    if size.numerator < 100 and size.denominator < 100 and ("e" in rounded or Fraction(rounded) != size):
        return f"{sign}{size.numerator}/{size.denominator}"
    mantissa, _, exponent = rounded.partition("e")
    return sign + mantissa + (f"·10{superscript(int(exponent))}" if exponent else "")


def expression_label(expression: Expression, binding: int = 0) -> str:
    """The expression as texts set it; `binding` is 1 inside a product, 2 under a power or a sign."""
    match expression:
        case Number(value):
            text, own = number_label(value), 0 if value < 0 else 3
        case Name(name):
            text, own = name_label(name), 3
        case Pi():
            text, own = "π", 3
        case Sample(signal, late):
            text, own = f"{name_label(signal)}[n{f'−{late}' if late else ''}]", 3
        case Function(name, argument):
            text, own = f"{'√' if name == 'sqrt' else name}({expression_label(argument)})", 3
        case Power(base, exponent):
            raised = superscript(int(exponent)) if exponent.denominator == 1 else f"^({number_label(exponent)})"
            text, own = expression_label(base, 3) + raised, 2
        case Negative(inner):
            text, own = "−" + expression_label(inner, 2), 0
        case Quotient(upper, lower):
            text, own = f"{expression_label(upper, 1)}/{expression_label(lower, 2)}", 1
        case Product(factors):
            text, own = "·".join(expression_label(factor, 1) for factor in factors), 1
        case Sum(terms):
            text = expression_label(terms[0])
            for term in terms[1:]:
                inner = term.inner if isinstance(term, Negative) else term
                text += ("−" if isinstance(term, Negative) else "+") + expression_label(inner, 1)
            own = 0
    return f"({text})" if own < binding else text
