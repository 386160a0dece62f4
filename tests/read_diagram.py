"""Diagrams as text in tests: read without a finding, or the test fails with what was found."""

from __future__ import annotations

from flowgraph.diagram.diagram import Diagram
from flowgraph.source.render import render
from flowgraph.text.load import load_text


def read_diagrams(text: str) -> dict[str, Diagram]:
    """All diagrams of a text by name; findings on claims alone (`no intent`) are let pass."""
    loaded = load_text(text)
    errors = [found for found in loaded.findings if found.severity == "error" and not found.code.startswith("claim-")]
    assert not errors, "\n".join(render(found) for found in errors)
    return {diagram.name: diagram for diagram in loaded.diagrams}


def read_diagram(text: str) -> Diagram:
    """The last diagram of a text."""
    return list(read_diagrams(text).values())[-1]
