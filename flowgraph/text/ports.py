"""The ports that a claim speaks of."""

from __future__ import annotations

from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.elements import Input
from flowgraph.text import syntax as s
from flowgraph.text.meaning import full_name
from flowgraph.text.scope import Env, Scope


def output_port(scope: Scope, reference: s.Reference, env: Env) -> str:
    """The full name of an output port. Raises Fault."""
    name = full_name(scope, reference, env)
    if name not in scope.ports:
        if name in scope.broken or reference.name in scope.broken:
            raise scope.silent()
        raise scope.fault(
            "not-output",
            f"{name} is no output of this diagram",
            reference.start,
            reference.end,
            f"the outputs are {', '.join(scope.ports)}" if scope.ports else "add an output line",
        )
    return name


def input_port(scope: Scope, diagram: Diagram, reference: s.Reference, env: Env) -> str:
    """The full name of an input port. Raises Fault."""
    name = full_name(scope, reference, env)
    if not isinstance(diagram.elements.get(name), Input):
        if name in scope.broken or reference.name in scope.broken:
            raise scope.silent()
        inputs = [port.name for port in diagram.inputs()]
        raise scope.fault(
            "not-input",
            f"{name} is no input of this diagram",
            reference.start,
            reference.end,
            f"the inputs are {', '.join(inputs)}" if inputs else "add an input line",
        )
    return name
