"""A diagram at one random point: coefficients and w as residues modulo a random 61-bit prime.

Points and primes follow from a seed and a name alone, so that two diagrams that share names are
valued at the same point and the same question gets the same answer.
"""

from __future__ import annotations

from collections.abc import Mapping
from fractions import Fraction
from hashlib import sha256

from flint import fmpz

from flowgraph.algebra.valuation import Valuation
from flowgraph.diagram.diagram import Coefficient
from flowgraph.diagram.expression import Expression, Function


def drawn(seed: str, name: str, below: int) -> int:
    """A number from 0 to below - 1 that depends on the seed and the name alone."""
    return int.from_bytes(sha256(f"{seed}/{name}".encode()).digest(), "big") % below


def drawn_prime(seed: str) -> int:
    """A prime between 2^60 and 2^61, each equally likely."""
    tries = 0
    while True:
        candidate = 2**60 + drawn(seed, f"prime {tries}", 2**60) | 1
        if fmpz(candidate).is_prime():
            return candidate
        tries += 1


class ResidueArithmetic:
    """Values expressions modulo a prime, every symbol at a residue drawn from the seed."""

    def __init__(self, prime: int, seed: str) -> None:
        self.prime = prime
        self._seed = seed

    def number(self, value: Fraction) -> int:
        return self.divide(value.numerator % self.prime, value.denominator % self.prime)

    def symbol(self, name: str) -> int:
        return drawn(self._seed, name, self.prime)

    def pi(self) -> int:
        return self.symbol("pi")

    def function(self, function: Function, argument: int) -> int:
        return self.symbol(f"{function.name} {argument}")

    def root_of(self, base: int, exponent: Fraction) -> int:
        return self.symbol(f"{base} ^ {exponent}")

    def add(self, left: int, right: int) -> int:
        return (left + right) % self.prime

    def multiply(self, left: int, right: int) -> int:
        return left * right % self.prime

    def divide(self, upper: int, lower: int) -> int:
        if lower == 0:
            raise ZeroDivisionError("a denominator vanishes at this point")
        return upper * pow(lower, -1, self.prime) % self.prime


class Residues:
    """Everything at one point: coefficients and w at residues modulo a prime."""

    invertible = True
    zero = 0
    one = 1

    def __init__(self, coefficients: Mapping[str, Coefficient], prime: int, seed: str) -> None:
        self.prime = prime
        self._value = Valuation(ResidueArithmetic(prime, seed), coefficients, at_values=False)
        self._w = drawn(seed, "z^-1", prime)

    def coefficient(self, expression: Expression) -> int:
        return self._value(expression)

    def late(self, samples: int) -> int:
        return pow(self._w, samples, self.prime)

    def times(self, left: int, right: int) -> int:
        return left * right % self.prime

    def plus(self, left: int, right: int) -> int:
        return (left + right) % self.prime

    def minus(self, left: int, right: int) -> int:
        return (left - right) % self.prime

    def quotient(self, upper: int, lower: int) -> int:
        if lower == 0:
            raise ZeroDivisionError("a pivot vanishes at this point")
        return upper * pow(lower, -1, self.prime) % self.prime
