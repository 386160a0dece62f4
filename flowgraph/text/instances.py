"""Spells out repeats: every line of a diagram with the variables it stands under, in the order of the file."""

from __future__ import annotations

from collections.abc import Iterator
from typing import NamedTuple

from flowgraph.text import syntax as s
from flowgraph.text.exact import ELEMENTS
from flowgraph.text.meaning import whole
from flowgraph.text.scope import Env, Fault, Scope
from flowgraph.text.words import names_in_text, starts_a_claim


class Instance(NamedTuple):
    """A line at one setting of the repeat variables around it."""

    node: s.Node
    env: Env
    start: int
    end: int


def instances(scope: Scope, body: tuple[s.BodyLine, ...], env: Env, times: int = 1) -> Iterator[Instance]:
    """All lines of a body, which itself stands in repeats that run `times` times in all.

    A repeat that cannot be spelled out is told and left out. Raises Fault beyond the stated bound.
    """
    for line in body:
        if isinstance(line, s.Statement):
            scope.grow(1, line.start, line.end)
            yield Instance(line.node, env, line.start, line.end)
        elif isinstance(line, s.Repeat):
            if line.start in scope.left_out:
                continue
            try:
                values = _values(scope, line, env, times)
            except Fault as fault:
                scope.tell(fault.finding)
                scope.left_out.add(line.start)
                leave_out(scope, line)
                continue
            name = line.head.variable.text
            for value in values:
                scope.grow(0 if line.body else 1, line.start, line.end)
                yield from instances(scope, line.body, {**env, name: value}, times * len(values))


def _values(scope: Scope, line: s.Repeat, env: Env, times: int) -> range | tuple[str, ...]:
    """What the variable of a repeat runs through. Raises Fault."""
    head = line.head
    variable = head.variable
    if variable.text in env or variable.text in scope.consts:
        raise scope.fault(
            "defined-twice",
            f"{variable.text} has a meaning here already",
            variable.start,
            variable.end,
            "give the variable of this repeat another name",
        )
    if isinstance(head, s.RepeatIn):
        return tuple(label.text for label in head.labels)
    first = whole(scope, head.first, env, "an end of a range")
    last = whole(scope, head.last, env, "an end of a range")
    fixed_range = env.keys().isdisjoint(names_in_text(scope.source.text[head.first.start : head.last.end]))
    if (last - first + 1) * max(1, len(line.body)) * (times if fixed_range else 1) > ELEMENTS:
        raise scope.fault("too-large", f"this repeat stands for more than {ELEMENTS} lines", line.start, line.end)
    if first > last + 1:
        raise scope.fault("range", f"this range ends before it begins: {first} .. {last}", line.start, line.end)
    return range(first, last + 1)


def leave_out(scope: Scope, line: s.Repeat | s.Broken) -> None:
    """Everything named in a line that cannot be used may be defined or read there: no finding follows from it.

    In a claim it may only be read; the diagram itself is whole without it.
    """
    end = line.end
    if isinstance(line, s.Repeat):
        inner = line.body
        while inner:
            last = inner[-1]
            end = last.end
            inner = last.body if isinstance(last, s.Repeat) else ()
    text = scope.source.text
    if starts_a_claim(text, line.start):
        scope.claimed.update(names_in_text(text[line.start : end]))
    elif isinstance(line, s.Repeat):
        scope.broken.update(names_in_text(text[line.start : end]))
        scope.give_up(line.start, end)
    else:
        scope.give_up(line.start, end)
