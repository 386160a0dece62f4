"""What a proof of a step says, and how it fails."""

from __future__ import annotations

from collections.abc import Hashable
from dataclasses import dataclass
from typing import Literal

from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.expression import ONE, Expression, Negative, Sum
from flowgraph.passes.linear import Weight


@dataclass(frozen=True, slots=True)
class Proof:
    """How a step was proved; `error_below` is k where an identity test errs with probability below 2^-k, else 0.

    `keeps_rounding`: in floating words, too, every signal keeps its bits, since each sum has the
    same products in the same order (the first two may change places: a + b = b + a to the bit).
    """

    method: Literal["exact", "identity test"]
    error_below: int
    keeps_rounding: bool

    def __str__(self) -> str:
        how = self.method if self.method == "exact" else f"{self.method}, error below 2^-{self.error_below}"
        return how + ("; keeps every rounding" if self.keeps_rounding else "; rounds differently")


class NotProved(Exception):
    """The reason why a step could not be proved."""


class Keys:
    """Exact keys of weights: equal when the weights are equal for every value of the coefficients."""

    def __init__(self, diagram: Diagram) -> None:
        from flowgraph.algebra.coefficients import Coefficients

        self._coefficients = Coefficients(diagram)
        self._known: dict[Expression, Hashable] = {}

    def of_expression(self, expression: Expression) -> Hashable:
        """The key of a coefficient or of a starting content."""
        known = self._known.get(expression)
        if known is None:
            known = self._known[expression] = self._coefficients.key(expression)
        return known

    def of_weights(self, weights: list[Weight]) -> Hashable:
        """The key of the sum of the weights."""
        parts = [_expression(weight) for weight in weights]
        return self.of_expression(parts[0] if len(parts) == 1 else Sum(tuple(parts)))


def _expression(weight: Weight) -> Expression:
    coefficient = ONE if weight.coefficient is None else weight.coefficient
    return Negative(coefficient) if weight.negative else coefficient
