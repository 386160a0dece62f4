"""All claims of a diagram, and those of the diagrams it uses at the values given there."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import replace

from flowgraph.claims.intents import verdict_on_intent
from flowgraph.claims.requirements import verdict_on_requirement
from flowgraph.claims.verdict import Verdict
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
from flowgraph.diagram.diagram import Diagram, Use
from flowgraph.text.instantiate import with_renamed_coefficients


def verify_all(
    diagrams: list[Diagram], included: set[str], progress: Callable[[float], None]
) -> list[tuple[Diagram, list[Verdict]]]:
    """The verdicts on each diagram, where what needs values is judged at the uses among them.

    A requirement of a diagram with open coefficients is undecided only when none of the diagrams
    gives it values; diagrams that merely came along in an include (`included`) need no values.
    `progress` is told the share of claims judged so far.
    """
    given_values = included | {use.diagram.name for user in diagrams if not _is_open(user) for use in _open_uses(user)}
    judged: list[tuple[Diagram, list[Verdict]]] = []
    done, whole = 0, sum(len(diagram.claims) for diagram in diagrams)
    for diagram in diagrams:
        left_to_uses = _is_open(diagram) and diagram.name in given_values
        kept = [claim for claim in diagram.claims if not (left_to_uses and _needs_values(claim))]
        verdicts: list[Verdict] = []
        for verdict in _verdicts(replace(diagram, claims=tuple(kept))):
            verdicts.append(verdict)
            done += 1
            progress(min(1.0, done / max(1, whole)))
        judged.append((diagram, verdicts))
    return judged


def verify(diagram: Diagram) -> list[Verdict]:
    """The verdicts on the claims of one diagram in the order of the file, then those at its uses."""
    return list(_verdicts(diagram))


def _verdicts(diagram: Diagram) -> Iterator[Verdict]:
    for claim in diagram.claims:
        match claim:
            case EquationIntent() | RatioIntent() | DiagramIntent():
                yield verdict_on_intent(claim, diagram)
            case StableRequirement() | BoundedRequirement() | GainRequirement() | CountRequirement():
                yield verdict_on_requirement(claim, diagram)
    yield from _at_uses(diagram)


def _needs_values(claim: Claim) -> bool:
    """Whether the verdict depends on the numbers: then a used diagram is judged at each use."""
    return isinstance(claim, StableRequirement | BoundedRequirement | GainRequirement)


def _is_open(diagram: Diagram) -> bool:
    """Whether a coefficient has no value: such a diagram is judged at its uses."""
    return any(coefficient.value is None for coefficient in diagram.coefficients.values())


def _at_uses(diagram: Diagram) -> list[Verdict]:
    """The requirements of used diagrams that have open coefficients, at each use; equal uses once."""
    if _is_open(diagram):
        return []
    verdicts: list[Verdict] = []
    judged: set[tuple[str, str]] = set()
    for use in _open_uses(diagram):
        values = repr([diagram.coefficients[f"{use.path}.{name}"].value for name in use.diagram.coefficients])
        if (use.diagram.name, values) in judged:
            continue
        judged.add((use.diagram.name, values))
        there = at_use(use, diagram)
        verdicts.extend(
            replace(verdict_on_requirement(claim, there), use=use.span, used_as=use.path)
            for claim in use.diagram.claims
            if isinstance(claim, StableRequirement | BoundedRequirement | GainRequirement)
        )
    return verdicts


def _open_uses(diagram: Diagram) -> list[Use]:
    """All uses of diagrams with open coefficients, at any depth, by their whole path."""
    found: list[Use] = []
    waiting = list(reversed(diagram.uses))
    while waiting:
        use = waiting.pop()
        if _is_open(use.diagram):
            found.append(use)
            waiting.extend(replace(inner, path=f"{use.path}.{inner.path}") for inner in reversed(use.diagram.uses))
    return found


def at_use(use: Use, user: Diagram) -> Diagram:
    """The used diagram with its coefficients as the user has them: each named by the path of the use."""
    names = {name: f"{use.path}.{name}" for name in use.diagram.coefficients}
    rate = use.diagram.rate if use.diagram.rate is not None else user.rate
    return replace(with_renamed_coefficients(use.diagram, names), coefficients=user.coefficients, rate=rate)
