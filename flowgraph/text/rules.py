"""The structural rules: everything defined is read, every output comes from something, no loop lacks a delay."""

from __future__ import annotations

from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.elements import Delay, Input, expressions_of
from flowgraph.diagram.expression import Expression, names_in
from flowgraph.diagram.index import Index, index
from flowgraph.diagram.structure import holds_something, spread, unread_ends
from flowgraph.source.diagnostic import Diagnostic
from flowgraph.text import syntax as s
from flowgraph.text.coverage import judge_coverage
from flowgraph.text.define import Definer
from flowgraph.text.loop_rule import judge_loops
from flowgraph.text.scope import Scope


def judge(
    scope: Scope, diagram: Diagram, definer: Definer, unused: dict[str, s.Reference], claim_reads: set[str]
) -> None:
    """Tells every structural finding. While a line is broken, what nothing seems to read may be read there."""
    view = index(diagram)
    if not diagram.outputs and not scope.unresolved:
        scope.tell(
            Diagnostic("no-output", f"the diagram {diagram.name} has no output", diagram.span, help="add output y")
        )
    judge_loops(scope, diagram, view)
    if not scope.unresolved:
        _judge_reading(scope, diagram, view, definer, unused)
        _judge_coefs(scope, diagram, claim_reads)
        alive = _judge_silence(scope, diagram, view)
        judge_coverage(scope, diagram, view, alive)


def _judge_reading(
    scope: Scope, diagram: Diagram, view: Index, definer: Definer, unused: dict[str, s.Reference]
) -> None:
    """Every signal reaches an output, or `unused` says otherwise; every second name is read."""
    excused = scope.broken | scope.excused
    for name, reference in unused.items():
        if name in scope.signals or name in scope.aliases or name in scope.lines:
            excused.add(name)
        elif name not in excused:
            scope.tell(
                scope.fault(
                    "undefined", f"{name} is not defined", reference.start, reference.end, "take it out of this line"
                ).finding
            )
    roots = [output.signal.name for output in diagram.outputs.values()]
    roots += [
        scope.signals[name].name if name in scope.signals else name for name in excused if name not in scope.aliases
    ]
    _warn_needless(scope, diagram, unused, view)
    for at in unread_ends(view, [view.number[name] for name in roots if name in view.number]):
        name = view.names[at]
        if name in scope.defined and name not in excused:
            kind = scope.kinds.get(name.partition("[")[0], "signal")
            start, end = scope.defined[name]
            scope.tell(_unread(scope, name, "input" if kind == "input" else "signal", start, end))
    _warn_neighbours(scope, excused)
    _judge_second_names(scope, definer, excused)


def _unread(scope: Scope, name: str, kind: str, start: int, end: int) -> Diagnostic:
    return Diagnostic(
        "unread",
        f"the {kind} {name} reaches no output",
        scope.span(start, end),
        help=f"read it, take it away, or write unused {name}",
    )


def _warn_needless(scope: Scope, diagram: Diagram, unused: dict[str, s.Reference], view: Index) -> None:
    """`unused` on a name that is read after all, with `unused` itself left out of account."""
    if not unused:
        return
    shown = [output.signal.name for output in diagram.outputs.values()]
    plain = spread(view.reads, [view.number[name] for name in shown if name in view.number])
    for name, reference in unused.items():
        signal = scope.signals.get(name)
        read = (
            name in scope.read and signal is not None and signal.name in view.number and plain[view.number[signal.name]]
        )
        if read:
            span = scope.span(reference.start, reference.end)
            scope.tell(
                Diagnostic(
                    "needless-unused", f"{name} reaches an output", span, "warning", help="take it out of this line"
                )
            )


def _warn_neighbours(scope: Scope, excused: set[str]) -> None:
    """In `delay x1, x2 = x` a name that only its neighbour reads is worth a word."""
    for element, following in scope.chained:
        name = element.name
        if name not in scope.read and name not in excused:
            message = f"only its neighbour {following.name} reads {name}"
            mend = f"write unused {name} if that is meant, or one line: delay line = .. by 2"
            scope.tell(Diagnostic("neighbour", message, element.span, "warning", help=mend))


def _judge_second_names(scope: Scope, definer: Definer, excused: set[str]) -> None:
    """Wires and the outputs of used diagrams are read by name."""
    for name in scope.aliases:
        if name not in scope.read and name not in excused and name not in scope.ports and not name.endswith("[0]"):
            _tell_unread_name(scope, name)
    for full, copies in definer.copies.items():
        names = [f"{full}.{port}" for port in copies[0].diagram.outputs]
        if len(names) == 1:
            names = [full, f"{full}[{len(copies) - 1}]"]
            if not any(name in scope.read or name in excused for name in names):
                _tell_unread_name(scope, full)
            continue
        for name in names:
            if name not in scope.read and name not in excused and name not in scope.aliases:
                _tell_unread_name(scope, name)


def _tell_unread_name(scope: Scope, name: str) -> None:
    start, end = scope.defined.get(name, (0, 0))
    scope.tell(
        Diagnostic(
            "unread",
            f"{name} is read nowhere",
            scope.span(start, end),
            help=f"read it, take it away, or write unused {name}",
        )
    )


def _judge_coefs(scope: Scope, diagram: Diagram, claim_reads: set[str]) -> None:
    """Every coefficient is read by the diagram; being read by a claim is not enough."""
    seen: set[int] = set()
    reading: list[Expression] = []
    for element in diagram.elements.values():
        for expression in expressions_of(element):
            if id(expression) not in seen:
                seen.add(id(expression))
                reading.append(expression)
    read = {name for expression in reading for name in names_in(expression)}
    by_coefs: set[str] = set()
    for name, found in diagram.coefficients.items():
        if found.value is not None:
            inside = names_in(found.value)
            by_coefs |= inside
            if name not in scope.coefs:
                read |= inside
    for name, found in scope.coefs.items():
        if name in read or name in by_coefs or _may_be_read(scope, name):
            continue
        if name in claim_reads or name in scope.claimed:
            scope.tell(
                Diagnostic(
                    "unread-coef",
                    f"only claims read the coefficient {name}",
                    found.span,
                    help="the diagram itself must read it",
                )
            )
        else:
            scope.tell(
                Diagnostic(
                    "unread-coef",
                    f"the coefficient {name} is read nowhere",
                    found.span,
                    help="read it, or take it away",
                )
            )


def _may_be_read(scope: Scope, name: str) -> bool:
    first = name.partition("[")[0]
    return not {name, first}.isdisjoint(scope.broken | scope.excused)


def _judge_silence(scope: Scope, diagram: Diagram, view: Index) -> set[str]:
    """The outputs that some input or starting content reaches; the others are 0 for ever, an error."""
    sources = [
        at
        for at, element in enumerate(diagram.elements.values())
        if isinstance(element, Input) or (isinstance(element, Delay) and holds_something(element))
    ]
    reached = spread(view.readers, sources)
    alive: set[str] = set()
    for output in diagram.outputs.values():
        if reached[view.number[output.signal.name]]:
            alive.add(output.name)
        else:
            scope.tell(
                Diagnostic(
                    "silent-output",
                    f"the output {output.name} is 0 for ever: no input and no starting content reaches it",
                    output.span,
                )
            )
    return alive
