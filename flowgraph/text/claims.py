"""Intent and require lines -> typed claims, in exact terms of the diagram they speak of."""

from __future__ import annotations

from flowgraph.diagram.claim import (
    Claim,
    DiagramIntent,
    EquationIntent,
    RatioIntent,
)
from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.elements import Input
from flowgraph.diagram.expression import Expression, Name, Sample, names_in
from flowgraph.source.span import Span
from flowgraph.text import syntax as s
from flowgraph.text.coefficient import coefficient_leaf
from flowgraph.text.instances import Instance
from flowgraph.text.instantiate import in_terms_of_user
from flowgraph.text.linear import check_linear
from flowgraph.text.meaning import checked, expression, full_name, whole
from flowgraph.text.place import arguments, given
from flowgraph.text.ports import input_port, output_port
from flowgraph.text.program import Program
from flowgraph.text.reach import earliest_samples, reach_of_ratio, within_reach
from flowgraph.text.requirement import requirement
from flowgraph.text.scope import Env, Scope


def claim(scope: Scope, program: Program, diagram: Diagram, line: Instance, reads: set[str]) -> Claim:
    """The claim of a line; the coefficients it reads are added to `reads`. Raises Fault."""
    env = line.env
    span = scope.span(line.start, line.end)
    match line.node:
        case s.EquationLine():
            return _equation(scope, diagram, line.node, env, span, reads)
        case s.RatioLine(output, input_, ratio, late):
            found = checked(scope, expression(scope, ratio, env, _ratio_leaf), ratio)
            reads |= names_in(found)
            within_reach(scope, reach_of_ratio(found), ratio)
            samples = 0 if late is None else whole(scope, late, env, "a number of samples")
            within_reach(scope, samples, late or ratio)
            return RatioIntent(
                output_port(scope, output, env), input_port(scope, diagram, input_, env), found, samples, span
            )
        case s.SameAsLine(output, applied):
            return _same_as(scope, program, diagram, output_port(scope, output, env), applied, line, reads)
    return requirement(scope, diagram, line)


def _ratio_leaf(scope: Scope, reference: s.Reference, env: Env) -> Expression:
    """Names in a ratio: z, and what a coefficient may read."""
    return Name("z") if reference.name == "z" and not reference.parts else coefficient_leaf(scope, reference, env)


def _sample(scope: Scope, reference: s.Reference, env: Env) -> Sample | None:
    """`x[n - k]` as a sample; None where the last index does not read n. Raises Fault."""
    last = reference.parts[-1] if reference.parts else None
    if not isinstance(last, s.At) or not _reads_n(last.place):
        return None
    here, next_ = (whole(scope, last.place, {**env, "n": n}, "a time") for n in (0, 1))
    if next_ - here != 1:
        raise scope.fault("time", "a sample is written name[n] or name[n - k]", reference.start, reference.end)
    base = s.Reference(reference.name, reference.parts[:-1], reference.start, reference.end)
    within_reach(scope, here, last.place)
    return Sample(full_name(scope, base, env), -here)


def _bare_n(expr: s.Expr) -> bool:
    """Whether n stands in an expression outside the brackets of a sample."""
    match expr:
        case s.Reference(name, parts):
            return name == "n" and not parts
        case s.Total(terms):
            return any(_bare_n(body) for _, body in terms)
        case s.Scaled(factors):
            return any(_bare_n(body) for _, body in factors)
        case s.Raised(base, exponent):
            return _bare_n(base) or _bare_n(exponent)
        case s.Bracket(inner) | s.Call(_, inner):
            return _bare_n(inner)
        case s.Fold(_, _, _, _, body):
            return _bare_n(body)
        case s.Figure() | s.CountOf():
            return False


def _reads_n(expr: s.Expr) -> bool:
    match expr:
        case s.Reference(name, parts):
            return name == "n" and not parts
        case s.Total(terms):
            return any(_reads_n(body) for _, body in terms)
        case s.Scaled(factors):
            return any(_reads_n(body) for _, body in factors)
        case s.Bracket(inner):
            return _reads_n(inner)
        case _:
            return False


def _equation(
    scope: Scope, diagram: Diagram, node: s.EquationLine, env: Env, span: Span, reads: set[str]
) -> EquationIntent:
    """`y[n] = ..`, with what is said about samples before 0. Raises Fault."""
    left = node.left
    now = _sample(scope, left, env)
    if now is None or now.late:
        name = full_name(scope, s.Reference(left.name, (), left.start, left.end), env)
        raise scope.fault(
            "intent-left",
            "an intent says what an output is",
            left.start,
            left.end,
            f"write intent {name}[n] = .., or intent {name} / input = ..",
        )
    base = s.Reference(left.name, left.parts[:-1], left.start, left.end)
    output = output_port(scope, base, env)

    if _bare_n(node.right):
        raise scope.fault("not-yet", "`a closed form in n` is not known here yet", node.right.start, node.right.end)

    def leaf(scope: Scope, reference: s.Reference, env: Env) -> Expression:
        sample = _sample(scope, reference, env)
        if sample is None:
            return coefficient_leaf(scope, reference, env)
        _allowed(scope, diagram, output, sample, reference)
        return sample

    right = checked(scope, expression(scope, node.right, env, leaf), node.right)
    check_linear(scope, right, node.right)
    earliest = earliest_samples(right)
    history: list[tuple[str, int, Expression]] = []
    for reference, value in node.history:
        name, early, found = _history(scope, diagram, output, reference, value, env)
        _expect_read(scope, earliest.get(name, 0), history, (name, early), reference)
        history.append((name, early, found))
        reads |= names_in(found)
    reads |= names_in(right)
    return EquationIntent(output, right, tuple(history), span)


def _allowed(scope: Scope, diagram: Diagram, output: str, sample: Sample, at: s.Reference) -> None:
    """An equation reads inputs up to now and the past of its own output. Raises Fault."""
    is_input = isinstance(diagram.elements.get(sample.signal), Input)
    if not is_input and sample.signal != output:
        if sample.signal in scope.broken:
            raise scope.silent()
        raise scope.fault(
            "equation-signal",
            f"{sample.signal} is neither an input nor {output} itself",
            at.start,
            at.end,
            f"an equation for {output} reads inputs and the past of {output}",
        )
    if sample.late < (0 if is_input else 1):
        raise scope.fault(
            "equation-time",
            "an equation reads nothing later than sample n" if is_input else f"{output}[n] cannot be its own source",
            at.start,
            at.end,
        )


def _history(
    scope: Scope, diagram: Diagram, output: str, reference: s.Reference, value: s.Expr, env: Env
) -> tuple[str, int, Expression]:
    """`y[-1] = 1`: the value of a signal before sample 0. Raises Fault."""
    last = reference.parts[-1] if reference.parts else None
    early = -whole(scope, last.place, env, "a time") if isinstance(last, s.At) else 0
    base = s.Reference(reference.name, reference.parts[:-1], reference.start, reference.end)
    within_reach(scope, early, reference)
    name = full_name(scope, base, env)
    if early < 1:
        raise scope.fault(
            "history",
            "what follows the comma is a sample before 0",
            reference.start,
            reference.end,
            f"write {output}[-1] = ..",
        )
    _allowed(scope, diagram, output, Sample(name, early), reference)
    return name, early, checked(scope, expression(scope, value, env, coefficient_leaf), value)


def _expect_read(
    scope: Scope, earliest: int, before: list[tuple[str, int, Expression]], sample: tuple[str, int], at: s.Reference
) -> None:
    """A value before sample 0 is given once and read by the equation. Raises Fault."""
    name, early = sample
    if (name, early) in [(given_name, given_early) for given_name, given_early, _ in before]:
        raise scope.fault(
            "defined-twice", f"{name}[-{early}] has a value already", at.start, at.end, "take one of them away"
        )
    if early > earliest:
        raise scope.fault(
            "unread",
            f"the equation never reads {name}[-{early}]",
            at.start,
            at.end,
            "take it away" + (f"; the earliest it reads is {name}[-{earliest}]" if earliest else ""),
        )


def _same_as(
    scope: Scope,
    program: Program,
    diagram: Diagram,
    output: str,
    applied: s.Application,
    line: Instance,
    reads: set[str],
) -> DiagramIntent:
    """`y = OTHER(x)`. Raises Fault."""
    made = program.used(scope, applied.diagram)
    other = made.diagram
    assert other is not None
    if len(other.outputs) != 1:
        raise scope.fault(
            "intent-outputs",
            f"{other.name} has {len(other.outputs)} outputs, and an intent compares one",
            applied.diagram.start,
            applied.diagram.end,
        )
    values = given(scope, other, applied, 0, line.env)
    fed = arguments(scope, other, applied)
    inputs = tuple((port, input_port(scope, diagram, reference, line.env)) for port, reference in fed.items())
    for value in values.values():
        reads |= names_in(value)
    scope.grow(made.size, line.start, line.end)
    renamed = in_terms_of_user(other, values, diagram.coefficients)
    span = scope.span(line.start, line.end)
    return DiagramIntent(output, renamed, inputs, tuple(values.items()), span)
