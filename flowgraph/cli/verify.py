"""`flowgraph verify`: each claim proved, refuted or undecided."""

from __future__ import annotations

import argparse
import json
import sys
from textwrap import wrap

from flowgraph.claims.verdict import Counterexample, Verdict
from flowgraph.claims.verify import verify_all
from flowgraph.claims.wording import claim_text
from flowgraph.cli.files import add_file_arguments, choose
from flowgraph.cli.progress import progress_bar
from flowgraph.diagram.diagram import Diagram

HELP = "each claim proved, refuted or undecided"


def configure(parser: argparse.ArgumentParser) -> None:
    """The options of this command."""
    add_file_arguments(parser)


def execute(options: argparse.Namespace) -> int:
    """Prints the verdicts: 0 when all are proved, 1 with a refutation, 3 with something undecided."""
    chosen = choose(options, "claims", every=True)
    judged = verify_all(chosen.diagrams, chosen.included, progress_bar("verify"))
    if options.json:
        told = {"diagrams": [_told(diagram, verdicts) for diagram, verdicts in judged]}
        print(json.dumps(told, indent=2, ensure_ascii=False))
    else:
        for at, (diagram, verdicts) in enumerate(judged):
            print(("\n" if at else "") + _page(diagram, verdicts))
    outcomes = {verdict.outcome for _, verdicts in judged for verdict in verdicts}
    return 1 if "refuted" in outcomes or chosen.errors else 3 if "undecided" in outcomes else 0


def _told(diagram: Diagram, verdicts: list[Verdict]) -> dict[str, object]:
    return {"name": diagram.name, "verdicts": [_verdict_told(verdict) for verdict in verdicts]}


def _verdict_told(verdict: Verdict) -> dict[str, object]:
    shown = verdict.counterexample
    return {
        "claim": verdict.claim,
        "number": verdict.number,
        "file": verdict.span.file,
        "line": verdict.span.line,
        "column": verdict.span.column,
        "verdict": verdict.outcome,
        "method": verdict.method,
        "error_below": verdict.error_below,
        "conditions": list(verdict.conditions),
        "reason": verdict.reason,
        "set": "base",
        "use": None if verdict.use is None else {"name": verdict.used_as, "place": str(verdict.use)},
        "counterexample": None if shown is None else _counterexample_told(shown),
        "explained_by": None,
    }


def _counterexample_told(shown: Counterexample) -> dict[str, object]:
    return {
        "output": shown.output,
        "input": shown.source,
        "sample": shown.sample,
        "diagram": shown.diagram,
        "claim": shown.claim,
        "coefficients": dict(shown.coefficients),
    }


def _page(diagram: Diagram, verdicts: list[Verdict]) -> str:
    """The verdicts of one diagram for reading, at most 80 columns wide."""
    lines = [f"{diagram.name}: " + (_summary(verdicts) if verdicts else "nothing to prove here")]
    for verdict in verdicts:
        head = f"  {_coloured(verdict.outcome):<9}  "
        claim = _wrapped(verdict.claim, "    ")
        lines.append(head + claim[0])
        lines.extend(f"  {'':<9}  {more}" for more in claim[1:])
        for remark in _remarks(verdict):
            lines.extend(f"  {'':<9}  {part}" for part in _wrapped(f"  {remark}", "    "))
    for claim_left in _left_to_uses(diagram, verdicts):
        lines.extend(f"  {part}" for part in _wrapped(f"at uses    {claim_left}", " " * 15))
    return "\n".join(lines)


def _wrapped(text: str, indent: str) -> list[str]:
    return wrap(text, 67, subsequent_indent=indent, break_long_words=False, break_on_hyphens=False)


def _left_to_uses(diagram: Diagram, verdicts: list[Verdict]) -> list[str]:
    """The claims without a verdict: they need values, and open coefficients get theirs where the diagram is used."""
    judged = {verdict.span for verdict in verdicts}
    return [f"{claim_text(claim, diagram)} ({claim.span})" for claim in diagram.claims if claim.span not in judged]


def _summary(verdicts: list[Verdict]) -> str:
    counts = {outcome: sum(v.outcome == outcome for v in verdicts) for outcome in ("proved", "refuted", "undecided")}
    return ", ".join(f"{number} {outcome}" for outcome, number in counts.items() if number)


def _coloured(outcome: str) -> str:
    if not sys.stdout.isatty():
        return outcome
    colour = {"proved": "32", "refuted": "31", "undecided": "33"}[outcome]
    return f"\x1b[{colour}m{outcome:<9}\x1b[0m"


def _remarks(verdict: Verdict) -> list[str]:
    """By which road, at what place, on what it rests, and what shows the contrary."""
    road = verdict.method
    if verdict.error_below:
        road = f"{verdict.method}, error below 2^-{verdict.error_below}"
    remarks = [f"{road} ({verdict.span})" if road != "none" else str(verdict.span)]
    if verdict.use is not None:
        remarks.append(f"with the values given to {verdict.used_as} ({verdict.use})")
    if verdict.reason:
        remarks.append(verdict.reason)
    if verdict.conditions:
        remarks.append(f"rests on: {', '.join(verdict.conditions)}")
    shown = verdict.counterexample
    if shown is not None:
        cause = f"a unit pulse at {shown.source}" if shown.source else "the starting contents alone"
        remarks.append(f"shown by {cause}: {shown.output}[{shown.sample}] is {shown.diagram}, claimed {shown.claim}")
        if shown.coefficients:
            remarks.append("at " + ", ".join(f"{name} = {value}" for name, value in shown.coefficients))
    return remarks
