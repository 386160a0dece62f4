"""When two coefficient expressions of a diagram are equal for every value of its coefficients."""

from __future__ import annotations

from collections.abc import Hashable

from flowgraph.algebra.rational_functions import canonical_text, symbolic_valuation
from flowgraph.algebra.valuation import followed_expression
from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.expression import Expression, Name


class Coefficients:
    """Exact canonical forms of the coefficient expressions of one diagram."""

    def __init__(self, diagram: Diagram) -> None:
        self._coefficients = diagram.coefficients
        self._value = symbolic_valuation(diagram.coefficients)

    def key(self, expression: Expression) -> Hashable:
        """Equal for two expressions exactly when they are equal for every value of the coefficients.

        Equality is that of rational functions; values of sqrt, sin, cos, tan, exp and pi are free
        symbols.
        """
        if (
            isinstance(expression, Name)
            and followed_expression(self._coefficients, expression.name, at_values=False) is None
        ):
            return expression.name
        return canonical_text(self._value(expression))
