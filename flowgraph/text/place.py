"""Used diagrams inside another: what is fed and given, and the names their outputs get."""

from __future__ import annotations

from collections.abc import Mapping
from typing import NamedTuple

from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.elements import Signal
from flowgraph.diagram.expression import Expression, Name, names_in
from flowgraph.text import syntax as s
from flowgraph.text.coefficient import coefficient
from flowgraph.text.instances import Instance
from flowgraph.text.meaning import array_length, full_name
from flowgraph.text.program import Program
from flowgraph.text.scope import Alias, Env, Fault, Scope
from flowgraph.text.words import nearest


class Copy(NamedTuple):
    """One spelled-out use: `path` stands in front of its names; `row` counts the copies of a cascade."""

    path: str
    diagram: Diagram
    fed: Mapping[str, s.Reference]
    row: int


def place_use(scope: Scope, program: Program, full: str, applied: s.Application, line: Instance) -> Copy:
    """Names the outputs of a use: `full` where there is one, else `full.port`. Raises Fault."""
    scope.broken.add(full)
    made = program.used(scope, applied.diagram)
    assert made.diagram is not None
    copy = Copy(full, made.diagram, arguments(scope, made.diagram, applied), 0)
    scope.grow(made.size, line.start, line.end)
    scope.broken.discard(full)
    outputs = list(made.diagram.outputs)
    for port in outputs:
        _name_output(scope, full if len(outputs) == 1 else f"{full}.{port}", copy, port, line)
    return copy


def place_cascade(scope: Scope, program: Program, full: str, applied: s.Application, line: Instance) -> list[Copy]:
    """Names y[0], y[1], .. and y, which is the last. Raises Fault."""
    scope.broken.add(full)
    made = program.used(scope, applied.diagram)
    diagram = made.diagram
    assert diagram is not None
    if len(diagram.inputs()) != 1 or len(diagram.outputs) != 1:
        raise scope.fault(
            "cascade-ports",
            f"a cascade is made of diagrams with one input and one output; {diagram.name} "
            f"has {len(diagram.inputs())} and {len(diagram.outputs)}",
            applied.diagram.start,
            applied.diagram.end,
            "spell it out with use lines",
        )
    rows = rows_of_cascade(scope, applied, line)
    fed = arguments(scope, diagram, applied)
    scope.grow(made.size * rows, line.start, line.end)
    scope.broken.discard(full)
    copies: list[Copy] = []
    (port,) = diagram.outputs
    for row in range(rows):
        path = f"{full}[{row}]"
        copies.append(Copy(path, diagram, fed, row))
        _name_output(scope, path, copies[-1], port, line)
        end = applied.diagram.end
        fed = {diagram.inputs()[0].name: s.Reference(path, (), applied.diagram.start, end)}
    if path in scope.signals:
        scope.signals[full] = scope.signals[path]
    else:
        scope.aliases[full] = scope.aliases[path]
    return copies


def rows_of_cascade(scope: Scope, applied: s.Application, line: Instance) -> int:
    """How many copies the `each` arrays of a cascade give. Raises Fault."""
    lengths: list[tuple[s.Reference, int]] = []
    for binding in applied.bindings:
        if binding.each and isinstance(binding.value, s.Reference):
            word = s.Word(binding.value.name, binding.value.start, binding.value.end)
            lengths.append((binding.value, array_length(scope, word)))
    if not lengths:
        raise scope.fault(
            "cascade-each",
            "a cascade takes at least one coefficient from each entry of an array",
            line.start,
            line.end,
            "write with c = each c, where c is an array of coefficients",
        )
    for array, length in lengths:
        if length != lengths[0][1]:
            raise scope.fault(
                "cascade-each",
                f"{array.name} has {length} entries, and {lengths[0][0].name} has {lengths[0][1]}",
                array.start,
                array.end,
                "arrays after each have equal lengths",
            )
    return lengths[0][1]


def _name_output(scope: Scope, name: str, copy: Copy, port: str, line: Instance) -> None:
    """Gives an output of a copy its name; where it is an input passed on, the name is a wire."""
    inner = copy.diagram.outputs[port].signal
    scope.defined.setdefault(name, (line.start, line.end))
    if inner.name in copy.fed:
        scope.aliases[name] = Alias(copy.fed[inner.name], line.env, line.start, line.end)
    else:
        scope.signals[name] = Signal(f"{copy.path}.{inner.name}", inner.tap)


def arguments(scope: Scope, diagram: Diagram, applied: s.Application) -> dict[str, s.Reference]:
    """What each input of a used diagram is fed with. Raises Fault."""
    inputs = [port.name for port in diagram.inputs()]
    fed: dict[str, s.Reference] = {}
    for name, value in applied.arguments:
        if not isinstance(value, s.Reference):
            raise scope.fault(
                "one-signal",
                "a diagram is fed with a signal",
                value.start,
                value.end,
                "give the sum or product a line and a name of its own",
            )
        if name is None:
            if len(inputs) != 1 or len(applied.arguments) != 1:
                raise _by_name(scope, diagram, inputs, applied, value)
            fed[inputs[0]] = value
        elif name.text not in inputs:
            raise scope.fault(
                "undefined",
                f"{diagram.name} has no input {name.text}",
                name.start,
                name.end,
                f"its inputs are {', '.join(inputs)}" if inputs else "it has no inputs",
            )
        elif name.text in fed:
            raise scope.fault("defined-twice", f"{name.text} is fed twice", name.start, name.end)
        else:
            fed[name.text] = value
    for port in inputs:
        if port not in fed:
            raise scope.fault(
                "input-missing",
                f"the input {port} of {diagram.name} is not fed",
                applied.diagram.start,
                applied.diagram.end,
                f"add {port} = ..",
            )
    return fed


def _by_name(scope: Scope, diagram: Diagram, inputs: list[str], applied: s.Application, value: s.Reference) -> Fault:
    if len(inputs) < 2:
        fed = f"{len(applied.arguments)} signal{'s' * (len(applied.arguments) > 1)}"
        return scope.fault(
            "input-names",
            f"{diagram.name} has {'1 input' if inputs else 'no input'} and is fed with {fed}",
            value.start,
            value.end,
            "take the others away" if inputs else "a diagram without an input cannot be used",
        )
    written = ", ".join(f"{port} = .." for port in inputs)
    return scope.fault(
        "input-names",
        f"{diagram.name} has {len(inputs)} inputs, and they are fed by name",
        value.start,
        value.end,
        f"write {diagram.name}({written})",
    )


def given(scope: Scope, diagram: Diagram, applied: s.Application, row: int, env: Env) -> dict[str, Expression]:
    """The coefficients a use gives, in the user's terms. Raises Fault."""
    found: dict[str, Expression] = {}
    for binding in applied.bindings:
        name = full_name(scope, binding.name, env)
        at = binding.name
        if name not in diagram.coefficients:
            close = nearest(name, list(diagram.coefficients))
            raise scope.fault(
                "undefined",
                f"{diagram.name} has no coefficient {name}",
                at.start,
                at.end,
                f"did you mean {close}?" if close else "take it away",
            )
        value = diagram.coefficients[name].value
        if value is not None and names_in(value):
            raise scope.fault(
                "given-following",
                f"{name} follows others in {diagram.name} and cannot be given",
                at.start,
                at.end,
                f"give {' and '.join(sorted(names_in(value)))} instead",
            )
        if name in found:
            raise scope.fault("defined-twice", f"{name} is given twice", at.start, at.end)
        found[name] = _value(scope, binding, row, env)
    missing = [name for name, coef in diagram.coefficients.items() if coef.value is None and name not in found]
    if missing:
        at_ = applied.diagram
        raise scope.fault(
            "coef-not-given",
            f"{diagram.name} leaves {', '.join(missing)} open",
            at_.start,
            at_.end,
            f"add with {', '.join(f'{name} = ..' for name in missing)}",
        )
    return found


def _value(scope: Scope, binding: s.Binding, row: int, env: Env) -> Expression:
    value = binding.value
    if not binding.each:
        return coefficient(scope, value, env)
    assert isinstance(value, s.Reference)
    entry = f"{value.name}[{row}]"
    if entry not in scope.coefs:
        raise scope.fault("cascade-each", f"{value.name} is no array of coefficients", value.start, value.end)
    return Name(entry)
