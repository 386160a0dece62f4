"""A line the grammar does not take, in the user's words: what stands there, and what may."""

from __future__ import annotations

import re

from lark import UnexpectedInput, UnexpectedToken

from flowgraph.source.diagnostic import Diagnostic
from flowgraph.source.span import Source, Span
from flowgraph.text.exact import UNITS
from flowgraph.text.words import FIRST_WORDS, FUNCTIONS, LATER_FIRST_WORDS, LATER_WORDS, nearest

_MARKS = {
    "EQUAL": "=",
    "COMMA": ",",
    "RANGE": "..",
    "AT_MOST": "<=",
    "AT_LEAST": ">=",
    "LSQB": "[",
    "RSQB": "]",
    "LPAR": "(",
    "RPAR": ")",
    "SLASH": "/",
    "DOT": ".",
    "STRING": 'a text in " "',
    "NAME": "a name",
    "NUMBER": "a number",
    "OPERATOR": "an operator",
    "COUNTED": "cells or multiplies",
    "DB": "dB",
}
_DEFINE = "const|adder|gain|wire|delay|use|cascade|repeat"
_DIGITS = re.compile(r"[0-9]+(?![A-Za-z0-9_.])")
_DIGITS_BEFORE = re.compile(r"(?<![A-Za-z0-9_.])[0-9]+\Z")
_BEFORE = re.compile(r"([A-Za-z_][A-Za-z0-9_]*|[0-9][0-9_.]*|\S)\s*\Z")


def explain(error: UnexpectedInput, source: Source, start: int, end: int) -> Diagnostic:
    """The finding for the line at `start` .. `end`; offsets of `error` count from `start`."""
    expected: set[str] = set(getattr(error, "expected", None) or getattr(error, "allowed", None) or ())
    if isinstance(error, UnexpectedToken) and error.token.type == "$END":
        return _Place(source, start, end, end, end).ends_early(expected)
    at = start + (error.pos_in_stream or 0)
    length = len(error.token) if isinstance(error, UnexpectedToken) else 1
    return _Place(source, start, end, at, at + length).finding(expected)


class _Place:
    """The text at the place of a syntax error, and around it."""

    def __init__(self, source: Source, start: int, end: int, at: int, until: int) -> None:
        self._source = source
        self._line = source.text[start:end]
        self._start, self._end, self._at, self._until = start, end, at, until
        self._found = source.text[at:until]
        before = _BEFORE.search(source.text[start:at])
        self._before = before.group(1) if before else ""

    def _told(
        self, code: str, message: str, mend: str = "", at: int | None = None, until: int | None = None
    ) -> Diagnostic:
        span = Span(self._source, self._at if at is None else at, self._until if until is None else until)
        return Diagnostic(code, message, span, help=mend)

    def finding(self, expected: set[str]) -> Diagnostic:
        """The most helpful thing that can be said about the token found."""
        if self._at == self._start:
            return self._first_word()
        later = self._later()
        if later:
            return self._told("not-yet", f"`{later}` is not known here yet")
        if self._found == "dB":
            return self._told("decibels", "dB stands only in require", "in a coefficient write 10^(-6/20)")
        return self._comma() or self._figure() or self._sign() or self._call() or self._plain(expected)

    def _first_word(self) -> Diagnostic:
        """A line begins with a word that begins no line."""
        word = re.match(r"\w+", self._found)
        if self._found in LATER_FIRST_WORDS:
            return self._told("not-yet", f"`{self._found}` is not known here yet")
        close = nearest(self._found, list(FIRST_WORDS))
        glued = next((first for first in FIRST_WORDS if self._found.startswith(first)), "")
        if glued and word:
            return self._told(
                "first-word", f"no line begins with {self._found}", f"did you mean {glued} {self._found[len(glued) :]}?"
            )
        mend = (
            f"did you mean {close}?" if close else "a line begins with what it defines: adder, gain, delay, input, .."
        )
        return self._told("first-word", f"no line begins with {self._found}", mend)

    def _later(self) -> str:
        """What is meant, if it is something this program does not know yet: a word, or a kind of gain."""
        if self._found in LATER_WORDS:
            return self._found
        if self._found == ":":
            return f": {self._rest()[1:].split('#')[0].strip()}"[:40]
        if re.match(r'require\s+("[^"]*"\s+)?gain\b', self._line):
            if self._found in ("<=", ">="):
                return "gain without at"
            if self._found == "(" and self._before == "gain":
                return "gain of a sum"
        return ""

    def _comma(self) -> Diagnostic | None:
        """0,5 for 0.5, and a line that ends with a semicolon."""
        if self._found == ";":
            return self._told("syntax", "a line ends without a sign of its own", "take the ; away")
        text = self._source.text
        comma = self._at if self._found == "," else self._at - 1
        if text[comma] != "," or comma <= self._start:
            return None
        whole, places = _DIGITS_BEFORE.search(text, self._start, comma), _DIGITS.match(text, comma + 1, self._end)
        if whole is None or places is None:
            return None
        return self._told(
            "number", "a number has a decimal point", f"write {whole.group()}.{places.group()}", comma, comma + 1
        )

    def _figure(self) -> Diagnostic | None:
        """Numbers written in another way: .5, 2., 2x, 48 KHz, 48k, 1 sample."""
        if self._found == "." and (re.match(r"\.[0-9]", self._rest()) or self._before.isdigit()):
            return self._told("number", "a number starts and ends with a digit", "write 0.5 or 2")
        if re.fullmatch(r"[0-9][0-9_.]*", self._before) and re.fullmatch(r"[A-Za-z_]\w*", self._found):
            if self._found == "sample":
                return self._told("syntax", "sample cannot stand here", "write samples, for one of them too")
            if self._found in ("k", "K", "M") and re.match(r"rate\b", self._line):
                unit = "MHz" if self._found == "M" else "kHz"
                return self._told("unit", f"{self._found} is no unit", f"write {self._before} {unit}")
            unit = next((unit for unit in UNITS if unit.lower() == self._found.lower()), "")
            mend = f"did you mean {unit}?" if unit else f"write {self._before}*{self._found}"
            what = "is no unit" if unit else "follows a number without an operator"
            return self._told("unit" if unit else "syntax", f"{self._found} {what}", mend)
        return None

    def _rest(self) -> str:
        return self._source.text[self._at : self._end]

    def _sign(self) -> Diagnostic | None:
        """A second sign or operator."""
        if self._found not in ("+", "-", "*", "/") or self._before not in ("+", "-", "*", "/", "^"):
            return None
        if self._found in "+-" and self._before in "+-":
            kept = "+" if self._found == self._before else "-"
            return self._told("two-signs", "a second sign", f"write {kept} once")
        mend = "put the signed part in brackets" if self._found in "+-" else "take one of them away"
        return self._told("two-signs", f"{self._found} follows {self._before}", mend)

    def _call(self) -> Diagnostic | None:
        """A name in front of a bracket that is no function."""
        if self._found != "(" or not re.fullmatch(r"[A-Za-z_]\w*", self._before):
            return None
        line = re.match(r"(adder|gain|wire|output|delay)\s+(\w+)", self._line)
        mend = (
            f"to use a diagram write use {line.group(2)} = {self._before}(..)"
            if line
            else f"there are {', '.join(FUNCTIONS)}"
        )
        at = self._source.text.rindex(self._before, self._start, self._at)
        return self._told("function", f"{self._before} is no function", mend, at)

    def _plain(self, expected: set[str]) -> Diagnostic:
        if self._found == "," and re.match(r"coef\b", self._line):
            return self._told(
                "syntax", "a coefficient with a value has a line of its own", "write the others in a line of theirs"
            )
        if re.match(rf"(?:{_DEFINE})\s", self._line) and "=" not in self._source.text[self._start : self._at]:
            return self._told("syntax", f"{self._found[:40]} cannot stand here", "here = is expected")
        shown = self._found if len(self._found) <= 40 else f"{self._found[:40]}.."
        return self._told("syntax", f"{shown} cannot stand here", _may_stand(expected))

    def ends_early(self, expected: set[str]) -> Diagnostic:
        last = len(self._line.rstrip())
        at = self._start + last - 1
        return self._told("syntax", "this line ends too early", _may_stand(expected), at, at + 1)


def _may_stand(expected: set[str]) -> str:
    """What the grammar would take, in a few words."""
    if {"NUMBER", "NAME", "FUNCTION"} <= expected:
        return "here a name, a number or a bracket is expected"
    words = [text for name, text in _MARKS.items() if name in expected]
    words += sorted(
        name.lower() for name in expected if name.isalpha() and name not in _MARKS and name not in _NO_WORDS
    )
    if not words or len(words) > 8:
        return ""
    return f"here {' or '.join(words)} is expected"


_NO_WORDS = ("SIGN", "UNIT", "COUNT", "FUNCTION", "FOLD", "COMMENT", "SPACE")
