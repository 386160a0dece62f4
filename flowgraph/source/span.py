"""Where something stands in a file. Line and column are computed only when they are printed."""

from __future__ import annotations

from bisect import bisect_right
from dataclasses import dataclass, field


@dataclass(frozen=True, slots=True, eq=False)
class Source:
    """One file as it was read: its name as the user gave it, and its text."""

    name: str
    text: str
    _line_starts: list[int] = field(default_factory=list, repr=False)

    def line_starts(self) -> list[int]:
        """Offsets at which the lines begin, found once, at the first question."""
        if not self._line_starts:
            self._line_starts.append(0)
            at = self.text.find("\n")
            while at >= 0:
                self._line_starts.append(at + 1)
                at = self.text.find("\n", at + 1)
        return self._line_starts

    def line_text(self, line: int) -> str:
        """The text of line number `line` (the first is 1), without its line end."""
        start = self.line_starts()[line - 1]
        end = self.text.find("\n", start)
        return self.text[start : end if end >= 0 else len(self.text)].rstrip("\r")


@dataclass(frozen=True, slots=True)
class Span:
    """The characters `start` up to (not including) `end` of a source."""

    source: Source
    start: int
    end: int

    @property
    def file(self) -> str:
        return self.source.name

    @property
    def line(self) -> int:
        """Line number, the first is 1."""
        return bisect_right(self.source.line_starts(), self.start)

    @property
    def column(self) -> int:
        """Column number in characters, the first is 1."""
        return self.start - self.source.line_starts()[self.line - 1] + 1

    @property
    def text(self) -> str:
        return self.source.text[self.start : self.end]

    def __str__(self) -> str:
        return f"{self.file}:{self.line}:{self.column}"


NOWHERE = Span(Source("", ""), 0, 0)
"""The span of an element that no file holds, such as one that a pass made."""
