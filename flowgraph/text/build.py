"""Second pass over the lines of a diagram: adders, gains and delays, with their signals resolved."""

from __future__ import annotations

from flowgraph.diagram.elements import Adder, Delay, Element, Gain, Signal, Term
from flowgraph.diagram.expression import Expression
from flowgraph.source.diagnostic import Note
from flowgraph.text import syntax as s
from flowgraph.text.coefficient import coefficient
from flowgraph.text.instances import Instance
from flowgraph.text.meaning import full_name, minus, steps
from flowgraph.text.refuse_term import refuse, signals_inside
from flowgraph.text.scope import Env, Fault, Scope
from flowgraph.text.signals import is_signal, signal


def adder(scope: Scope, node: s.AdderLine, line: Instance) -> Adder:
    """The adder of a line. Raises Fault."""
    name = full_name(scope, node.name, line.env)
    found: list[Term] = []
    _take_terms(scope, node.right, line.env, False, found)
    terms = tuple(found)
    span = scope.span(node.name.start, node.name.end)
    if len(terms) < 2:
        raise _one_input(scope, name, terms, node)
    seen: dict[Signal, Term] = {}
    for term in terms:
        first = seen.setdefault(term.signal, term)
        if first is not term:
            raise _twice(scope, first, term)
    return Adder(name, terms, span)


def _one_input(scope: Scope, name: str, terms: tuple[Term, ...], node: s.AdderLine) -> Fault:
    right = node.right
    if not terms:
        return scope.fault("adder-inputs", f"the adder {name} has no input", right.start, right.end)
    plain = terms[0].coefficient is None and not terms[0].negative
    mend = f"write {'wire' if plain else 'gain'} {name} = {_right(scope, right)}"
    return scope.fault("adder-inputs", f"the adder {name} has one input", right.start, right.end, mend)


def _right(scope: Scope, right: s.Expr) -> str:
    """The right side of a line for the line to write, if it is short and stands as written there."""
    text = scope.source.text[right.start : right.end]
    return text if len(text) <= 60 and "\n" not in text and "#" not in text and "total" not in text else ".."


def _twice(scope: Scope, first: Term, second: Term) -> Fault:
    """Two terms of one adder that read one signal, perhaps through a wire."""
    note = Note(f"{first.span.text} stands here", first.span)
    same = "" if first.span.text == second.span.text else f" ({first.span.text} is the same signal)"
    return scope.fault(
        "signal-twice",
        f"{second.span.text} comes into this adder twice{same}",
        second.span.start,
        second.span.end,
        "write one term with the sum of both coefficients",
        (note,),
    )


def _take_terms(scope: Scope, expr: s.Expr, env: Env, negative: bool, found: list[Term]) -> None:
    """Adds the terms of the right side of an adder to `found`; a total stands for its terms."""
    if isinstance(expr, s.Total):
        for minus, body in expr.terms:
            _take_term(scope, body, env, negative is not minus, found)
    else:
        _take_term(scope, expr, env, negative, found)


def _take_term(scope: Scope, body: s.Expr, env: Env, negative: bool, found: list[Term]) -> None:
    if isinstance(body, s.Reference) and is_signal(scope, body, env):
        found.append(Term(signal(scope, body, env), negative, None, scope.span(body.start, body.end)))
    elif isinstance(body, s.Fold) and body.kind == "total":
        for inner in steps(scope, body, env):
            _take_terms(scope, body.body, inner, negative, found)
    else:
        factor, last = _scaled_signal(scope, body, env)
        found.append(Term(signal(scope, last, env), negative, factor, scope.span(last.start, last.end)))


def _scaled_signal(scope: Scope, body: s.Expr, env: Env) -> tuple[Expression, s.Reference]:
    """The coefficient and the signal of `coef * signal`. Raises Fault for every other form."""
    if isinstance(body, s.Scaled):
        divides, last = body.factors[-1]
        front = body.factors[:-1]
        if not divides and isinstance(last, s.Reference) and is_signal(scope, last, env):
            steady = scope.steady.get((body.start, front[-1].body.end))
            if steady is not None:
                return steady, last
            if not any(True for _, inner in front for _ in signals_inside(scope, inner, env)):
                whole = s.Scaled(front, body.start, front[-1].body.end) if len(front) > 1 else front[0].body
                return coefficient(scope, whole, env), last
    raise refuse(scope, body, env)


def gain(scope: Scope, node: s.GainLine, line: Instance) -> Gain:
    """The gain of a line. Raises Fault."""
    env, right = line.env, node.right
    negative = False
    body = right
    if isinstance(right, s.Total) and len(right.terms) == 1:
        negative, body = right.terms[0]
    name = full_name(scope, node.name, env)
    if isinstance(body, s.Reference) and is_signal(scope, body, env):
        mend = (
            f"write gain {name} = -1 * {scope.span(body.start, body.end).text}"
            if negative
            else f"write wire {name} = {_right(scope, body)}"
        )
        raise scope.fault("gain-form", f"the gain {name} has no coefficient", right.start, right.end, mend)
    if isinstance(body, s.Total) or (isinstance(body, s.Fold) and body.kind == "total"):
        raise scope.fault(
            "gain-form",
            "a gain is coef * signal",
            right.start,
            right.end,
            f"write adder {name} = {_right(scope, right)}",
        )
    factor, last = _scaled_signal(scope, body, env)
    factor = minus(factor) if negative else factor
    return Gain(name, factor, signal(scope, last, env), scope.span(node.name.start, node.name.end))


def delays(scope: Scope, node: s.DelayLine, line: Instance) -> list[Element]:
    """The delays of a line, in their order. Raises Fault."""
    env, right = line.env, node.right
    if not isinstance(right, s.Reference):
        first = full_name(scope, node.names[0], env)
        raise scope.fault(
            "one-signal",
            "a delay reads one signal",
            right.start,
            right.end,
            f"write adder {first}_in = .. or gain {first}_in = .., and here {first}_in",
        )
    source = signal(scope, right, env)
    names = [full_name(scope, name, env) for name in node.names]
    spans = [scope.span(name.start, name.end) for name in node.names]
    if node.by is not None:
        length = scope.lines[names[0]]
        return [Delay(names[0], source, length, _contents(scope, node, length, env), spans[0])]
    starts = _contents(scope, node, len(names), env)
    made: list[Element] = []
    for k, (name, span) in enumerate(zip(names, spans, strict=True)):
        made.append(Delay(name, source, 1, starts[k : k + 1], span))
        source = Signal(name, 1)
    return made


def _contents(scope: Scope, node: s.DelayLine, cells: int, env: Env) -> tuple[Expression, ...]:
    """One starting content for each cell, or none. Raises Fault."""
    if node.starts is None:
        return ()
    values = tuple([coefficient(scope, value, env) for value in node.starts])
    if node.by is not None and not node.listed and len(values) == 1:
        return values * cells
    if len(values) != cells:
        raise scope.fault(
            "starts-length",
            f"{len(values)} starting content{'s' * (len(values) > 1)} for {cells} cell{'s' * (cells > 1)}",
            node.starts[0].start,
            node.starts[-1].end,
            _enough(scope, node, node.starts, cells),
        )
    return values


def _enough(scope: Scope, node: s.DelayLine, starts: tuple[s.Expr, ...], cells: int) -> str:
    """The mend for too many or too few starting contents."""
    if len(starts) == 2 and cells == 1 and all(isinstance(start, s.Figure) for start in starts):
        whole, _, places = scope.source.text[starts[0].start : starts[1].end].partition(",")
        if places and not places[0].isspace():
            return f"a number has a decimal point: write {whole}.{places}"
    if node.by is None:
        return "give one for each name, in the same order"
    if cells == 1:
        return "give one"
    return f"give one for all cells, or a list of {cells}: line[1] first"
