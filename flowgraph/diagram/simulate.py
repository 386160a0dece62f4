"""The exact simulator: what a diagram computes, sample by sample, straight from its definition.

It is the oracle that everything faster is held against, so it is plain. It runs over any ring:
rationals, residues modulo a prime, polynomials in the coefficient names.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from typing import Protocol, Self, TypeVar

from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.elements import Adder, Delay, Gain, Input, Signal
from flowgraph.diagram.expression import Expression
from flowgraph.diagram.index import index, instant_order


class Operand(Protocol):
    """Values that can be added, subtracted and multiplied."""

    def __add__(self, other: Self, /) -> Self: ...
    def __sub__(self, other: Self, /) -> Self: ...
    def __mul__(self, other: Self, /) -> Self: ...


T = TypeVar("T", bound=Operand)


def simulate(
    diagram: Diagram,
    coefficient: Callable[[Expression], T],
    inputs: Mapping[str, Sequence[T]],
    samples: int,
    zero: T,
    watch: Mapping[str, Signal] | None = None,
) -> dict[str, list[T]]:
    """The first `samples` values of every output port, and of each signal in `watch` under its key.

    `coefficient` gives the value of a coefficient or of a starting content; each expression is
    asked for once. An input that is not in `inputs`, or has ended, is `zero`. Tap k of a delay at
    sample n is what the delay read at n - k, and before that its starting contents. Raises
    ValueError where wires form a loop without a delay.
    """
    view = index(diagram)
    order, loops = instant_order(view)
    if loops:
        raise ValueError("a loop without a delay: " + ", ".join(view.names[at] for at in loops[0]))
    steps = [(view.names[at], _terms(diagram, view.names[at], coefficient)) for at in order]
    lines = diagram.delays()
    starts = {line.name: [coefficient(start) for start in line.starts] or [zero] * line.length for line in lines}
    taken: dict[str, list[T]] = {line.name: [] for line in lines}
    shown = {name: output.signal for name, output in diagram.outputs.items()} | dict(watch or {})
    result: dict[str, list[T]] = {name: [] for name in shown}
    now: dict[str, T] = {}

    def value(signal: Signal, n: int) -> T:
        if signal.tap == 0:
            return now[signal.name]
        past = n - signal.tap
        return taken[signal.name][past] if past >= 0 else starts[signal.name][-past - 1]

    for n in range(samples):
        for name, terms in steps:
            if terms is not None:
                now[name] = _total([(negative, value(signal, n), factor) for negative, signal, factor in terms], zero)
            elif name not in taken:
                now[name] = inputs[name][n] if n < len(inputs.get(name, ())) else zero
        for line in lines:
            taken[line.name].append(value(line.signal, n))
        for name, signal in shown.items():
            result[name].append(value(signal, n))
    return result


def _terms(
    diagram: Diagram, name: str, coefficient: Callable[[Expression], T]
) -> list[tuple[bool, Signal, T | None]] | None:
    """The signed, scaled signals whose sum an element is; None for inputs and delays."""
    match diagram.elements[name]:
        case Adder(terms=terms):
            return [
                (term.negative, term.signal, None if term.coefficient is None else coefficient(term.coefficient))
                for term in terms
            ]
        case Gain(coefficient=factor, signal=signal):
            return [(False, signal, coefficient(factor))]
        case Input() | Delay():
            return None


def _total(terms: list[tuple[bool, T, T | None]], zero: T) -> T:
    """The terms added from left to right."""
    total: T | None = None
    for negative, signal, factor in terms:
        product = signal if factor is None else factor * signal
        if total is None:
            total = zero - product if negative else product
        else:
            total = total - product if negative else total + product
    return zero if total is None else total
