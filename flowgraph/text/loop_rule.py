"""Delay-free loops, each told with its whole path and every wire with its line."""

from __future__ import annotations

from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.elements import Adder, Element, Gain
from flowgraph.diagram.index import Index
from flowgraph.diagram.structure import delay_free_loops
from flowgraph.source.diagnostic import Diagnostic, Note
from flowgraph.source.span import Span
from flowgraph.text.scope import Scope

SHOWN = 20
"""The most loops that are told."""
LONGEST_PATH = 200
"""The most wires of one loop that are told one by one."""


def judge_loops(scope: Scope, diagram: Diagram, view: Index) -> None:
    """Tells the loops of this diagram; those that lie inside a used diagram are told there."""
    told = 0
    for loop in delay_free_loops(view):
        names = [view.names[at] for at in loop]
        if _inside_use(scope, names):
            continue
        if told == SHOWN:
            message = f"there are more loops without a delay than these {SHOWN}"
            scope.tell(Diagnostic("more-loops", message, diagram.span, help="mend those told first"))
            break
        scope.findings.append(_loop(diagram, names))
        told += 1


def _inside_use(scope: Scope, names: list[str]) -> bool:
    """Whether every element of a loop came from one use."""
    paths = {name.partition(".")[0] for name in names}
    return len(paths) == 1 and all("." in name for name in names)


def _loop(diagram: Diagram, names: list[str]) -> Diagnostic:
    """One loop along the signal; each wire is told where it is read."""
    following = names[1:] + names[:1]
    notes = tuple(
        Note(f"{reader} reads {name}", _wire(diagram.elements[reader], name))
        for name, reader in zip(names, following, strict=True)
    )
    path = " -> ".join([*names, names[0]])
    if len(names) > LONGEST_PATH:
        path = " -> ".join([*names[:3], f".. ({len(names)} elements)", names[-1], names[0]])
        notes = (*notes[:LONGEST_PATH], Note(f"and {len(names) - LONGEST_PATH} wires more"))
    last = names[-1]
    cell = f"{last.replace('.', '_').replace('[', '_').replace(']', '')}1"
    return Diagnostic(
        "delay-free-loop",
        f"a loop without a delay: {path}",
        _place(diagram.elements[names[0]]),
        notes=notes,
        help=f"put a delay into one of these wires, for instance delay {cell} = {last} and {cell} in {names[0]}, "
        "or take one of the wires away",
    )


def _place(element: Element) -> Span:
    return element.span


def _wire(element: Element, source: str) -> Span:
    """Where an element reads a source."""
    match element:
        case Adder(terms=terms):
            return next(term.span for term in terms if term.signal.name == source)
        case Gain(span=span):
            return span
        case _:
            return element.span
