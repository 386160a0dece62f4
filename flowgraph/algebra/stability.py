"""Where the roots of a polynomial lie, decided exactly: inside, on or outside the unit circle.

Polynomials are in w = z^-1 with a constant term, so a mode decays when its root in w lies outside
the circle; everything here speaks of the modes, the roots in z.
"""

from __future__ import annotations

from collections.abc import Iterable
from itertools import pairwise
from typing import Literal

from flint import fmpq_poly, fmpz_poly

Stability = Literal["stable", "marginal", "unstable"]


def stability_of_factors(determinants: Iterable[fmpq_poly]) -> tuple[Stability, fmpz_poly]:
    """The verdict on a product of polynomials in w, and the repeated part of its modes on the circle.

    "stable": all modes inside the circle. "marginal": none outside, those on it simple roots of the
    product. "unstable": one outside, or one on the circle twice; in the latter case the second value
    holds the repeated ones, because they are still harmless if the copies do not drive each other.
    """
    on_circle = fmpz_poly([1])
    repeated = fmpz_poly([1])
    for determinant, times in _counted(determinants):
        # p(w^m) has its modes on the same side as p(w), and there are fewer to look at.
        inner, spread = determinant.numer().deflation()
        for factor, multiplicity in inner.factor()[1]:
            match modes_of_factor(factor):
                case "outside":
                    return "unstable", fmpz_poly([1])
                case "on":
                    part = factor.inflate(spread) if spread > 1 else factor
                    shared = part if multiplicity * times > 1 else part.gcd(on_circle)
                    repeated = repeated * shared
                    on_circle = on_circle * part
                case "inside":
                    pass
    if repeated.degree() > 0:
        return "unstable", repeated
    return ("marginal" if on_circle.degree() > 0 else "stable"), repeated


def _counted(polynomials: Iterable[fmpq_poly]) -> list[tuple[fmpq_poly, int]]:
    """Each polynomial once, with how often it occurs: long cascades repeat a few sections."""
    found: dict[str, tuple[fmpq_poly, int]] = {}
    for polynomial in polynomials:
        text = str(polynomial)
        found[text] = (polynomial, found[text][1] + 1 if text in found else 1)
    return list(found.values())


def modes_of_factor(factor: fmpz_poly) -> Literal["inside", "on", "outside"]:
    """Where the modes of an irreducible polynomial in w lie: all inside, some on the circle, or some outside.

    An irreducible polynomial with a root on the circle is its own reverse (up to sign), so the roots
    come in pairs r, 1/r: some are outside unless all are on the circle.
    """
    coefficients = [int(value) for value in factor.coeffs()]
    if coefficients == coefficients[::-1] or coefficients == [-value for value in coefficients[::-1]]:
        return "on" if _all_on_circle(coefficients) else "outside"
    return "inside" if schur_cohn(coefficients) else "outside"


def schur_cohn(coefficients: list[int]) -> bool:
    """Whether all roots in w of sum c_k w^k lie outside the unit circle (Schur 1918, Cohn 1922).

    The step-down recursion in whole numbers: a polynomial passes when |last| < |first| at each step.
    """
    row = list(coefficients)
    while len(row) > 1:
        first, last = row[0], row[-1]
        if abs(last) >= abs(first):
            return False
        stepped = [first * row[k] - last * row[len(row) - 1 - k] for k in range(len(row) - 1)]
        content = int(fmpz_poly(stepped).content())
        row = [value // content for value in stepped]
    return True


def _all_on_circle(coefficients: list[int]) -> bool:
    """For a self-reversed polynomial: with t = w + 1/w, the roots on the circle are real t in [-2, 2]."""
    if len(coefficients) <= 2:
        return True  # w - 1 or w + 1
    half = (len(coefficients) - 1) // 2
    # w^k + w^-k = T_k(t) with T_0 = 2, T_1 = t, T_k = t T_{k-1} - T_{k-2}.
    t = fmpq_poly([0, 1])
    chebyshev = [fmpq_poly([2]), t]
    while len(chebyshev) <= half:
        chebyshev.append(t * chebyshev[-1] - chebyshev[-2])
    image = fmpq_poly([coefficients[half]])
    for k in range(1, half + 1):
        image += coefficients[half + k] * chebyshev[k]
    return _real_roots_between(image, -2, 2) == image.degree()


def _real_roots_between(polynomial: fmpq_poly, low: int, high: int) -> int:
    """How many distinct real roots lie in [low, high], by Sturm's theorem."""
    chain = [polynomial, polynomial.derivative()]
    while chain[-1]:
        chain.append(-(chain[-2] % chain[-1]))
    chain.pop()
    at_low = 1 if polynomial(low) == 0 else 0
    return _sign_changes(chain, low) - _sign_changes(chain, high) + at_low


def _sign_changes(chain: list[fmpq_poly], at: int) -> int:
    signs = [value for value in (polynomial(at) for polynomial in chain) if value != 0]
    return sum((before < 0) != (after < 0) for before, after in pairwise(signs))
