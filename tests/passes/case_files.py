"""Reads tests/cases/<pass>.txt: a title, a diagram before, the diagram after, again and again.

A title is a line `== TITLE`; the diagrams stand under lines `-- before` and `-- after`.
"""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

CASES = Path(__file__).parent.parent / "cases"


@dataclass(frozen=True, slots=True)
class Case:
    """What a pass makes of a diagram, both as text; `line` is that of the title."""

    title: str
    before: str
    after: str
    line: int


def read_cases(text: str) -> list[Case]:
    """All cases of a file. Raises ValueError for an unknown header, a part missing or twice, or a title used twice."""
    cases: list[Case] = []
    parts: dict[str, list[str]] = {}
    title, started, current = "", 0, ""
    for number, line in enumerate([*text.splitlines(), "== "], start=1):
        if line.startswith("== "):
            if title:
                cases.append(_case(title, parts, started))
            if any(case.title == line[3:].strip() for case in cases):
                raise ValueError(f"line {number}: the title {line[3:].strip()!r} is used twice")
            title, parts, started, current = line[3:].strip(), {}, number, ""
        elif line.startswith(("--", "==")):
            current = line.removeprefix("-- ")
            if not title or current not in ("before", "after") or current in parts:
                raise ValueError(f"line {number}: no header may say {line!r} here")
            parts[current] = []
        elif current:
            parts[current].append(line)
        elif line.strip():
            raise ValueError(f"line {number}: {line!r} stands outside any part")
    return cases


def _case(title: str, parts: dict[str, list[str]], line: int) -> Case:
    if list(parts) != ["before", "after"]:
        raise ValueError(f"line {line}: the case {title!r} needs one before and one after, in this order")
    return Case(title, "\n".join(parts["before"]).strip() + "\n", "\n".join(parts["after"]).strip() + "\n", line)
