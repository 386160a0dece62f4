"""Diagrams in a line or two each, for tests of drawing: element lines, with coefficients declared by being used."""

from __future__ import annotations

import re

from flowgraph.diagram.diagram import Diagram
from flowgraph.text.load import load_text

DRAWN_ANYWAY = ("claim-missing", "delay-free-loop")


def board(name: str, *lines: str, title: str = "") -> Diagram:
    """The diagram of element lines parted by `;`: bare lines are read at their end, coefs come by use."""
    written = [part.strip() for joined in lines for part in joined.split(";")]
    lengths = {found[1]: found[2] for line in written if (found := re.match(r"delay (\S+) = \S+ by (\d+)", line))}
    coefficients = dict.fromkeys(
        found
        for line in written
        if line[:4] in ("adde", "gain")
        for found in re.findall(r"([A-Za-z]\w*)(?=\^2\*|\*|\)\*)", line)
    )
    text = [f"title {quoted(title)}"] if title else []
    text += [f"coef {coefficient}" for coefficient in coefficients]
    text += [with_taps(line, lengths) for line in written if line]
    loaded = load_text(f"diagram {name} {{\n" + "\n".join(text) + "\n}\n")
    wrong = [found for found in loaded.findings if found.severity == "error" and found.code not in DRAWN_ANYWAY]
    assert not wrong, wrong
    return loaded.diagrams[0]


def with_taps(line: str, lengths: dict[str, str]) -> str:
    """A long line read by its bare name is read at its end."""
    left, equals, right = line.partition("=")
    for long_line in lengths:
        right = re.sub(rf"\b{long_line}\b(?!\[)", f"{long_line}[end]", right)
    return left + equals + right


def quoted(text: str) -> str:
    return f'"{text}"'
