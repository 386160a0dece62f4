"""Expressions of the file -> exact expressions: coefficients, fixed numbers, indices, full names."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from fractions import Fraction
from typing import TypeAlias, cast

from flowgraph.diagram.expression import (
    ONE,
    ZERO,
    Expression,
    Function,
    FunctionName,
    Name,
    Negative,
    Number,
    Power,
    Product,
    Quotient,
    Sum,
)
from flowgraph.text import syntax as s
from flowgraph.text.exact import BITS, ELEMENTS, TERMS, TooLargeError
from flowgraph.text.names import refuse_label
from flowgraph.text.quantities import InexactError, UnequalPowersError, as_expression, plain_value, seconds_of, value_of
from flowgraph.text.scope import Env, Fault, Fixed, Scope
from flowgraph.text.words import nearest

Leaf: TypeAlias = Callable[[Scope, s.Reference, Env], Expression]
"""What a name in an expression stands for."""


def whole(scope: Scope, expr: s.Expr, env: Env, what: str = "an index") -> int:
    """The integer value of a const expression. Raises Fault."""
    quick = _quick_whole(expr, env)
    if quick is not None:
        return quick
    value, seconds = fixed(scope, expr, env)
    if value.denominator != 1 or seconds:
        raise scope.fault("not-whole", f"{what} is a whole number, and this is {value}", expr.start, expr.end)
    return value.numerator


def _quick_whole(expr: s.Expr, env: Env) -> int | None:
    """The value of the usual indices k, k - 1, 2*k + 1 without fractions; None for all others."""
    if isinstance(expr, s.Reference):
        found = None if expr.parts else env.get(expr.name)
        return found if isinstance(found, int) else None
    if isinstance(expr, s.Figure):
        return expr.value.numerator if expr.unit == "" and expr.value.denominator == 1 else None
    if isinstance(expr, s.Total):
        total = 0
        for negative, body in expr.terms:
            term = _quick_whole(body, env)
            if term is None:
                return None
            total += -term if negative else term
        return total
    if isinstance(expr, s.Scaled):
        product = 1
        for divides, body in expr.factors:
            factor = None if divides else _quick_whole(body, env)
            if factor is None:
                return None
            product *= factor
        return product
    return None


def index(scope: Scope, at: s.At, env: Env) -> int | str:
    """A const integer, or a label. Raises Fault."""
    expr = at.place
    if isinstance(expr, s.Reference) and not expr.parts:
        found = env.get(expr.name)
        if found is not None:
            return found
        if expr.name in scope.labels:
            return expr.name
    return whole(scope, expr, env)


def plain_index(at: s.At, env: Env) -> int | str | None:
    """The value of an index that is just the variable of a repeat, as most are; None for all others."""
    place = at.place
    return env.get(place.name) if isinstance(place, s.Reference) and not place.parts else None


def full_name(scope: Scope, reference: s.Reference, env: Env) -> str:
    """`f[2]`, `in[left]`, `low.w1`: the name with every index worked out. Raises Fault."""
    name = reference.name
    for part in reference.parts:
        if isinstance(part, str):
            name += f".{part}"
        else:
            plain = plain_index(part, env)
            name += f"[{index(scope, part, env) if plain is None else plain}]"
    return name


def checked(scope: Scope, found: Expression, expr: s.Expr) -> Expression:
    """The same expression. Raises Fault where its powers of seconds do not fit, or numbers leave the bounds."""
    if isinstance(found, Number | Name):
        return found
    try:
        seconds_of(found, scope.seconds)
        value_of(found, {})
    except UnequalPowersError as error:
        raise scope.fault("units", str(error), expr.start, expr.end) from None
    except InexactError:
        pass
    except (TooLargeError, ZeroDivisionError) as error:
        raise _unworkable(scope, error, expr) from None
    return found


def fixed(scope: Scope, expr: s.Expr, env: Env) -> Fixed:
    """The exact value of a const expression. Raises Fault."""
    found = expression(scope, expr, env, const_leaf)
    try:
        return Fixed(value_of(found, {}), seconds_of(found, {}) or Fraction(0))
    except UnequalPowersError as error:
        raise scope.fault("units", str(error), expr.start, expr.end) from None
    except InexactError:
        raise scope.fault(
            "not-const", "this has no exact value as a fraction", expr.start, expr.end,
            "a const is made of numbers, consts and + - * / ^; make it a coef",
        ) from None  # fmt: skip
    except (TooLargeError, ZeroDivisionError) as error:
        raise _unworkable(scope, error, expr) from None


def _unworkable(scope: Scope, error: ArithmeticError | ValueError, expr: s.Expr) -> Fault:
    if isinstance(error, ZeroDivisionError):
        return scope.fault("zero-division", "this divides by zero", expr.start, expr.end)
    return scope.fault("too-large", f"this needs more than {BITS} bits", expr.start, expr.end)


def expression(scope: Scope, expr: s.Expr, env: Env, leaf: Leaf) -> Expression:
    """The exact expression; `leaf` says what names stand for. Raises Fault."""
    match expr:
        case s.Figure(value, unit):
            return Number(value, unit)
        case s.Reference():
            return leaf(scope, expr, env)
        case s.Total(terms):
            parts = [expression(scope, body, env, leaf) for _, body in terms]
            if len(parts) == 1:
                return minus(parts[0]) if terms[0].negative else parts[0]
            signed = [Negative(part) if term.negative else part for term, part in zip(terms, parts, strict=True)]
            return Sum(tuple(signed))
        case s.Scaled(factors):
            worked = [(divides, expression(scope, body, env, leaf)) for divides, body in factors]
            for (divides, factor), (_, body) in zip(worked, factors, strict=True):
                if divides and plain_value(factor) == 0:
                    raise scope.fault("zero-division", "this divides by zero", expr.start, body.end)
            return _scaled(worked)
        case s.Raised():
            return _raised(scope, expr, env, leaf)
        case s.Bracket(inner):
            return expression(scope, inner, env, leaf)
        case s.Call(function, inner):
            argument = expression(scope, inner, env, leaf)
            if function == "sqrt" and (plain_value(argument) or 0) < 0:
                raise scope.fault("root", "this is the root of a negative number", expr.start, expr.end)
            return Function(cast(FunctionName, function), argument)
        case s.Fold(kind):
            folded = [expression(scope, expr.body, inner, leaf) for inner in steps(scope, expr, env)]
            if len(folded) < 2:
                return folded[0] if folded else (ZERO if kind == "total" else ONE)
            return Sum(tuple(folded)) if kind == "total" else Product(tuple(folded))
        case s.CountOf(array):
            return Number(Fraction(array_length(scope, array)))


def array_length(scope: Scope, array: s.Word) -> int:
    """How many entries a coefficient array has. Raises Fault."""
    if array.text not in scope.arrays:
        if array.text in scope.broken:
            raise scope.silent()
        raise scope.fault("undefined", f"{array.text} is no array of coefficients", array.start, array.end)
    return scope.arrays[array.text]


def steps(scope: Scope, fold: s.Fold, env: Env) -> Iterator[Env]:
    """The variables for each term of a total or product, in rising order. Raises Fault."""
    first, last = whole(scope, fold.first, env, "an end of a range"), whole(scope, fold.last, env, "an end of a range")
    scope.terms += max(0, last - first + 1)
    if scope.terms > TERMS:
        raise scope.fault(
            "too-large", f"this {fold.kind} makes more than {TERMS} terms of its line", fold.start, fold.end
        )
    return ({**env, fold.variable.text: k} for k in range(first, last + 1))


def minus(factor: Expression) -> Expression:
    """The negative of an expression; a number takes the sign itself."""
    return Number(-factor.value, factor.unit) if isinstance(factor, Number) else Negative(factor)


def _scaled(factors: list[tuple[bool, Expression]]) -> Expression:
    """a*b/c*d from left to right."""
    gathered: list[Expression] = []
    for divides, factor in factors:
        if divides:
            gathered = [_quotient(_product(gathered), factor)]
        else:
            gathered.append(factor)
    return _product(gathered)


def _quotient(upper: Expression, lower: Expression) -> Expression:
    """upper / lower; a number divided by a plain number is one exact number."""
    if isinstance(upper, Number) and isinstance(lower, Number) and lower.value and lower.unit in ("", "%"):
        return Number(upper.value / lower.value, upper.unit)
    return Quotient(upper, lower)


def _product(factors: list[Expression]) -> Expression:
    return factors[0] if len(factors) == 1 else Product(tuple(factors))


def _raised(scope: Scope, expr: s.Raised, env: Env, leaf: Leaf) -> Expression:
    base = expression(scope, expr.base, env, leaf)
    at = expr.exponent
    exponent, seconds = fixed(scope, at, env)
    if seconds:
        raise scope.fault("units", "an exponent is a plain number", at.start, at.end)
    if exponent.denominator != 1 and base != Number(Fraction(10)):
        raise scope.fault(
            "exponent",
            "an exponent is a whole number",
            at.start,
            at.end,
            "only 10 may have another one, as in 10^(-6/20); for a root write sqrt(..)",
        )
    limit = ELEMENTS if base == Name("z") else BITS
    if exponent < 0 and plain_value(base) == 0:
        raise scope.fault("zero-division", "this divides by zero", expr.start, expr.end)
    if abs(exponent) > limit:
        raise scope.fault("too-large", f"an exponent beyond {limit}", at.start, at.end)
    return Power(base, exponent)


def const_leaf(scope: Scope, reference: s.Reference, env: Env) -> Expression:
    """Names in const expressions: consts, repeat variables, rate and half."""
    found = known_number(scope, reference, env)
    if found is not None:
        return found
    refuse_label(scope, reference, env)
    name = full_name(scope, reference, env)
    if name in scope.broken or reference.name in scope.broken:
        raise scope.silent()
    if name == "n":
        raise scope.fault("time-index", "n stands only in intents", reference.start, reference.end)
    close = nearest(name, list(scope.consts))
    raise scope.fault(
        "not-const",
        f"{name} is no const, and this place needs a number known beforehand",
        reference.start,
        reference.end,
        f"did you mean {close}?" if close else f"define const {name} = ..",
    )


def known_number(scope: Scope, reference: s.Reference, env: Env) -> Expression | None:
    """A repeat variable, rate, half or const; None for every other name."""
    if reference.parts:
        return None
    name = reference.name
    step = env.get(name)
    if isinstance(step, int):
        return Number(Fraction(step))
    if name in scope.consts:
        return as_expression(*scope.consts[name])
    if name not in ("rate", "half"):
        return None
    scope.used_rate = True
    if scope.rate is None and "rate" in scope.broken:
        raise scope.silent()
    if scope.rate is None:
        raise scope.fault(
            "rate-missing",
            f"{name} is read here, and the diagram has no rate",
            reference.start,
            reference.end,
            "add a line such as: rate 48 kHz",
        )
    return Number(scope.rate if name == "rate" else scope.rate / 2, "Hz")
