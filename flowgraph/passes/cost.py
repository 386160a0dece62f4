"""What every step must lower."""

from __future__ import annotations

from flowgraph.diagram.diagram import Diagram, count


def cost(diagram: Diagram) -> tuple[int, int, int, int]:
    """Cells, multiplies, adds and elements: compared in this order, and strictly falling, so rewriting ends."""
    counts = count(diagram)
    return counts.cells, counts.multiplies, counts.adds, len(diagram.elements)
