"""Reads the files of tests/text/messages: a title, a source, and all that is said about it."""

from __future__ import annotations

from pathlib import Path
from typing import NamedTuple

FOLDER = Path(__file__).parent / "messages"


class MessageCase(NamedTuple):
    """One source and the full text of its findings."""

    title: str
    source: str
    expected: str


def read_cases(text: str, name: str) -> list[MessageCase]:
    """The cases of one file. Raises ValueError where one is malformed, empty or has the title of another."""
    cases: list[MessageCase] = []
    head, *parts = text.split("\n==== ")
    if head.strip():
        raise ValueError(f"{name}: text before the first title")
    for part in parts:
        title, _, rest = part.partition("\n")
        source, dashes, expected = rest.partition("\n---- found\n")
        if not title.strip() or not dashes or not source.strip() or not expected.strip():
            raise ValueError(f"{name}: the case {title!r} lacks its source or what is found")
        if "\n----" in source or "\n----" in expected:
            raise ValueError(f"{name}: the case {title!r} has more than two parts")
        if any(title == other.title for other in cases):
            raise ValueError(f"{name}: the title {title!r} stands twice")
        cases.append(MessageCase(title, source + "\n", expected.rstrip("\n") + "\n"))
    if not cases:
        raise ValueError(f"{name}: no case")
    return cases


def all_cases() -> list[MessageCase]:
    """The cases of every file, in the order of their names."""
    return [case for path in sorted(FOLDER.glob("*.txt")) for case in read_cases(path.read_text("utf-8"), path.name)]
