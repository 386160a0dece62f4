"""A single value as it may stand in a diagram file: `0.98`, `1/3`, `50 Hz`, `cos(pi/8)`."""

from __future__ import annotations

from flowgraph.diagram.expression import Expression, names_in
from flowgraph.text.load import load_text


def read_value(text: str) -> Expression:
    """The exact expression. Raises ValueError, in the user's words, where the text is no value."""
    if not text.strip() or any(character in text for character in "\n\r{}#"):
        raise ValueError("a value is a number or an expression of numbers")
    # The value stands in a diagram of its own, so that it is read just as it would be in a file.
    loaded = load_text(f"diagram value {{\ninput x\noutput y\ncoef value = {text}\ngain y = value*x\n}}")
    for found in loaded.findings:
        if not found.code.startswith("claim-"):
            raise ValueError(found.message)
    value = loaded.diagrams[0].coefficients["value"].value
    if value is None or names_in(value):
        raise ValueError("a value is a number or an expression of numbers")
    return value
