"""Terms an adder or gain does not take, each with the line to write instead."""

from __future__ import annotations

from collections.abc import Iterator

from flowgraph.text import syntax as s
from flowgraph.text.meaning import full_name
from flowgraph.text.names import refuse_label, undefined
from flowgraph.text.scope import Env, Fault, Scope
from flowgraph.text.signals import is_signal

CONSTANT = "feed it through an input, or through a cell that holds it: delay one = one starts 1"


def signals_inside(scope: Scope, expr: s.Expr, env: Env) -> Iterator[s.Reference]:
    """The references to signals in an expression, indices left out, in the order written."""
    match expr:
        case s.Reference():
            if is_signal(scope, expr, env):
                yield expr
        case s.Total(terms):
            for _, body in terms:
                yield from signals_inside(scope, body, env)
        case s.Scaled(factors):
            for _, body in factors:
                yield from signals_inside(scope, body, env)
        case s.Raised(base, exponent):
            yield from signals_inside(scope, base, env)
            yield from signals_inside(scope, exponent, env)
        case s.Bracket(inner) | s.Call(_, inner):
            yield from signals_inside(scope, inner, env)
        case s.Fold(_, variable, _, _, body):
            yield from signals_inside(scope, body, {**env, variable.text: 0})
        case s.Figure() | s.CountOf():
            return


def refuse(scope: Scope, term: s.Expr, env: Env) -> Fault:
    """Why a term is neither a signal nor coef * signal, and the line to write."""
    found = list(signals_inside(scope, term, env))
    for reference in found:
        name = reference.name
        if name not in scope.kinds:
            silent = name in scope.broken
            return scope.silent() if silent else undefined(scope, full_name(scope, reference, env), reference)
    text = _text(scope, term)
    if isinstance(term, s.Reference):
        refuse_label(scope, term, env)
    if isinstance(term, s.Scaled) and isinstance(term.factors[-1].body, s.Reference):
        refuse_label(scope, term.factors[-1].body, env)
    if not found:
        return scope.fault(
            "constant-term", f"{text} is a constant; an adder takes signals", term.start, term.end, CONSTANT
        )
    if len(found) > 1 and not isinstance(term, s.Bracket):
        if _is_product(term, found):
            return scope.fault(
                "signal-product",
                "a product of signals is no part of the language",
                term.start,
                term.end,
                "a signal takes coefficients only: coef * signal",
            )
        return _bracket(scope, term)
    if isinstance(term, s.Scaled):
        return _order(scope, term, found[0], env)
    if isinstance(term, s.Bracket):
        return _bracket(scope, term)
    return scope.fault(
        "term-form",
        f"{text} is no term: an adder takes signal or coef * signal",
        term.start,
        term.end,
        "a function of a signal is no part of the language",
    )


def _is_product(term: s.Expr, found: list[s.Reference]) -> bool:
    return isinstance(term, s.Scaled) and sum(body in found for _, body in term.factors) > 1


def _bracket(scope: Scope, term: s.Expr) -> Fault:
    """A bracket with signals in it."""
    inner = _inner_bracket(term)
    text = _text(scope, inner.inner) if inner else "..."
    return scope.fault(
        "bracket-signals",
        "a bracket with signals is an adder of its own",
        term.start,
        term.end,
        f"write adder part = {text}, and here part",
    )


def _inner_bracket(term: s.Expr) -> s.Bracket | None:
    if isinstance(term, s.Bracket):
        return term
    if isinstance(term, s.Scaled):
        return next((body for _, body in term.factors if isinstance(body, s.Bracket)), None)
    return None


def _order(scope: Scope, term: s.Scaled, reference: s.Reference, env: Env) -> Fault:
    """x*b0 and x/2: the coefficient stands in front."""
    others = [factor for factor in term.factors if factor.body is not reference]
    name = _text(scope, reference)
    if len(others) == len(term.factors):
        inner = next(body for _, body in term.factors if reference in list(signals_inside(scope, body, env)))
        if isinstance(inner, s.Fold):
            return scope.fault(
                "total-coef",
                "a total takes a sign and no coefficient",
                term.start,
                term.end,
                "put the coefficient in front of each of its terms",
            )
        return _bracket(scope, term)
    if next(divides for divides, body in term.factors if body is reference):
        return scope.fault("signal-divisor", "dividing by a signal is no part of the language", term.start, term.end)
    front = ""
    for divides, body in others:
        mark = "/" if divides else "*"
        front = (front or ("1" if divides else "")) + (mark if front or divides else "") + _text(scope, body)
    return scope.fault("signal-last", "the signal stands last in a term", term.start, term.end, f"write {front}*{name}")


def _text(scope: Scope, expr: s.Expr) -> str:
    """An expression as written, on one line."""
    return " ".join(scope.source.text[expr.start : expr.end].split())
