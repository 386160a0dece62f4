"""Verdicts on requirements, at the numbers of the file or of a use."""

from __future__ import annotations

from fractions import Fraction

from flowgraph.algebra.exact_rings import TooLarge
from flowgraph.algebra.frequency import BITS, ResponseAt, response_at
from flowgraph.algebra.numbers import numbered
from flowgraph.algebra.stability import stability_of_factors
from flowgraph.algebra.stability_at_values import StabilityVerdict, stability_at_values
from flowgraph.algebra.transfer import factors_in_z, number_transfers, roots_in_z
from flowgraph.algebra.values import NoExactValueError, OpenCoefficientError
from flowgraph.claims.intents import cone
from flowgraph.claims.verdict import Outcome, Verdict
from flowgraph.claims.wording import claim_text
from flowgraph.diagram.claim import (
    BoundedRequirement,
    CountRequirement,
    GainRequirement,
    Requirement,
    StableRequirement,
)
from flowgraph.diagram.diagram import Diagram, count


def verdict_on_requirement(requirement: Requirement, diagram: Diagram) -> Verdict:
    """The verdict with the coefficient values that the diagram has."""
    try:
        match requirement:
            case StableRequirement():
                return _stable(requirement, diagram)
            case BoundedRequirement():
                return _bounded(requirement, diagram)
            case GainRequirement():
                return _gain(requirement, diagram)
            case CountRequirement():
                return _count(requirement, diagram)
    except OpenCoefficientError as error:
        reason = f"the coefficient {error.name} is open: judged where {diagram.name} is used, or try --with"
    except NoExactValueError as error:
        reason = str(error)
    except TooLarge:
        reason = "the exact polynomials grow beyond the work limit"
    return _verdict(requirement, diagram, "undecided", "none", reason)


def _verdict(
    requirement: Requirement,
    diagram: Diagram,
    outcome: Outcome,
    method: str,
    reason: str = "",
    conditions: tuple[str, ...] = (),
) -> Verdict:
    return Verdict(
        claim_text(requirement, diagram),
        requirement.span,
        outcome,
        method,
        reason=reason,
        conditions=conditions,
        number=requirement.number,
    )


def _stable(requirement: StableRequirement, diagram: Diagram) -> Verdict:
    found = stability_at_values(diagram)
    method = "exact" if found.exact else "certified"
    match found.stability:
        case "stable":
            return _verdict(requirement, diagram, "proved", method)
        case "marginal":
            reason = f"marginal: a mode stays for ever, {_told(found)}"
            return _verdict(requirement, diagram, "refuted", method, reason)
        case "unstable":
            return _verdict(requirement, diagram, "refuted", method, f"unstable: {_told(found)}")
        case None if found.exact:
            # Whether such modes also grow is not told for so many cells; they do not decay either way.
            return _verdict(requirement, diagram, "refuted", method, f"repeated modes stay for ever, {_told(found)}")
        case None:
            reason = f"too close to the limit to tell: {_told(found)}"
            return _verdict(requirement, diagram, "undecided", method, reason)


def _told(found: StabilityVerdict) -> str:
    if found.largest is None:
        return "largest pole not computed"
    real, imaginary = found.largest
    radius = (real * real + imaginary * imaginary) ** 0.5
    return f"largest pole radius {radius:.9g} at z = {real:.6g}" + (f" +- {abs(imaginary):.6g}i" if imaginary else "")


def _bounded(requirement: BoundedRequirement, diagram: Diagram) -> Verdict:
    """The poles of the response in lowest terms; those that cancelled are told as conditions."""
    numbers = numbered(cone(diagram, requirement.output))
    if not numbers.exact:
        whole = stability_at_values(diagram)
        if whole.stability == "stable":
            return _verdict(requirement, diagram, "proved", "certified")
        reason = "cancelled poles are found only where all coefficients are fractions"
        return _verdict(requirement, diagram, "undecided", "certified", reason)
    solved = number_transfers(numbers.diagram)
    transfer = solved.transfers[(requirement.output, requirement.input)]
    stability, _ = stability_of_factors([transfer.denominator])
    if stability != "stable":
        poles = [root for factor, _ in factors_in_z([transfer.denominator], 0) for root in roots_in_z(factor)]
        real, imaginary, _ = max(poles, key=lambda root: root[0] ** 2 + root[1] ** 2)
        radius = (real * real + imaginary * imaginary) ** 0.5
        reason = f"{stability}: a pole of radius {radius:.9g} reaches the output"
        return _verdict(requirement, diagram, "refuted", "exact", reason)
    whole_stability, _ = stability_of_factors(solved.determinants())
    if whole_stability == "stable":
        return _verdict(requirement, diagram, "proved", "exact")
    cancelled = f"{whole_stability} modes cancel in {requirement.output} / {requirement.input} (analyse lists them)"
    return _verdict(requirement, diagram, "proved", "exact", conditions=(cancelled,))


def _gain(requirement: GainRequirement, diagram: Diagram) -> Verdict:
    """|H|^2 against the squared limits: certified balls, and exactly where a limit is met."""
    if diagram.rate is None:
        return _verdict(requirement, diagram, "undecided", "none", "no rate is given, so a frequency has no meaning")
    alone = cone(diagram, requirement.output)
    response = response_at(alone, requirement.output, requirement.input, requirement.frequency / diagram.rate)
    method = "certified"
    for limit, wanted in ((requirement.lowest, 1), (requirement.highest, -1)):
        if limit is None:
            continue
        side = response.side_of(limit)
        if side is None:
            return _verdict(requirement, diagram, "undecided", method, _why_untold(response, limit))
        if side == -wanted:
            return _verdict(requirement, diagram, "refuted", method, f"the gain there is {response.decibels()}")
        if side == 0:
            method = "exact"  # a limit that is met is decided by polynomials, not by enclosures
    return _verdict(requirement, diagram, "proved", method, f"the gain there is {response.decibels()}")


def _why_untold(response: ResponseAt, limit: Fraction) -> str:
    if response.squared_gain(BITS[-1]).is_finite():
        return f"within 1e-12 of the limit {limit} dB"
    return "a pole lies at this frequency, or too close to tell"


def _count(requirement: CountRequirement, diagram: Diagram) -> Verdict:
    counts = count(diagram)
    number = counts.cells if requirement.counted == "cells" else counts.multiplies
    outcome: Outcome = "proved" if number <= requirement.highest else "refuted"
    counted = requirement.counted.removesuffix("s") if number == 1 else requirement.counted
    return _verdict(requirement, diagram, outcome, "counted", f"{number} {counted.replace('multiplie', 'multiply')}")
