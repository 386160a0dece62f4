"""Sections that must stay where they are, because others hold back what would grow in them.

In `u = x - x[n-6]`, `y = u + y[n-1]` the first section cancels the mode at z = 1 of the second. Taken
first, the second would add up whatever comes in, without bound: the same output, from a signal that
overflows. No cell is worth that.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from fractions import Fraction
from typing import TYPE_CHECKING

from flowgraph.diagram.diagram import Coefficient, Diagram
from flowgraph.diagram.elements import Adder, Delay, Element, Gain, Input, Output, Signal, Term
from flowgraph.diagram.expression import Number
from flowgraph.passes.linear import expression_of
from flowgraph.passes.network import Network
from flowgraph.passes.sections import Section

if TYPE_CHECKING:
    from flint import fmpq_poly, fmpz_poly

_MOST_MODES = 64
"""A section with more modes of its own is taken to decay."""


def movable(network: Network, chains: list[list[Section]]) -> list[list[Section]]:
    """The chains, cut at each section with an undamped mode that another of its chain cancels."""
    valued = _valued(network.diagram.coefficients)
    found: list[list[Section]] = []
    for chain in chains:
        alone = [_as_diagram(network, section, valued) for section in chain]
        undamped = [
            _undamped_factors(diagram) if _has_loop(network, section) else []
            for section, diagram in zip(chain, alone, strict=True)
        ]
        found.extend(_cut(chain, alone, undamped) if any(undamped) else [chain])
    return found


def _has_loop(network: Network, section: Section) -> bool:
    return any(wire.node in section.members for node in section.members for wire in network.wires[node])


def _cut(chain: list[Section], alone: list[Diagram], undamped: list[list[fmpz_poly]]) -> list[list[Section]]:
    responses = [_response(diagram) for diagram in alone]
    parts: list[list[Section]] = [[]]
    for at, section in enumerate(chain):
        others = [response for other, response in enumerate(responses) if other != at and response is not None]
        if any(not response.numerator.numer() % factor for factor in undamped[at] for response in others):
            parts.append([])
        else:
            parts[-1].append(section)
    return [part for part in parts if len(part) > 1]


def _undamped_factors(section: Diagram) -> list[fmpz_poly]:
    """The factors of the section's denominator (in w = z^-1) whose modes do not decay."""
    from flowgraph.algebra.stability import modes_of_factor

    response = _response(section)
    if response is None:
        return []
    # p(w^m) has its modes on the same side as p(w), and there are fewer to look at.
    inner, spread = response.denominator.numer().deflation()
    if inner.degree() > _MOST_MODES:
        return []
    return [factor.inflate(spread) for factor, _ in inner.factor()[1] if modes_of_factor(factor) != "inside"]


@dataclass(frozen=True, slots=True)
class _Response:
    numerator: fmpq_poly
    denominator: fmpq_poly


def _response(section: Diagram) -> _Response | None:
    """The section's transfer function in lowest terms; None where it has no numbers or is too large.

    Open coefficients are taken as small numbers, so that only what cancels for all values counts.
    """
    from flowgraph.algebra.exact_rings import TooLarge
    from flowgraph.algebra.numbers import numbered
    from flowgraph.algebra.transfer import number_transfers
    from flowgraph.algebra.values import NoExactValueError

    try:
        transfers = number_transfers(numbered(section).diagram).transfers
    except (TooLarge, NoExactValueError, ZeroDivisionError):
        return None
    [transfer] = transfers.values()
    return _Response(transfer.numerator, transfer.denominator)


def _as_diagram(network: Network, section: Section, coefficients: Mapping[str, Coefficient]) -> Diagram:
    """The section alone, with lines of its own, all contents 0."""
    lines: dict[str, int] = {}
    elements: dict[str, Element] = {section.entry: Input(section.entry)}
    for node in sorted(section.members):
        terms: list[Term] = []
        for wire in network.wires[node]:
            read = Signal(f"{wire.node} line", wire.late) if wire.late else Signal(wire.node)
            lines[wire.node] = max(wire.late, lines.get(wire.node, 0))
            terms.append(Term(read, wire.weight.negative, wire.weight.coefficient))
        if len(terms) == 1:
            elements[node] = Gain(node, expression_of(network.wires[node][0].weight), terms[0].signal)
        else:
            elements[node] = Adder(node, tuple(terms))
    for node, length in lines.items():
        if length:
            elements[f"{node} line"] = Delay(f"{node} line", Signal(node), length)
    return Diagram("section", elements, {"out": Output("out", Signal(section.exit))}, coefficients)


def _valued(coefficients: Mapping[str, Coefficient]) -> dict[str, Coefficient]:
    """The coefficients, open ones near 1/16 and all different."""
    return {
        name: found if found.value is not None else Coefficient(name, Number(Fraction(1, 17 + at)))
        for at, (name, found) in enumerate(coefficients.items())
    }
