"""The fixed part of a diagram: rate, consts and coefficients, single, listed or read from a file."""

from __future__ import annotations

from fractions import Fraction

from flowgraph.diagram.diagram import Coefficient
from flowgraph.diagram.expression import Expression, Number, names_in
from flowgraph.diagram.index import strong_components
from flowgraph.source.diagnostic import Diagnostic
from flowgraph.source.span import Span
from flowgraph.text import syntax as s
from flowgraph.text.coefficient import coefficient
from flowgraph.text.exact import BITS, TooLargeError
from flowgraph.text.instances import Instance
from flowgraph.text.meaning import fixed, full_name
from flowgraph.text.number_file import read_numbers
from flowgraph.text.quantities import InexactError, UnequalPowersError, seconds_of, value_of
from flowgraph.text.scope import Env, Fault, Scope
from flowgraph.text.words import names_in_text

EMPTY: Env = {}


def define_rate(scope: Scope, lines: list[s.Statement]) -> None:
    """The rate line of the diagram, if it has one."""
    for line in lines:
        node = line.node
        if not isinstance(node, s.Rate):
            continue
        try:
            value, seconds = fixed(scope, node.value, EMPTY)
            if seconds != -1 or value <= 0:
                raise scope.fault(
                    "units",
                    "a rate is a frequency above 0",
                    node.value.start,
                    node.value.end,
                    "write the unit: rate 48 kHz",
                )
        except Fault as fault:
            scope.tell(fault.finding)
            scope.unresolved = True
            continue
        if "rate" in scope.defined:
            scope.tell(scope.fault("defined-twice", "the diagram has a rate already", line.start, line.end).finding)
            continue
        scope.defined["rate"] = (line.start, line.end)
        scope.rate = value


def define_consts(scope: Scope, lines: list[s.Statement]) -> None:
    """All consts, each after those it reads."""
    waiting: dict[str, s.Const] = {}
    for line in lines:
        if isinstance(line.node, s.Const):
            name = line.node.name
            try:
                if name.parts:
                    raise scope.fault("const-index", "a const has a plain name", name.start, name.end)
                scope.define(name.name, "const", name)
                waiting[name.name] = line.node
            except Fault as fault:
                scope.tell(fault.finding)
                scope.broken.add(name.name)
                scope.unresolved = True
    names = list(waiting)
    number = {name: at for at, name in enumerate(names)}
    reads = [
        [number[read] for read in dict.fromkeys(_names_read(scope, waiting[name].value)) if read in number]
        for name in names
    ]
    for group in strong_components(reads):
        first = names[group[0]]
        if len(group) > 1 or group[0] in reads[group[0]]:
            where = waiting[first].name
            scope.tell(
                scope.fault("follows-itself", f"the const {first} follows itself", where.start, where.end).finding
            )
            scope.broken.update(names[member] for member in group)
            scope.unresolved = True
            continue
        try:
            scope.consts[first] = fixed(scope, waiting[first].value, EMPTY)
        except Fault as fault:
            scope.tell(fault.finding)
            scope.broken.add(first)
            scope.unresolved = True


def _names_read(scope: Scope, expr: s.Expr) -> list[str]:
    return names_in_text(scope.source.text[expr.start : expr.end])


def measure_arrays(scope: Scope, lines: list[s.Statement], folder: str) -> dict[str, list[tuple[Fraction, Span]]]:
    """The lengths of all coefficient arrays, and the entries of those that stand in files."""
    from_files: dict[str, list[tuple[Fraction, Span]]] = {}
    for line in lines:
        node = line.node
        if isinstance(node, s.CoefList) and not node.name.parts:
            scope.arrays.setdefault(node.name.name, len(node.values))
        elif isinstance(node, s.CoefFile) and not node.name.parts:
            try:
                entries = read_numbers(scope, node.path, folder)
            except Fault as fault:
                scope.tell(fault.finding)
                scope.broken.add(node.name.name)
                scope.unresolved = True
                continue
            if node.name.name not in scope.arrays:
                from_files[node.name.name] = entries
                scope.arrays[node.name.name] = len(entries)
    return from_files


def name_coefs(scope: Scope, line: Instance) -> None:
    """Gives the coefficients of a line their names, without values. Raises Fault."""
    node = line.node
    if isinstance(node, s.OpenCoefs):
        for name in node.names:
            full = full_name(scope, name, line.env)
            scope.define(full, "coefficient", name)
            scope.coefs[full] = Coefficient(full, None, False, scope.span(name.start, name.end))
    elif isinstance(node, (s.Coef, s.CoefList, s.CoefFile)):
        name = node.name
        full = full_name(scope, name, line.env)
        scope.define(full, "coefficient", name)
        if isinstance(node, s.Coef):
            scope.coefs[full] = Coefficient(full, None, False, scope.span(name.start, name.end))
        elif name.parts:
            raise scope.fault("array-index", "an array of coefficients has a plain name", name.start, name.end)
        else:
            for k in range(scope.arrays.get(full, 0)):
                entry = f"{full}[{k}]"
                scope.grow(1, line.start, line.end)
                scope.coefs[entry] = Coefficient(entry, None, False, scope.span(name.start, name.end))


def value_coefs(scope: Scope, line: Instance, files: dict[str, list[tuple[Fraction, Span]]]) -> None:
    """Gives the coefficients of a line their values. Raises Fault."""
    node = line.node
    if isinstance(node, s.Coef):
        _value(scope, full_name(scope, node.name, line.env), coefficient(scope, node.value, line.env))
    elif isinstance(node, s.CoefList):
        for k, value in enumerate(node.values):
            entry = f"{node.name.name}[{k}]"
            scope.coefs[entry] = Coefficient(
                entry, coefficient(scope, value, line.env), False, scope.span(value.start, value.end)
            )
    elif isinstance(node, s.CoefFile):
        for k, (number, span) in enumerate(files.get(node.name.name, [])):
            entry = f"{node.name.name}[{k}]"
            scope.coefs[entry] = Coefficient(entry, Number(number), False, span)


def _value(scope: Scope, name: str, value: Expression) -> None:
    scope.coefs[name] = Coefficient(name, value, False, scope.coefs[name].span)


def check_coefs(scope: Scope) -> None:
    """Coefficients that follow themselves, powers of seconds that do not fit, values that do not exist."""
    names = list(scope.coefs)
    number = {name: at for at, name in enumerate(names)}
    reads: list[list[int]] = []
    for found in scope.coefs.values():
        read = () if found.value is None else sorted(number[name] for name in names_in(found.value) if name in number)
        reads.append(list(read))
    values: dict[str, Fraction] = {}
    for group in strong_components(reads):
        found = scope.coefs[names[group[0]]]
        if len(group) > 1 or group[0] in reads[group[0]]:
            scope.tell(Diagnostic("follows-itself", f"the coefficient {found.name} follows itself", found.span))
            scope.unresolved = True
            continue
        if found.value is None:
            scope.seconds[found.name] = None
            continue
        try:
            scope.seconds[found.name] = seconds_of(found.value, scope.seconds)
            values[found.name] = value_of(found.value, values)
        except UnequalPowersError as error:
            scope.tell(Diagnostic("units", f"in {found.name}: {error}", found.span))
            scope.excused.add(found.name)
            scope.seconds[found.name] = None
        except InexactError:
            pass
        except ZeroDivisionError:
            scope.excused.add(found.name)
            scope.tell(
                Diagnostic("zero-division", f"{found.name} divides by zero with the values of the file", found.span)
            )
        except TooLargeError:
            scope.excused.add(found.name)
            scope.tell(Diagnostic("too-large", f"{found.name} needs more than {BITS} bits", found.span))
