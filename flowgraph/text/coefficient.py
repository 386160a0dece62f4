"""Expressions of coefficients: what stands in front of a signal, behind coef, in starts and in claims."""

from __future__ import annotations

from flowgraph.diagram.expression import Expression, Name, Pi
from flowgraph.text import syntax as s
from flowgraph.text.meaning import checked, expression, full_name, known_number
from flowgraph.text.names import refuse_label, undefined
from flowgraph.text.scope import Env, Scope
from flowgraph.text.words import names_in_text


def coefficient(scope: Scope, expr: s.Expr, env: Env) -> Expression:
    """A coefficient expression; its powers of seconds fit together. Raises Fault.

    One that reads no repeat variable is made once, however often its line is repeated.
    """
    key = (expr.start, expr.end)
    found = scope.steady.get(key)
    if found is None:
        found = checked(scope, expression(scope, expr, env, coefficient_leaf), expr)
        if not env or env.keys().isdisjoint(names_in_text(scope.source.text[expr.start : expr.end])):
            scope.steady[key] = found
    return found


def coefficient_leaf(scope: Scope, reference: s.Reference, env: Env) -> Expression:
    """Names in coefficient expressions: coefs, consts, repeat variables, rate, half and pi."""
    found = known_number(scope, reference, env)
    if found is not None:
        return found
    refuse_label(scope, reference, env)
    name = full_name(scope, reference, env)
    if name in scope.coefs:
        return Name(name)
    if name == "pi":
        return Pi()
    if name in scope.broken or reference.name in scope.broken:
        raise scope.silent()
    if name in scope.arrays:
        raise scope.fault(
            "array-bare",
            f"{name} is an array",
            reference.start,
            reference.end,
            f"read an entry: {name}[0] .. {name}[{scope.arrays[name] - 1}]",
        )
    if name in scope.signals or name in scope.aliases or name in scope.lines:
        raise scope.fault(
            "signal-as-coef", f"{name} is a signal, and here a coefficient is expected", reference.start, reference.end
        )
    if reference.name in scope.arrays:
        raise scope.fault(
            "index-range",
            f"{name} is not there: {reference.name} has the entries 0 .. {scope.arrays[reference.name] - 1}",
            reference.start,
            reference.end,
        )
    raise undefined(scope, name, reference)
