"""The words of the language: what starts a line, what no name may be, what is not known here yet."""

from __future__ import annotations

import re
from difflib import get_close_matches

FIRST_WORDS = (
    "diagram",
    "include",
    "title",
    "version",
    "note",
    "row",
    "unused",
    "rate",
    "const",
    "coef",
    "input",
    "output",
    "adder",
    "gain",
    "wire",
    "delay",
    "use",
    "cascade",
    "repeat",
    "intent",
    "require",
)
LATER_FIRST_WORDS = ("table", "set", "assume", "clamp", "quantise", "solve", "words", "expect")
FUNCTIONS = ("sqrt", "sin", "cos", "tan", "exp")
RESERVED = frozenset(
    (
        *(*FIRST_WORDS, *LATER_FIRST_WORDS, *FUNCTIONS),
        *("n", "z", "pi", "half", "end", "each", "read", "total", "product", "count"),
    )
)
"""What no name of any kind may be."""
LATER_WORDS = frozenset(
    (
        *(*LATER_FIRST_WORDS, "within", "adjustable", "over", "phase", "latency", "settle"),
        *("peak", "noise", "limit", "cycles", "memory", "flush"),
    )
)
"""Words of the language that this program does not know yet."""
LONGEST_NAME = 64

_STARTS_LINE = re.compile(rf"[ \t]*(?:{'|'.join(FIRST_WORDS + LATER_FIRST_WORDS)})(?![A-Za-z0-9_])[ \t]+[A-Za-z_\"]")
_CLAIM = re.compile(r"(?:intent|require)(?![A-Za-z0-9_])")


def starts_a_line(text: str, at: int) -> bool:
    """Whether the characters from `at` on read like the beginning of a line of the language."""
    return _STARTS_LINE.match(text, at) is not None


def starts_a_claim(text: str, at: int) -> bool:
    """Whether the line that begins at `at` is an intent or a requirement."""
    return _CLAIM.match(text, at) is not None


def nearest(name: str, known: list[str]) -> str:
    """The known name that `name` looks most like, or nothing."""
    found = get_close_matches(name, known, n=1, cutoff=0.6)
    return found[0] if found else ""


def names_in_text(text: str) -> list[str]:
    """Everything in a piece of text that could be a name, comments and quoted texts left out."""
    return re.findall(r"[A-Za-z_][A-Za-z0-9_]*", re.sub(r'"[^"\n]*"?|#[^\n]*', " ", text))
