"""Transfer functions in lowest terms: with the names of the coefficients, and with their numbers."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from functools import reduce

from flint import acb, fmpq, fmpq_mpoly, fmpq_poly, fmpz_poly

from flowgraph.algebra.behaviour import DiagramBehaviour
from flowgraph.algebra.exact_rings import NumberPolynomials, SymbolPolynomials, exact_ring
from flowgraph.algebra.rational_functions import symbolic_valuation
from flowgraph.algebra.ring import ExactRing, Polynomial
from flowgraph.algebra.solve import STARTS, Solution, solve
from flowgraph.diagram.diagram import Diagram


@dataclass(frozen=True, slots=True)
class NamedTransfer:
    """Coefficients of rising powers of w = z^-1, each an expression in the coefficient names."""

    numerator: tuple[str, ...]
    denominator: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class NamedEquation:
    """denominator * output = sum of numerators * inputs; coefficients of rising powers of w as in NamedTransfer."""

    denominator: tuple[str, ...]
    numerators: dict[str, tuple[str, ...]]


@dataclass(frozen=True, slots=True)
class NumberTransfer:
    """Polynomials in w in lowest terms; the denominator starts with 1."""

    numerator: fmpq_poly
    denominator: fmpq_poly

    def order(self) -> int:
        """The least number of cells that this response needs."""
        return max(self.numerator.degree(), self.denominator.degree(), 0)


def named_transfers(diagram: Diagram) -> dict[tuple[str, str], NamedTransfer]:
    """The response of every output to every input, for every value of the coefficients.

    Raises TooLarge where the polynomials would not fit a page, and much more.
    """
    behaviour = DiagramBehaviour(diagram)
    ring = exact_ring(diagram.coefficients, behaviour.expressions())
    pairs = [(output, port.name) for output in diagram.outputs for port in diagram.inputs()]
    return {pair: _named(*response, ring) for pair, response in behaviour.responses(ring, pairs).items()}


def named_equations(diagram: Diagram) -> dict[str, NamedEquation]:
    """One difference equation for every output that is not 0 for ever, all responses over one denominator.

    Raises TooLarge where the polynomials would not fit a page, and much more.
    """
    behaviour = DiagramBehaviour(diagram)
    ring = exact_ring(diagram.coefficients, behaviour.expressions())
    inputs = [port.name for port in diagram.inputs()]
    pairs = [(output, source) for output in diagram.outputs for source in (*inputs, STARTS)]
    responses = behaviour.responses(ring, pairs)
    equations: dict[str, NamedEquation] = {}
    for output in diagram.outputs:
        # All responses of one output stand over the same determinants, those on the way to it. What
        # no input reaches follows the equation of its starting contents, which has no inputs.
        uppers = {source: responses[(output, source)][0] for source in inputs}
        reached = {source: upper for source, upper in uppers.items() if upper != ring.zero}
        start, lowers = responses[(output, STARTS)]
        if reached or start != ring.zero:
            over = list(reached.values()) or [start]
            *numerators, denominator = _in_lowest_terms([*over, _product(lowers, ring)], ring)
            equations[output] = NamedEquation(denominator, dict(zip(reached, numerators, strict=False)))
    return equations


def _named(upper: Polynomial, lowers: list[Polynomial], ring: ExactRing[Polynomial]) -> NamedTransfer:
    numerator, denominator = _in_lowest_terms([upper, _product(lowers, ring)], ring)
    return NamedTransfer(numerator, denominator)


def _product(factors: list[Polynomial], ring: ExactRing[Polynomial]) -> Polynomial:
    product = ring.one
    for factor in factors:
        product = ring.times(product, factor)
    return product


def _in_lowest_terms(polynomials: list[Polynomial], ring: ExactRing[Polynomial]) -> list[tuple[str, ...]]:
    """The polynomials without their common factor, by rising powers; the last, a denominator, starts simply.

    With numbers alone its constant term is 1; with names all its coefficients are whole.
    """
    cleared = ring.cleared(*polynomials)
    if isinstance(ring, SymbolPolynomials):
        parts = [part for part in cleared if isinstance(part, fmpq_mpoly)]
        shared = reduce(fmpq_mpoly.gcd, parts)
        parts = [part // shared for part in parts]
        scale = _least_whole_factor(parts[-1])
        if _first_part(parts[-1]).leading_coefficient() < 0:
            scale = -scale
        return [_by_power(part * scale, ring) for part in parts]
    numbers = [part for part in cleared if isinstance(part, fmpq_poly)]
    common = reduce(fmpq_poly.gcd, numbers)
    numbers = [part // common for part in numbers]
    return [_strings(part / numbers[-1][0]) for part in numbers]


def _first_part(polynomial: fmpq_mpoly) -> fmpq_mpoly:
    """What a polynomial is at w = 0, or at its lowest power of w."""
    lowest = min(powers[-1] for powers in polynomial.to_dict())
    terms = {powers: value for powers, value in polynomial.to_dict().items() if powers[-1] == lowest}
    return polynomial.context().from_dict(terms)


def _least_whole_factor(polynomial: fmpq_mpoly) -> int:
    """What makes the constant term in w begin with whole numbers: the common denominator."""
    whole = 1
    for value in polynomial.coeffs():
        whole = whole * int(value.q) // _gcd(whole, int(value.q))
    return whole


def _gcd(left: int, right: int) -> int:
    while right:
        left, right = right, left % right
    return left


def _by_power(polynomial: fmpq_mpoly, ring: SymbolPolynomials) -> tuple[str, ...]:
    by_power: dict[int, dict[tuple[int, ...], fmpq]] = {}
    for powers, value in polynomial.to_dict().items():
        by_power.setdefault(powers[-1], {})[(*powers[:-1], 0)] = value
    context = polynomial.context()
    highest = max(by_power, default=0)
    return tuple(str(context.from_dict(by_power.get(power, {}))) for power in range(highest + 1))


def _strings(polynomial: fmpq_poly) -> tuple[str, ...]:
    return tuple(str(value) for value in polynomial.coeffs()) or ("0",)


@dataclass(frozen=True, slots=True)
class NumberedSolution:
    """The solution of a diagram whose coefficients are numbers."""

    solution: Solution[fmpq_poly]
    transfers: dict[tuple[str, str], NumberTransfer]

    def determinants(self) -> list[fmpq_poly]:
        return [self.solution.determinants[at] for at in sorted(self.solution.determinants)]


def number_transfers(diagram: Diagram) -> NumberedSolution:
    """The responses of a diagram with numbers for coefficients. Raises TooLarge beyond the work limit."""
    ring = NumberPolynomials(symbolic_valuation(diagram.coefficients))
    solution = solve(diagram, ring)
    transfers: dict[tuple[str, str], NumberTransfer] = {}
    for output in diagram.outputs:
        for port in diagram.inputs():
            upper, lowers = solution.pair(output, port.name, ring)
            lower = ring.one
            for factor in lowers:
                lower = ring.times(lower, factor)
            transfers[(output, port.name)] = _lowest_terms(upper, lower)
    return NumberedSolution(solution, transfers)


def _lowest_terms(upper: fmpq_poly, lower: fmpq_poly) -> NumberTransfer:
    shared = upper.gcd(lower)
    upper, lower = upper // shared, lower // shared
    first = lower[0]
    return NumberTransfer(upper / first, lower / first)


def factors_in_z(determinants: list[fmpq_poly], cells: int) -> list[tuple[fmpz_poly, int]]:
    """The irreducible factors in z of the characteristic polynomial, with multiplicities.

    det(I - w A) for all cells has them in w; what its degree falls short of the number of cells are
    modes at z = 0.
    """
    found: dict[str, tuple[fmpz_poly, int]] = {}
    degree = 0
    for determinant in determinants:
        degree += max(determinant.degree(), 0)
        for factor, multiplicity in determinant.numer().factor()[1]:
            turned = fmpz_poly(factor.coeffs()[::-1])
            if turned.leading_coefficient() < 0:
                turned = -turned
            known = found.get(str(turned), (turned, 0))
            found[str(turned)] = (turned, known[1] + multiplicity)
    if cells > degree:
        found["z"] = (fmpz_poly([0, 1]), cells - degree)
    return list(found.values())


def roots_in_z(polynomial: fmpz_poly) -> Iterator[tuple[float, float, int]]:
    """The roots of a polynomial in z as (real, imaginary, multiplicity), largest radius first."""
    found: list[tuple[acb, int]] = polynomial.complex_roots()  # type: ignore[assignment]  # stub: list[acb]
    roots = [(float(root.real.mid()), float(root.imag.mid()), multiplicity) for root, multiplicity in found]
    yield from sorted(roots, key=lambda root: (-(root[0] ** 2 + root[1] ** 2), root[0], root[1]))
