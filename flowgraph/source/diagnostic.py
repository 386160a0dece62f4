"""What is said to the user about a place in a file: the finding, its notes and the mend."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from flowgraph.source.span import Span

Severity = Literal["error", "warning"]


@dataclass(frozen=True, slots=True)
class Note:
    """A further place that explains a finding."""

    message: str
    span: Span | None = None


@dataclass(frozen=True, slots=True)
class Diagnostic:
    """One finding: a stable code, a sentence in the user's words, where, why, and what would mend it."""

    code: str
    message: str
    span: Span
    severity: Severity = "error"
    notes: tuple[Note, ...] = ()
    help: str = ""

    def order(self) -> tuple[str, int, int, str]:
        """Findings are told by file and place; the code breaks ties."""
        return (self.span.file, self.span.start, self.span.end, self.code)


class Refused(Exception):
    """Work that cannot go on; carries every finding that led to it."""

    def __init__(self, diagnostics: list[Diagnostic]) -> None:
        super().__init__("\n".join(found.message for found in diagnostics))
        self.diagnostics = diagnostics
