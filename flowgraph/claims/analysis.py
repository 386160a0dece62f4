"""What a diagram is, without any claim: its transfer functions, modes, stability and least order."""

from __future__ import annotations

from dataclasses import dataclass, replace
from fractions import Fraction

from flint import fmpz_poly

from flowgraph.algebra.exact_rings import TooLarge
from flowgraph.algebra.modes import CELL_LIMIT, HiddenMode, Modes, modes
from flowgraph.algebra.numbers import numbered
from flowgraph.algebra.rational_functions import Undefined
from flowgraph.algebra.residues import drawn
from flowgraph.algebra.stability import Stability
from flowgraph.algebra.stability_at_values import characteristic_factors, stability_at_values
from flowgraph.algebra.states import cells_of
from flowgraph.algebra.transfer import (
    NamedEquation,
    NamedTransfer,
    NumberTransfer,
    factors_in_z,
    named_equations,
    named_transfers,
    number_transfers,
    roots_in_z,
)
from flowgraph.algebra.values import NoExactValueError
from flowgraph.diagram.diagram import Coefficient, Diagram
from flowgraph.diagram.expression import Function, Number

ROOT_DEGREE = 400
"""Degree up to which poles and zeros are computed."""

Root = tuple[float, float, int]
"""Real part, imaginary part, multiplicity."""


@dataclass(frozen=True, slots=True)
class Analysis:
    """All that `analyse` tells of one diagram.

    `named` and `equations` are None where the polynomials with names grow beyond the work limit. What needs numbers
    is None where a coefficient has no value; `exact` is False where one was rounded to a double.
    `order` is the least number of cells; beyond CELL_LIMIT cells it is known for a single response only.
    """

    cells: int
    named: dict[tuple[str, str], NamedTransfer] | None
    equations: dict[str, NamedEquation] | None
    numbers: dict[tuple[str, str], NumberTransfer] | None
    poles: list[Root] | None
    stability: Stability | None
    exact: bool
    order: int | None
    hidden: tuple[HiddenMode, ...]
    remarks: tuple[str, ...]


def analyse(diagram: Diagram) -> Analysis:
    """Analyses one diagram; it must have no delay-free loop."""
    remarks: list[str] = []
    named: dict[tuple[str, str], NamedTransfer] | None = None
    equations: dict[str, NamedEquation] | None = None
    try:
        named = named_transfers(_with_functions_named(diagram))
        equations = named_equations(_with_functions_named(diagram))
    except TooLarge:
        remarks.append("with names, the polynomials grow beyond the work limit")
    except Undefined as error:
        remarks.append(str(error))
    cells = len(cells_of(diagram))
    try:
        numbers = numbered(diagram)
    except NoExactValueError as error:
        remarks.append(f"{error}, so poles and stability have no answer here")
        found = _modes_at_trial_values(diagram, cells) if 0 < cells <= CELL_LIMIT else None
        order = found.order if found else 0 if not cells else None
        hidden = found.hidden if found else ()
        return Analysis(cells, named, equations, None, None, None, True, order, hidden, tuple(remarks))
    if not numbers.exact:
        remarks.append("sqrt, sin, cos, tan, exp and pi are taken as the nearest doubles for poles and hidden modes")
    transfers: dict[tuple[str, str], NumberTransfer] | None = None
    try:
        transfers = number_transfers(numbers.diagram).transfers
        stability = stability_at_values(diagram).stability
        factors = _factors(numbers.diagram, cells)
    except TooLarge:
        remarks.append("the exact polynomials grow beyond the work limit")
        return Analysis(cells, named, equations, None, None, None, numbers.exact, None, (), tuple(remarks))
    poles = _roots(factors)
    if poles is None:
        remarks.append(f"poles are not listed beyond degree {ROOT_DEGREE}")
    found = modes(numbers.diagram, factors, diagram.name) if cells <= CELL_LIMIT and poles is not None else None
    if found is None:
        remarks.append(f"hidden modes are not looked for beyond {CELL_LIMIT} cells")
    return Analysis(
        cells,
        named,
        equations,
        transfers,
        poles,
        stability,
        numbers.exact,
        found.order if found else _order_of_one(diagram, transfers),
        found.hidden if found else (),
        tuple(remarks),
    )


def _order_of_one(diagram: Diagram, transfers: dict[tuple[str, str], NumberTransfer]) -> int | None:
    """The least number of cells where one response from rest is all there is: its degree in lowest terms."""
    if len(transfers) != 1 or any(delay.starts for delay in diagram.delays()):
        return None
    return next(iter(transfers.values())).order()


def zeros(transfer: NumberTransfer) -> list[Root] | None:
    """The zeros in z of one response, None beyond ROOT_DEGREE.

    A delay of the whole response leaves no zero; N(w) of degree n over D(w) of degree m has
    max(0, m - n) zeros at z = 0.
    """
    if transfer.numerator.degree() > ROOT_DEGREE:
        return None
    numerator = transfer.numerator
    while numerator and numerator[0] == 0:
        numerator = numerator.right_shift(1)
    found = _roots(factors_in_z([numerator], 0)) if numerator else []
    at_zero = transfer.denominator.degree() - transfer.numerator.degree()
    return [*(found or []), (0.0, 0.0, at_zero)] if numerator and at_zero > 0 else found


def _factors(diagram: Diagram, cells: int) -> list[tuple[fmpz_poly, int]]:
    determinants = characteristic_factors(diagram)
    if sum(determinant.degree() for determinant in determinants) > ROOT_DEGREE:
        return [(fmpz_poly([0] * (ROOT_DEGREE + 1) + [1]), 1)]
    return factors_in_z(determinants, cells)


def _roots(factors: list[tuple[fmpz_poly, int]]) -> list[Root] | None:
    """All roots with multiplicities, largest radius first; None beyond ROOT_DEGREE."""
    if any(factor.degree() > ROOT_DEGREE for factor, _ in factors):
        return None
    roots = [
        (real, imaginary, multiplicity * times)
        for factor, times in factors
        for real, imaginary, multiplicity in roots_in_z(factor)
    ]
    return sorted(roots, key=lambda root: (-(root[0] ** 2 + root[1] ** 2), root[0], root[1]))


def _modes_at_trial_values(diagram: Diagram, cells: int) -> Modes | None:
    """Modes with numbers drawn for the open coefficients: what is hidden there is hidden for every value.

    (Or these values meet an identity by chance, which random 60-bit numerators make next to impossible.)
    None where a coefficient has no value at them either.
    """
    coefficients = {
        name: Coefficient(name, Number(Fraction(drawn(diagram.name, name, 2**60), 2**60)))
        if coefficient.value is None
        else coefficient
        for name, coefficient in diagram.coefficients.items()
    }
    try:
        trial = numbered(replace(diagram, coefficients=coefficients)).diagram
    except NoExactValueError:
        return None
    return modes(trial, _factors(trial, cells), diagram.name)


def _with_functions_named(diagram: Diagram) -> Diagram:
    """Coefficients that are one function value (c = cos(..)) keep their name: it is free in proofs anyway."""
    coefficients = {
        name: Coefficient(name) if isinstance(coefficient.value, Function) else coefficient
        for name, coefficient in diagram.coefficients.items()
    }
    return replace(diagram, coefficients=coefficients)
