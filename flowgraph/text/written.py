"""Expressions as they are written: names, numbers, sums, products; offsets count characters of the file."""

from __future__ import annotations

from fractions import Fraction
from typing import NamedTuple, TypeAlias


class Word(NamedTuple):
    """A name or a quoted text as it stands in the file; quotes are taken off."""

    text: str
    start: int
    end: int


class Figure(NamedTuple):
    """A number with the unit written behind it, in base units."""

    value: Fraction
    unit: str
    start: int
    end: int


class At(NamedTuple):
    """`[place]` behind a name; `end` is the offset after its bracket."""

    place: Expr
    end: int


class Reference(NamedTuple):
    """`f`, `f[m]`, `low.w1`, `y[0].w1`: a name, then indices and inner names (plain strings)."""

    name: str
    parts: tuple[At | str, ...]
    start: int
    end: int


class Signed(NamedTuple):
    """One term of a sum."""

    negative: bool
    body: Expr


class Total(NamedTuple):
    """Terms with signs; a single term without a sign is no Total."""

    terms: tuple[Signed, ...]
    start: int
    end: int


class Factor(NamedTuple):
    """One factor of a term, multiplied or divided by."""

    divides: bool
    body: Expr


class Scaled(NamedTuple):
    """Two or more factors."""

    factors: tuple[Factor, ...]
    start: int
    end: int


class Raised(NamedTuple):
    """`base ^ exponent`; `height` counts how many powers stand on top of each other."""

    base: Expr
    exponent: Expr
    height: int
    start: int
    end: int


class Bracket(NamedTuple):
    """`( inner )`."""

    inner: Expr
    start: int
    end: int


class Call(NamedTuple):
    """sqrt, sin, cos, tan or exp."""

    function: str
    inner: Expr
    start: int
    end: int


class Fold(NamedTuple):
    """`total(k = A .. B, body)` or `product(k = A .. B, body)`."""

    kind: str
    variable: Word
    first: Expr
    last: Expr
    body: Expr
    start: int
    end: int


class CountOf(NamedTuple):
    """`count(h)`."""

    array: Word
    start: int
    end: int


Expr: TypeAlias = Figure | Reference | Total | Scaled | Raised | Bracket | Call | Fold | CountOf


def height(expr: Expr) -> int:
    """How many powers stand on top of each other in an expression; each power knows it of itself."""
    match expr:
        case Raised():
            return expr.height
        case Total(terms):
            return max(height(body) for _, body in terms)
        case Scaled(factors):
            return max(height(body) for _, body in factors)
        case Bracket(inner) | Call(_, inner):
            return height(inner)
        case Fold(_, _, first, last, body):
            return max(height(first), height(last), height(body))
        case Reference(_, parts):
            return max((height(part.place) for part in parts if isinstance(part, At)), default=0)
        case Figure() | CountOf():
            return 0
