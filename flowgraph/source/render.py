"""One finding as text: file, line and column, the line itself with carets, notes, and the mend."""

from __future__ import annotations

from textwrap import wrap

from flowgraph.source.diagnostic import Diagnostic
from flowgraph.source.span import Span

WIDTH = 100
"""How many characters of a long source line are shown around the place."""
COLUMNS = 80
"""How wide a mend may become before it goes on in a further line."""


def render(diagnostic: Diagnostic) -> str:
    """The finding in several lines, without a line end after the last."""
    lines = [f"{diagnostic.span}: {diagnostic.severity}: {diagnostic.message} [{diagnostic.code}]"]
    lines += excerpt(diagnostic.span)
    for note in diagnostic.notes:
        if note.span is None:
            lines.append(f"    {note.message}")
        else:
            lines += [f"{note.span}: {note.message}", *excerpt(note.span)]
    if diagnostic.help:
        lines += _mend(diagnostic.help)
    return "\n".join(lines)


def _mend(text: str) -> list[str]:
    """What would mend it; further lines stand under the first word. Names are never broken."""
    lead = "    mend: "
    return wrap(
        text,
        COLUMNS,
        initial_indent=lead,
        subsequent_indent=" " * len(lead),
        break_long_words=False,
        break_on_hyphens=False,
    )


def excerpt(span: Span) -> list[str]:
    """The source line of a span, and carets under it; tabs keep their width in both."""
    if not span.source.text:
        return []
    text = span.source.line_text(span.line)
    first = span.column - 1
    last = max(first + 1, min(len(text), first + span.end - span.start))
    left = max(0, first - WIDTH // 2) if len(text) > WIDTH else 0
    shown = text[left : left + WIDTH]
    carets = "".join("\t" if character == "\t" else " " for character in shown[: first - left])
    carets += "^" * max(1, min(last, left + WIDTH) - first)
    before, after = "..." if left else "", "..." if left + WIDTH < len(text) else ""
    return [f"    {before}{_printable(shown)}{after}", f"    {' ' * len(before)}{carets}"]


def _printable(text: str) -> str:
    """Control characters never reach the terminal."""
    return "".join(character if character.isprintable() or character == "\t" else "?" for character in text)
