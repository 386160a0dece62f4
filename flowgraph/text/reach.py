"""How many samples back a claim looks: samples x[n - k] of an equation, powers of z of a ratio."""

from __future__ import annotations

from fractions import Fraction

from flowgraph.diagram.expression import Expression, Name, Power, Product, Quotient, Sample, children
from flowgraph.text import syntax as s
from flowgraph.text.exact import ELEMENTS
from flowgraph.text.scope import Scope


def earliest_samples(right: Expression) -> dict[str, int]:
    """For each signal of an equation the largest k of its samples [n - k]."""
    earliest: dict[str, int] = {}
    waiting = [right]
    while waiting:
        inner = waiting.pop()
        if isinstance(inner, Sample):
            earliest[inner.signal] = max(earliest.get(inner.signal, 0), inner.late)
        waiting.extend(children(inner))
    return earliest


def reach_of_ratio(ratio: Expression) -> Fraction:
    """A bound on the powers of z, of either sign, once the brackets of a ratio are multiplied out."""
    match ratio:
        case Name("z"):
            return Fraction(1)
        case Power(base, exponent):
            return reach_of_ratio(base) * abs(exponent)
        case Product(factors):
            return sum(map(reach_of_ratio, factors), Fraction(0))
        case Quotient(upper, lower):
            return reach_of_ratio(upper) + reach_of_ratio(lower)
        case _:
            return max((reach_of_ratio(part) for part in children(ratio)), default=Fraction(0))


def within_reach(scope: Scope, samples: int | Fraction, at: s.Expr) -> None:
    """Raises Fault where a claim looks further than the longest line there may be."""
    if not -ELEMENTS <= samples <= ELEMENTS:
        raise scope.fault("too-large", f"this reaches over more than {ELEMENTS} samples", at.start, at.end)
