"""First pass over the lines of a diagram: each gives its names their meaning, in any order of the file."""

from __future__ import annotations

from dataclasses import dataclass, field

from flowgraph.diagram.elements import Signal
from flowgraph.text import syntax as s
from flowgraph.text.instances import Instance
from flowgraph.text.meaning import fixed, full_name
from flowgraph.text.place import Copy, place_cascade, place_use
from flowgraph.text.program import Program
from flowgraph.text.scope import Alias, Env, Scope


@dataclass(slots=True)
class Definer:
    """Gives names their meaning, one line at a time; `copies` are the used diagrams by full name."""

    scope: Scope
    program: Program
    copies: dict[str, list[Copy]] = field(default_factory=dict)
    outputs: list[tuple[str, s.Reference, Env]] = field(default_factory=list)

    def define(self, line: Instance) -> None:
        """Defines what a line defines. Raises Fault."""
        scope, env = self.scope, line.env
        match line.node:
            case s.AdderLine(name):
                self._signal(name, env, "adder", 0)
            case s.GainLine(name):
                self._signal(name, env, "gain", 0)
            case s.DelayLine():
                self._delay(line.node, line)
            case s.InputLine(names):
                for name in names:
                    self._signal(name, env, "input", 0)
            case s.OutputLine(names):
                for name in names:
                    self._port(name, env)
            case s.OutputOf(name, right):
                self._port(name, env)
                self._alias(self._define(name, env, "wire"), right, line, "an output")
            case s.WireLine(name, right):
                self._alias(self._define(name, env, "wire"), right, line, "a wire")
            case s.UseLine(name, applied):
                full = self._define(name, env, "use")
                self.copies[full] = [place_use(scope, self.program, full, applied, line)]
            case s.CascadeLine(name, applied):
                full = self._define(name, env, "cascade")
                self.copies[full] = place_cascade(scope, self.program, full, applied, line)
            case _:
                pass

    def _define(self, name: s.Reference, env: Env, kind: str) -> str:
        full = full_name(self.scope, name, env)
        if str in map(type, name.parts):
            raise self.scope.fault(
                "dotted-name",
                f"{full} belongs to a used diagram and cannot be defined here",
                name.start,
                name.end,
                "choose a name without a point",
            )
        self.scope.define(full, kind, name)
        return full

    def _signal(self, name: s.Reference, env: Env, kind: str, tap: int) -> None:
        full = self._define(name, env, kind)
        self.scope.signals[full] = Signal(full, tap)

    def _port(self, name: s.Reference, env: Env) -> None:
        scope = self.scope
        full = full_name(scope, name, env)
        if full in scope.ports:
            raise scope.fault("defined-twice", f"{full} is an output already", name.start, name.end, "name it once")
        scope.ports[full] = scope.span(name.start, name.end)
        self.outputs.append((full, name, env))

    def _alias(self, full: str, right: s.Expr, line: Instance, what: str) -> None:
        """A second name for one signal. Raises Fault where the right side is more than that."""
        if not isinstance(right, s.Reference):
            self.scope.broken.add(full)
            raise self.scope.fault(
                "one-signal",
                f"{what} is a signal under a second name",
                right.start,
                right.end,
                f"write adder {full} = .. or gain {full} = .. in a line of its own",
            )
        self.scope.aliases[full] = Alias(right, line.env, line.start, line.end)

    def _delay(self, node: s.DelayLine, line: Instance) -> None:
        scope = self.scope
        if node.by is None:
            for name in node.names:
                self._signal(name, line.env, "delay", 1)
            return
        if len(node.names) > 1:
            second = node.names[1]
            raise scope.fault(
                "line-names",
                "a line has one name",
                second.start,
                second.end,
                "leave out `by`, or write one line for each name",
            )
        full = self._define(node.names[0], line.env, "delay")
        scope.broken.add(full)
        length = cells_of_line(scope, node.by, line.env)
        scope.grow(length, line.start, line.end)
        scope.broken.discard(full)
        scope.lines[full] = length
        if isinstance(node.right, s.Reference):
            scope.aliases[f"{full}[0]"] = Alias(node.right, line.env, line.start, line.end)
        else:
            scope.broken.add(f"{full}[0]")


def cells_of_line(scope: Scope, by: s.Expr, env: Env) -> int:
    """How many cells `by` says. Raises Fault."""
    cells, seconds = fixed(scope, by, env)
    if seconds == 1:
        scope.used_rate = True
        if scope.rate is None:
            raise scope.fault(
                "rate-missing", "a length in time needs a rate", by.start, by.end, "add a line such as: rate 48 kHz"
            )
        cells *= scope.rate
        if cells.denominator != 1:
            below = cells.numerator // cells.denominator
            raise scope.fault(
                "length",
                f"this time is {float(cells):g} samples, which is no whole number",
                by.start,
                by.end,
                f"write by {below} or by {below + 1}",
            )
    elif seconds:
        raise scope.fault("units", "a length is a number of cells or a time", by.start, by.end)
    if cells.denominator != 1 or cells < 1:
        raise scope.fault(
            "length", f"a line has a whole number of cells, at least 1, and this is {cells}", by.start, by.end
        )
    return int(cells)
