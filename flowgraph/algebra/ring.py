"""What solving a diagram asks of the values it works with."""

from __future__ import annotations

from typing import Generic, Protocol, TypeVar

from flowgraph.diagram.expression import Expression
from flowgraph.diagram.simulate import Operand

R = TypeVar("R")


class Ring(Protocol[R]):
    """What solving needs of a ring; `zero` and `one` are its constants."""

    zero: R
    one: R
    invertible: bool  # every element but zero has an inverse: a field

    def coefficient(self, expression: Expression) -> R: ...
    def late(self, samples: int) -> R: ...
    def times(self, left: R, right: R) -> R: ...
    def plus(self, left: R, right: R) -> R: ...
    def minus(self, left: R, right: R) -> R: ...
    def quotient(self, upper: R, lower: R) -> R: ...


V = TypeVar("V", bound=Operand)


class Operators(Generic[V]):
    """Sums and products by the operators of the values themselves."""

    def times(self, left: V, right: V) -> V:
        return left * right

    def plus(self, left: V, right: V) -> V:
        return left + right

    def minus(self, left: V, right: V) -> V:
        return left - right


class ExactRing(Ring[R], Protocol[R]):
    """A ring of polynomials in which nothing is left to chance."""

    def cleared(self, *polynomials: R) -> tuple[R, ...]:
        """The polynomials times one common product of coefficient denominators."""
        ...


class Polynomial(Operand, Protocol):
    """An element of an exact ring, whichever of the two it is."""

    def __len__(self) -> int: ...
