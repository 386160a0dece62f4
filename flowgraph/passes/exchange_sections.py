"""Cascaded sections in the order in which their delay lines can be shared."""

from __future__ import annotations

from flowgraph.diagram.diagram import Diagram
from flowgraph.passes.cancelled_modes import movable
from flowgraph.passes.change import Change
from flowgraph.passes.cost import cost
from flowgraph.passes.drop_unread import drop_unread
from flowgraph.passes.exchanging import exchanged
from flowgraph.passes.network import Network
from flowgraph.passes.sections import cascades
from flowgraph.passes.worthwhile import exchanges


def exchange_sections(diagram: Diagram) -> Change | None:
    """Cascaded sections at rest may change places, and the lines that then hold the same signal are shared.

    `v = b0*x + b1*x1`, `y = v - a1*y1` -> `w = x - a1*w1`, `y = b0*w + b1*w1`: A(z) B(z) = B(z) A(z),
    so direct form I becomes direct form II. Only sections with one signal in and one out, constant
    coefficients and contents 0 are moved, only where that saves cells, and never so that a mode which
    does not decay comes before the section that cancels it.
    """
    if not diagram.delays() or drop_unread(diagram) is not None:
        return None  # cells that nothing reads would be counted as saved
    network = Network(diagram)
    chains = cascades(network)
    if not exchanges(network, chains):
        return None
    found = exchanges(network, movable(network, chains))
    for chosen in (found, found[:1]):
        if chosen:
            change = exchanged(network, chosen)
            if cost(change.after) < cost(diagram):
                return change
    return None
