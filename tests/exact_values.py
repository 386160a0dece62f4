"""The coefficients of a diagram as exact fractions, for the simulator in tests."""

from __future__ import annotations

from collections.abc import Callable
from fractions import Fraction

from flowgraph.algebra.values import Values
from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.expression import Expression


def exact_values(diagram: Diagram) -> Callable[[Expression], Fraction]:
    """A function that gives the value of a coefficient expression with the numbers of the file."""
    return Values(diagram.coefficients).fraction
