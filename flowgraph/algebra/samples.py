"""The second road to equality: exact impulse responses instead of transfer functions.

With n1 and n2 cells the difference of two diagrams is a system of n1 + n2 cells, so by the theorem
of Cayley and Hamilton its response to a pulse vanishes for ever when its first n1 + n2 + 1 samples
do, and its answer to the starting contents when the first n1 + n2 do.
"""

from __future__ import annotations

from dataclasses import replace

from flowgraph.algebra.behaviour import DiagramBehaviour
from flowgraph.algebra.compare import Comparison
from flowgraph.algebra.exact_rings import exact_ring
from flowgraph.algebra.ring import ExactRing, Polynomial
from flowgraph.algebra.solve import STARTS
from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.elements import Delay
from flowgraph.diagram.simulate import simulate


def compare_by_samples(left: Diagram, right: Diagram) -> Comparison:
    """What compare() answers, for every value of the coefficients, from exact samples alone.

    Meant for small diagrams: the samples are polynomials in the coefficients and grow with n.
    """
    coefficients = {**left.coefficients, **right.coefficients}
    ring = exact_ring(coefficients, [*DiagramBehaviour(left).expressions(), *DiagramBehaviour(right).expressions()])
    samples = sum(delay.length for diagram in (left, right) for delay in diagram.delays()) + 1
    for output in left.outputs:
        for source in [*(port.name for port in left.inputs()), STARTS]:
            mine = _samples(left, output, source, samples, ring)
            other = _samples(right, output, source, samples, ring)
            for value, other_value in zip(mine, other, strict=True):
                cleared, other_cleared = ring.cleared(value, other_value)
                if cleared != other_cleared:
                    return Comparison(False, "exact", differs_at=(output, source))
    return Comparison(True, "exact")


def _samples(diagram: Diagram, output: str, source: str, samples: int, ring: ExactRing[Polynomial]) -> list[Polynomial]:
    """The response of one output to a pulse at one input, or to the starting contents alone."""
    if source == STARTS:
        return simulate(diagram, ring.coefficient, {}, samples, ring.zero)[output]
    elements = {
        name: replace(element, starts=()) if isinstance(element, Delay) else element
        for name, element in diagram.elements.items()
    }
    at_rest = replace(diagram, elements=elements)
    return simulate(at_rest, ring.coefficient, {source: [ring.one]}, samples, ring.zero)[output]
