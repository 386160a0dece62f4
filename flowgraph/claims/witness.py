"""A witness against an intent: coefficient values and the first sample at which both sides part."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from fractions import Fraction

from flowgraph.algebra.behaviour import Behaviour, DiagramBehaviour, RatioBehaviour
from flowgraph.algebra.residues import drawn
from flowgraph.algebra.valuation import followed_expression, following_order
from flowgraph.algebra.values import NoExactValueError, Values
from flowgraph.claims.response import balls_at, first_difference, fractions_at, powers_of_z
from flowgraph.claims.verdict import Counterexample
from flowgraph.diagram.diagram import Coefficient
from flowgraph.diagram.expression import Expression, Number, names_in

TRIES = 12
"""Choices of values for coefficients before the search for a witness ends."""

WORK_LIMIT = 2_000_000
"""Samples times elements of one search."""


@dataclass(frozen=True, slots=True)
class Search:
    """What a search for a witness found.

    `counterexample` is None when nothing was certainly different. `file_agrees` says that at the
    values of the file both sides were found equal, exactly when `exact`, else as far as balls tell.
    `cut_off` is the number of samples looked at where that is too few to tell that, else 0.
    """

    counterexample: Counterexample | None
    file_agrees: bool
    exact: bool
    cut_off: int = 0


def search_witness(
    left: Behaviour, right: Behaviour, pair: tuple[str, str], coefficients: Mapping[str, Coefficient]
) -> Search:
    """Looks for a difference at the values of the file, then at other values of all that may vary."""
    expressions = [*left.expressions(), *right.expressions()]
    varying = varying_names(coefficients, expressions)
    open_names = [name for name in varying if name not in coefficients or coefficients[name].value is None]
    enough, affordable = _samples(left, right)
    samples = min(enough, affordable)
    cut_off = samples if samples < enough else 0
    exact, file_agrees = True, False
    choices = [] if open_names else [list[tuple[str, Fraction]]()]
    choices.extend(_chosen_values(varying, attempt) for attempt in range(TRIES if varying else 0))
    for chosen in choices:
        here = {**coefficients, **{name: Coefficient(name, Number(value)) for name, value in chosen}}
        exact = _rational(here, expressions)
        try:
            found = _difference(left, right, pair, here, exact, samples)
        except (ZeroDivisionError, NoExactValueError):
            continue  # these values are a pole of a coefficient: others are tried
        if found:
            said = tuple((name, str(value)) for name, value in chosen)
            return Search(_counterexample(pair, found, said), file_agrees, exact, cut_off)
        file_agrees = file_agrees or not (chosen or cut_off)
    return Search(None, file_agrees, exact, cut_off)


def varying_names(coefficients: Mapping[str, Coefficient], expressions: list[Expression]) -> list[str]:
    """The names that may take any value in a proof about the expressions, sorted."""
    names = {name for expression in expressions for name in names_in(expression)}
    order = following_order(coefficients, names, at_values=False)
    return sorted(name for name in order if followed_expression(coefficients, name, at_values=False) is None)


def _rational(coefficients: Mapping[str, Coefficient], expressions: list[Expression]) -> bool:
    """Whether all expressions have rational values."""
    values = Values(coefficients)
    return all(values.is_rational(expression) for expression in expressions)


def _chosen_values(names: list[str], attempt: int) -> list[tuple[str, Fraction]]:
    """Small, different values for the names; the first choice is 1/2, 1/3, 1/4 .. for easy reading."""
    if attempt == 0:
        return [(name, Fraction(1, at + 2)) for at, name in enumerate(names)]
    return [(name, Fraction(drawn(str(attempt), name, 61) - 30, 32)) for name in names]


def _difference(
    left: Behaviour,
    right: Behaviour,
    pair: tuple[str, str],
    coefficients: Mapping[str, Coefficient],
    exact: bool,
    samples: int,
) -> tuple[int, str, str] | None:
    here = (_with_values(left, coefficients), _with_values(right, coefficients))
    if exact:
        return first_difference(*here, pair, fractions_at(coefficients), samples)
    return first_difference(*here, pair, balls_at(coefficients), samples)


def _with_values(behaviour: Behaviour, coefficients: Mapping[str, Coefficient]) -> Behaviour:
    match behaviour:
        case DiagramBehaviour(diagram):
            return DiagramBehaviour(replace(diagram, coefficients=coefficients))
        case RatioBehaviour(ratio, late, _):
            return RatioBehaviour(ratio, late, coefficients)
        case _:
            return behaviour


def _counterexample(
    pair: tuple[str, str], found: tuple[int, str, str], coefficients: tuple[tuple[str, str], ...]
) -> Counterexample:
    sample, value, claimed = found
    return Counterexample(pair[0], pair[1], sample, value, claimed, coefficients)


def _samples(left: Behaviour, right: Behaviour) -> tuple[int, int]:
    """How many samples decide equality, one more than all cells (Cayley-Hamilton), and how many WORK_LIMIT allows."""
    cells, elements = 0, 1
    for behaviour in (left, right):
        match behaviour:
            case DiagramBehaviour(diagram):
                cells += sum(delay.length for delay in diagram.delays())
                elements += len(diagram.elements)
            case RatioBehaviour(ratio, late, _):
                cells += late + powers_of_z(ratio)
    return max(16, cells + 1), max(16, WORK_LIMIT // elements)
