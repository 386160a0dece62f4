"""The printer: what it writes reads back as the same diagram."""

from __future__ import annotations

from hypothesis import given
from strategies import diagrams

from flowgraph.diagram.diagram import Diagram
from flowgraph.text.load import load_text
from flowgraph.text.printer import print_diagram


def read_back(text: str) -> Diagram:
    """The one diagram of a text, which may lack claims but nothing else."""
    loaded = load_text(text)
    assert [
        found.message for found in loaded.findings if found.severity == "error" and not found.code.startswith("claim-")
    ] == []
    return loaded.diagrams[-1]


@given(diagrams())
def test_printed_diagrams_read_back_equal(diagram: Diagram) -> None:
    """Print, then read: elements, outputs, coefficients and contents are the same."""
    assert read_back(print_diagram(diagram)) == diagram
