"""Whether the right side of a difference equation is linear in its samples."""

from __future__ import annotations

from flowgraph.diagram.expression import Expression, Negative, Product, Quotient, Sample, Sum, children
from flowgraph.text import syntax as s
from flowgraph.text.scope import Scope


def check_linear(scope: Scope, right: Expression, at: s.Expr) -> None:
    """Raises Fault unless every term is a coefficient times one sample."""
    if not has_samples(right):
        raise scope.fault("not-yet", "`a closed form in n` is not known here yet", at.start, at.end)
    if not _is_linear(right):
        raise scope.fault(
            "equation-linear",
            "an equation is a sum of terms coef * name[n - k]",
            at.start,
            at.end,
            "no constants alone, no products of samples, no functions of samples",
        )


def has_samples(expression: Expression) -> bool:
    """Whether a sample stands anywhere in an expression."""
    return isinstance(expression, Sample) or any(has_samples(inner) for inner in children(expression))


def _is_linear(expression: Expression) -> bool:
    match expression:
        case Sample():
            return True
        case Sum(terms):
            return all(_is_linear(term) for term in terms)
        case Negative(inner):
            return _is_linear(inner)
        case Product(factors):
            sampled = [factor for factor in factors if has_samples(factor)]
            return len(sampled) == 1 and _is_linear(sampled[0])
        case Quotient(upper, lower):
            return _is_linear(upper) and not has_samples(lower)
        case _:
            return False
