"""The element kinds. An element names what it reads, so that feedback is just a name read earlier."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field, replace
from typing import NamedTuple, TypeAlias

from flowgraph.diagram.expression import Expression
from flowgraph.source.span import NOWHERE, Span


class Signal(NamedTuple):
    """What a wire carries: the value of an element, or a delay's samples after `tap` cells.

    `tap` is 0 for every element that is no delay, and 1 .. length for a delay.
    """

    name: str
    tap: int = 0


@dataclass(frozen=True, slots=True)
class Input:
    """A port through which samples come in."""

    name: str
    span: Span = field(default=NOWHERE, compare=False, repr=False)


@dataclass(frozen=True, slots=True)
class Term:
    """One signed, optionally scaled input of an adder: `- a1 * y1`."""

    signal: Signal
    negative: bool = False
    coefficient: Expression | None = None
    span: Span = field(default=NOWHERE, compare=False, repr=False)


@dataclass(frozen=True, slots=True)
class Adder:
    """The sum of its terms, added in the order written."""

    name: str
    terms: tuple[Term, ...]
    span: Span = field(default=NOWHERE, compare=False, repr=False)


@dataclass(frozen=True, slots=True)
class Gain:
    """A coefficient times a signal."""

    name: str
    coefficient: Expression
    signal: Signal
    span: Span = field(default=NOWHERE, compare=False, repr=False)


@dataclass(frozen=True, slots=True)
class Delay:
    """A line of `length` cells behind `signal`; tap k is the signal k samples ago.

    `starts` is empty (all cells hold 0 before the first sample) or has one expression per cell:
    `starts[k - 1]` is what tap k shows at n = 0. A line of length 1 is read by its bare name in
    text, a longer one only as `line[k]`.
    """

    name: str
    signal: Signal
    length: int = 1
    starts: tuple[Expression, ...] = ()
    span: Span = field(default=NOWHERE, compare=False, repr=False)


Element: TypeAlias = Input | Adder | Gain | Delay


@dataclass(frozen=True, slots=True)
class Output:
    """A port through which a signal leaves. Its name may be that of the element it shows."""

    name: str
    signal: Signal
    span: Span = field(default=NOWHERE, compare=False, repr=False)


def signals_read(element: Element) -> tuple[Signal, ...]:
    """The signals an element reads, in the order written."""
    match element:
        case Input():
            return ()
        case Adder(terms=terms):
            return tuple([term.signal for term in terms])  # a list is quicker here than a generator
        case Gain(signal=signal) | Delay(signal=signal):
            return (signal,)


def expressions_of(element: Element) -> tuple[Expression, ...]:
    """The expressions an element is made with, factors or starting contents, in the order written."""
    match element:
        case Input():
            return ()
        case Adder(terms=terms):
            return tuple([term.coefficient for term in terms if term.coefficient is not None])
        case Gain(coefficient=coefficient):
            return (coefficient,)
        case Delay(starts=starts):
            return starts


def redirected(element: Element, to: Mapping[Signal, Signal]) -> Element:
    """The element reading `to[signal]` in place of each signal that `to` has."""
    match element:
        case Input():
            return element
        case Adder(name, terms, span):
            if not any(term.signal in to for term in terms):
                return element
            return Adder(name, tuple(_redirected_term(term, to) for term in terms), span)
        case Gain(name, coefficient, signal, span):
            return Gain(name, coefficient, to[signal], span) if signal in to else element
        case Delay(name, signal, length, starts, span):
            return Delay(name, to[signal], length, starts, span) if signal in to else element


def _redirected_term(term: Term, to: Mapping[Signal, Signal]) -> Term:
    return Term(to[term.signal], term.negative, term.coefficient, term.span) if term.signal in to else term


def with_expressions(element: Element, change: Callable[[Expression], Expression]) -> Element:
    """The element with every coefficient and starting content replaced by `change` of it."""
    match element:
        case Input():
            return element
        case Adder(name, terms, span):
            return Adder(name, tuple(_with_coefficient(term, change) for term in terms), span)
        case Gain(name, coefficient, signal, span):
            return Gain(name, change(coefficient), signal, span)
        case Delay(name, signal, length, starts, span):
            return Delay(name, signal, length, tuple(change(start) for start in starts), span)


def _with_coefficient(term: Term, change: Callable[[Expression], Expression]) -> Term:
    return term if term.coefficient is None else replace(term, coefficient=change(term.coefficient))
