"""A used diagram spelled out in its user's terms: elements and coefficients under `path.`."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import replace

from flowgraph.diagram.claim import Claim, EquationIntent, RatioIntent
from flowgraph.diagram.diagram import Coefficient, Diagram
from flowgraph.diagram.elements import Adder, Delay, Element, Gain, Input, Signal, Term, with_expressions
from flowgraph.diagram.expression import Expression, names_in, rename


def elements_under(path: str, diagram: Diagram, fed: Mapping[str, Signal]) -> dict[str, Element]:
    """The elements of a used diagram with their full names, fed with the user's signals; inputs vanish."""
    names = {name: f"{path}.{name}" for name in diagram.elements}
    placed = _renamer(path, diagram)
    spelled: dict[str, Element] = {}

    def moved(signal: Signal) -> Signal:
        return fed.get(signal.name) or Signal(names[signal.name], signal.tap)

    for name, element in diagram.elements.items():
        full = names[name]
        match element:
            case Input():
                continue
            case Adder(terms=terms):
                spelled[full] = Adder(
                    full,
                    tuple(
                        [
                            Term(
                                moved(term.signal),
                                term.negative,
                                placed(term.coefficient) if term.coefficient else None,
                                term.span,
                            )
                            for term in terms
                        ]
                    ),
                    element.span,
                )
            case Gain():
                spelled[full] = Gain(full, placed(element.coefficient), moved(element.signal), element.span)
            case Delay():
                starts = tuple([placed(start) for start in element.starts])
                spelled[full] = Delay(full, moved(element.signal), element.length, starts, element.span)
    return spelled


def coefficients_under(path: str, diagram: Diagram, given: Mapping[str, Expression]) -> dict[str, Coefficient]:
    """The coefficients of a used diagram under their full names; those in `given` have that value."""
    placed = _renamer(path, diagram)
    spelled: dict[str, Coefficient] = {}
    for name, found in diagram.coefficients.items():
        full = f"{path}.{name}"
        if name in given:
            spelled[full] = Coefficient(full, given[name], True, found.span)
        else:
            value = None if found.value is None else placed(found.value)
            spelled[full] = Coefficient(full, value, found.given, found.span)
    return spelled


def _renamer(path: str, diagram: Diagram) -> Callable[[Expression], Expression]:
    """Puts coefficient names under `path`; each expression object is renamed once."""
    names = {name: f"{path}.{name}" for name in diagram.coefficients}
    if not names:
        return lambda expression: expression
    done: dict[int, Expression] = {}

    def placed(expression: Expression) -> Expression:
        key = id(expression)
        if key not in done:
            done[key] = rename(expression, names)
        return done[key]

    return placed


def in_terms_of_user(diagram: Diagram, given: Mapping[str, Expression], outer: Mapping[str, Coefficient]) -> Diagram:
    """The diagram with its coefficients under its own name, next to the user's that the given values follow."""
    path = diagram.name
    renamed = with_renamed_coefficients(diagram, {name: f"{path}.{name}" for name in diagram.coefficients})
    needed = _followed(list(given.values()), outer)
    return replace(renamed, coefficients={**needed, **coefficients_under(path, diagram, given)})


def with_renamed_coefficients(diagram: Diagram, names: dict[str, str]) -> Diagram:
    """The same diagram with coefficients called otherwise, in elements, claims and values."""

    def placed(expression: Expression) -> Expression:
        return rename(expression, names)

    elements = {name: with_expressions(element, placed) for name, element in diagram.elements.items()}
    coefficients = {
        names.get(name, name): replace(
            found, name=names.get(name, name), value=None if found.value is None else placed(found.value)
        )
        for name, found in diagram.coefficients.items()
    }
    claims = tuple([_claim_under(found, placed) for found in diagram.claims])
    return replace(diagram, elements=elements, coefficients=coefficients, claims=claims)


def _claim_under(found: Claim, placed: Callable[[Expression], Expression]) -> Claim:
    match found:
        case EquationIntent():
            history = tuple([(name, early, placed(value)) for name, early, value in found.history])
            return replace(found, right=placed(found.right), history=history)
        case RatioIntent():
            return replace(found, ratio=placed(found.ratio))
        case _:
            return found


def _followed(values: list[Expression], outer: Mapping[str, Coefficient]) -> dict[str, Coefficient]:
    """The coefficients that expressions follow, directly or through others, in the order of `outer`."""
    found: set[str] = set()
    waiting = list(values)
    while waiting:
        for name in names_in(waiting.pop()):
            if name in outer and name not in found:
                found.add(name)
                value = outer[name].value
                waiting.extend([] if value is None else [value])
    return {name: outer[name] for name in outer if name in found}
