"""Findings as JSON, the same in every command."""

from __future__ import annotations

from flowgraph.source.diagnostic import Diagnostic, Note


def finding_told(found: Diagnostic) -> dict[str, object]:
    """A finding as it stands in JSON: lines and columns start at 1."""
    return {
        "code": found.code,
        "severity": found.severity,
        "message": found.message,
        "file": found.span.file,
        "line": found.span.line,
        "column": found.span.column,
        "mend": found.help,
        "notes": [_note(note) for note in found.notes],
    }


def _note(note: Note) -> dict[str, object]:
    if note.span is None:
        return {"message": note.message}
    return {"message": note.message, "file": note.span.file, "line": note.span.line, "column": note.span.column}
