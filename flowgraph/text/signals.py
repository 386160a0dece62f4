"""References to signals -> the element or cell they read, through wires, lines and used diagrams."""

from __future__ import annotations

from flowgraph.diagram.elements import Signal
from flowgraph.source.diagnostic import Note
from flowgraph.text import syntax as s
from flowgraph.text.meaning import index, plain_index, whole
from flowgraph.text.names import refuse_label, undefined
from flowgraph.text.scope import Env, Fault, Scope


def is_signal(scope: Scope, reference: s.Reference, env: Env) -> bool:
    """Whether a reference names something that carries samples (and not a coefficient or a number)."""
    name = reference.name
    if not reference.parts and (name in env or name in scope.consts or name in ("rate", "half", "pi")):
        return False
    if name in scope.kinds:
        return scope.kinds[name] not in ("coefficient", "const")
    return True


def signal(scope: Scope, reference: s.Reference, env: Env) -> Signal:
    """The element or cell behind a reference, wires followed; its names count as read. Raises Fault."""
    passed: dict[str, None] = {}
    while True:
        name, found = _direct(scope, reference, env)
        scope.read.add(name)
        found = found or scope.followed.get(name)
        if found is not None:
            for wire in passed:
                scope.followed[wire] = found
            return found
        if name in passed:
            wires = list(passed)
            raise _circle(scope, wires[wires.index(name) :])
        passed[name] = None
        alias = scope.aliases[name]
        reference, env = alias.target, alias.env


def _circle(scope: Scope, names: list[str]) -> Fault:
    """The finding for wires that only name each other; it is told at the first of them in the file."""
    first = min(names, key=lambda name: scope.aliases[name].start)
    turn = names.index(first)
    names = names[turn:] + names[:turn]
    notes = tuple(
        Note(f"{name} is {following}", scope.span(scope.aliases[name].start, scope.aliases[name].end))
        for name, following in zip(names, names[1:] + names[:1], strict=True)
    )
    path = " -> ".join([*names, names[0]])
    alias = scope.aliases[first]
    return scope.fault(
        "wire-circle",
        f"these wires run in a circle: {path}",
        alias.start,
        alias.end,
        "connect one of them to an element",
        notes,
    )


def _direct(scope: Scope, reference: s.Reference, env: Env) -> tuple[str, Signal | None]:
    """The full name and the signal it carries; None where the name is an alias. Raises Fault."""
    name = reference.name
    for part in reference.parts:
        if isinstance(part, str):
            name += f".{part}"
        elif name in scope.lines:
            return _tap(scope, name, part, reference, env)
        else:
            plain = plain_index(part, env)
            name += f"[{_member(scope, name, reference, part, env) if plain is None else plain}]"
    found = scope.signals.get(name)
    if found is None and name not in scope.aliases:
        refuse_label(scope, reference, env)
        raise _nothing(scope, name, reference, env)
    return name, found


def _member(scope: Scope, name: str, reference: s.Reference, part: s.At, env: Env) -> int | str:
    """An index, unless it is a time such as n - 1. Raises Fault, silent where `name` may be a line told before."""
    try:
        return index(scope, part, env)
    except Fault:
        if name in scope.broken:
            raise scope.silent() from None
        _refuse_time(scope, reference, part, env)
        raise


def _tap(scope: Scope, line: str, last: s.At, reference: s.Reference, env: Env) -> tuple[str, Signal | None]:
    """line[k]: behind k cells; line[0] is what the line reads."""
    length = scope.lines[line]
    if isinstance(last.place, s.Reference) and last.place.name == "end" and not last.place.parts:
        tap = length
    else:
        _refuse_time(scope, reference, last, env)
        tap = whole(scope, last.place, env, "a tap")
    if tap == 0:
        scope.read.add(line)
        return f"{line}[0]", None
    if not 1 <= tap <= length:
        raise scope.fault(
            "tap-range",
            f"{line}[{tap}] lies outside the line: {line} has {length} cells",
            reference.start,
            reference.end,
            f"a tap is {line}[0] .. {line}[{length}]",
        )
    scope.read.add(line)
    return line, Signal(line, tap)


def _refuse_time(scope: Scope, reference: s.Reference, last: s.At, env: Env) -> None:
    """x[n-1] in an element line is answered with the two lines to write."""
    late = _late(last.place)
    if late is None or "n" in env:
        return
    name = scope.source.text[reference.start : last.place.start].rstrip("[ ")
    if late == 0:
        raise scope.fault(
            "time-index",
            f"n stands only in intents; {name}[n] is written {name}",
            reference.start,
            reference.end,
            f"write {name}",
        )
    if late == 1:
        raise scope.fault(
            "time-index",
            "n stands only in intents; a sample of the past comes out of a delay",
            reference.start,
            reference.end,
            f"write two lines: delay {name}1 = {name}, and here {name}1",
        )
    raise scope.fault(
        "time-index",
        "n stands only in intents; a sample of the past comes out of a delay",
        reference.start,
        reference.end,
        f"write two lines: delay {name}_line = {name} by {late}, and here {name}_line[{late}]",
    )


def _late(expr: s.Expr) -> int | None:
    """How many samples an index n - k lies back; None if it does not begin with n."""
    match expr:
        case s.Reference("n", ()):
            return 0
        case s.Total((s.Signed(False, s.Reference("n", ())), s.Signed(True, s.Figure(value, "")))):
            return int(value)
        case s.Total((s.Signed(False, s.Reference("n", ())), *_)):
            return 1
        case _:
            return None


def _nothing(scope: Scope, name: str, reference: s.Reference, env: Env) -> Fault:
    """Why a reference carries no signal."""
    first = reference.name
    start, end = reference.start, reference.end
    if name in scope.broken or first in scope.broken:
        return scope.silent()
    if name in scope.lines:
        length = scope.lines[name]
        return scope.fault(
            "line-bare",
            f"{name} is a line of {length} cells and is read at a tap",
            start,
            end,
            f"write {name}[end] for the last cell, or {name}[k]",
        )
    kind = scope.kinds.get(first)
    if kind == "coefficient" or first in env or first in scope.consts or first in ("pi", "rate", "half"):
        return scope.fault(
            "coef-as-signal",
            f"{name} is no signal",
            start,
            end,
            "a coefficient stands in front of a signal: coef * signal",
        )
    if kind == "use" and name == first:
        inner = [known.removeprefix(f"{first}.") for known in scope.defined if known.startswith(f"{first}.")]
        return scope.fault(
            "use-bare",
            f"{first} has several outputs",
            start,
            end,
            "write " + " or ".join(f"{first}.{port}" for port in inner),
        )
    if kind in ("use", "cascade") and isinstance(reference.parts[-1], str):
        outputs = [known for known in scope.defined if known == first or known.startswith((f"{first}.", f"{first}["))]
        return scope.fault(
            "inner-signal", f"{name} is no output of the diagram used there", start, end, _members(outputs)
        )
    if kind is not None:
        members = [known for known in scope.defined if known.startswith((f"{first}[", f"{first}.")) or known == first]
        return scope.fault("undefined", f"{name} is not defined", start, end, _members(members))
    return undefined(scope, name, reference)


def _members(members: list[str]) -> str:
    """What there is of a family."""
    if len(members) > 4:
        return f"there are {members[0]}, {members[1]}, .. {members[-1]}"
    return f"there is {', '.join(members)}" if len(members) == 1 else f"there are {', '.join(members)}"
