"""Typed claims -> intent and require lines."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from fractions import Fraction

from flowgraph.diagram.claim import (
    BoundedRequirement,
    Claim,
    CountRequirement,
    DiagramIntent,
    EquationIntent,
    GainRequirement,
    RatioIntent,
    StableRequirement,
)
from flowgraph.diagram.diagram import Coefficient, Diagram
from flowgraph.text.instantiate import with_renamed_coefficients
from flowgraph.text.print_expression import print_expression, print_frequency, print_number


def print_claim(claim: Claim, names: Mapping[str, str]) -> str:
    """The line of a claim; `names` are the printed names of coefficients."""
    match claim:
        case EquationIntent(output, right, history):
            before = "".join(f", {name}[-{early}] = {print_expression(value, names)}" for name, early, value in history)
            return f"intent {output}[n] = {print_expression(right, names)}{before}"
        case RatioIntent(output, input_, ratio, late):
            tail = f" late {late} samples" if late else ""
            return f"intent {output} / {input_} = {print_expression(ratio, names)}{tail}"
        case DiagramIntent():
            return _same_as(claim, names)
        case StableRequirement(number):
            return f"require {_number(number)}stable"
        case BoundedRequirement(output, input_, number):
            return f"require {_number(number)}bounded {output} / {input_}"
        case GainRequirement():
            at = print_frequency(claim.frequency)
            return f"require {_number(claim.number)}gain {claim.output} / {claim.input} at {at} {_limit(claim)}"
        case CountRequirement(counted, highest, number):
            return f"require {_number(number)}{counted} <= {highest}"


def _number(number: str) -> str:
    return f'"{number}" ' if number else ""


def _limit(claim: GainRequirement) -> str:
    low, high = claim.lowest, claim.highest
    if low is not None and high is not None:
        return f"within {_dB(low)} .. {_dB(high)} dB"
    return f">= {_dB(low)} dB" if low is not None else f"<= {_dB(high or Fraction(0))} dB"


def _dB(value: Fraction) -> str:  # noqa: N802
    return print_number(value)


def _same_as(claim: DiagramIntent, names: Mapping[str, str]) -> str:
    if len(claim.inputs) == 1:
        fed = claim.inputs[0][1]
    else:
        fed = ", ".join(f"{port} = {source}" for port, source in claim.inputs)
    given = ", ".join(f"{name} = {print_expression(value, names)}" for name, value in claim.bindings)
    return f"intent {claim.output} = {claim.other.name}({fed})" + (f" with {given}" if given else "")


def by_itself(claim: DiagramIntent) -> Diagram:
    """The diagram of a claim in its own terms: `OTHER.b0` is b0 again, and open where the claim gave it."""
    other = claim.other
    prefix = f"{other.name}."
    back = {name: name.removeprefix(prefix) for name in other.coefficients if name.startswith(prefix)}
    renamed = with_renamed_coefficients(other, back)
    given = {name for name, _ in claim.bindings}
    coefficients = {
        name: Coefficient(name, None, False, found.span) if name in given else found
        for name, found in renamed.coefficients.items()
        if name in back.values()
    }
    return replace(renamed, coefficients=coefficients)
