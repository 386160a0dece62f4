"""How large diagrams become, found from their lines alone, before a single copy of a used one is made.

Two uses of two uses of .. double at every level: without this, each level would be built to the
bound before the next is refused.
"""

from __future__ import annotations

import os
from dataclasses import dataclass, field
from fractions import Fraction

from flowgraph.text import syntax as s
from flowgraph.text.coefs import define_consts, define_rate, measure_arrays
from flowgraph.text.define import cells_of_line
from flowgraph.text.exact import ELEMENTS, LEVELS
from flowgraph.text.instances import Instance, instances
from flowgraph.text.place import rows_of_cascade
from flowgraph.text.program import Elaborated, Program
from flowgraph.text.scope import Fault, Scope

LARGE = ELEMENTS // 64
"""Used diagrams of at least this size are left alone where a diagram that is built from them is refused."""


def refuse_large(program: Program) -> None:
    """Settles every diagram that grows beyond the bound by what it uses, and the large ones it is built from."""
    if not any(_uses(text.body) for text in program.texts.values()):
        return
    sizes = _Sizes(program)
    for name in program.texts:
        sizes.size(name, None)
    for name, fault in sizes.refused.items():
        findings = () if fault.finding is None else (fault.finding,)
        program.made[name, None] = Elaborated(None, False, ELEMENTS, 1, findings)
        program.too_large.add(name)
        waiting = [name]
        while waiting:
            for used in sizes.used.get(waiting.pop(), ()):
                small = sizes.known.get((used, None), 0) < LARGE
                if not small and used not in sizes.refused and used not in program.left_alone:
                    program.left_alone.add(used)
                    waiting.append(used)


def _uses(body: tuple[s.BodyLine, ...]) -> bool:
    """Whether a diagram is built from others."""
    return any(
        _uses(line.body)
        if isinstance(line, s.Repeat)
        else isinstance(line, s.Statement) and isinstance(line.node, s.UseLine | s.CascadeLine)
        for line in body
    )


@dataclass(slots=True)
class _Sizes:
    program: Program
    known: dict[tuple[str, Fraction | None], int] = field(default_factory=dict)
    used: dict[str, dict[str, None]] = field(default_factory=dict)
    refused: dict[str, Fault] = field(default_factory=dict)
    _open: list[str] = field(default_factory=list)

    def size(self, name: str, rate: Fraction | None) -> int:
        """Elements, cells and lines of a diagram at the rate of its user; what is wrong in it counts nothing."""
        key = (name, rate)
        if key in self.known:
            return self.known[key]
        if name not in self.program.texts or name in self._open or len(self._open) > LEVELS:
            return 0
        self._open.append(name)
        try:
            self.known[key] = self._measure(self.program.texts[name], rate)
        finally:
            self._open.pop()
        return self.known[key]

    def _measure(self, text: s.DiagramText, rate: Fraction | None) -> int:
        scope = Scope(text.source)
        plain = [line for line in text.body if isinstance(line, s.Statement)]
        define_rate(scope, plain)
        scope.rate = scope.rate or rate
        measure_arrays(scope, plain, os.path.dirname(text.source.name) or ".")
        define_consts(scope, plain)
        try:
            lines = list(instances(scope, text.body, {}))
        except Fault:
            return 0
        for line in lines:
            try:
                copies, used = self._copies(scope, line)
            except Fault:
                continue
            if used is not None:
                self.used.setdefault(text.name.text, {})[used] = None
                copies *= self.size(used, scope.rate)
                if used in self.refused:
                    self.refused.setdefault(text.name.text, Fault())
            try:
                scope.grow(copies, line.start, line.end)
            except Fault as fault:
                if used is None:
                    return 0
                self.refused.setdefault(text.name.text, fault)
                break
        return scope.size

    def _copies(self, scope: Scope, line: Instance) -> tuple[int, str | None]:
        """How often a line stands for a used diagram, or how many cells it has. Raises Fault."""
        match line.node:
            case s.DelayLine(by=by) if by is not None:
                return cells_of_line(scope, by, line.env), None
            case s.UseLine(_, applied):
                return 1, applied.diagram.text
            case s.CascadeLine(_, applied):
                return rows_of_cascade(scope, applied, line), applied.diagram.text
        return 0, None
