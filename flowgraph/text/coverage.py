"""Every output is covered by intents: for each input that reaches it, and for the starting contents."""

from __future__ import annotations

from flowgraph.diagram.claim import DiagramIntent, EquationIntent, RatioIntent
from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.index import Index
from flowgraph.diagram.structure import holds_something, spread
from flowgraph.source.diagnostic import Diagnostic
from flowgraph.text.scope import Scope


def judge_coverage(scope: Scope, diagram: Diagram, view: Index, alive: set[str]) -> None:
    """Tells which intents are missing. Outputs that a broken claim names are left alone."""
    whole = {found.output for found in diagram.claims if isinstance(found, EquationIntent | DiagramIntent)}
    ratios = {(found.output, found.input) for found in diagram.claims if isinstance(found, RatioIntent)}
    known: dict[str, list[bool]] = {}
    for output in diagram.outputs.values():
        if output.name in whole or output.name not in alive or output.name in scope.claimed:
            continue
        source = output.signal.name
        if source not in known:
            known[source] = spread(view.reads, [view.number[source]])
        behind = known[source]
        inputs = [port.name for port in diagram.inputs() if behind[view.number[port.name]]]
        held = [delay.name for delay in diagram.delays() if holds_something(delay) and behind[view.number[delay.name]]]
        missing = [name for name in inputs if (output.name, name) not in ratios]
        if held or (missing and len(missing) == len(inputs)):
            _tell_all(scope, output.name, held, bool(missing))
        else:
            for name in missing:
                scope.tell(
                    Diagnostic(
                        "claim-missing",
                        f"no intent for {output.name} / {name}",
                        scope.ports[output.name],
                        help=f"add intent {output.name} / {name} = ..",
                    )
                )


def _tell_all(scope: Scope, output: str, held: list[str], missing: bool) -> None:
    why = "" if missing or not held else f": {held[0]} starts with contents that no ratio covers"
    scope.tell(
        Diagnostic(
            "claim-missing", f"no intent for {output}{why}", scope.ports[output], help=f"add intent {output}[n] = .."
        )
    )
