"""Splits a file into logical lines and blocks: comments, strings, brackets, continued lines, braces.

A line that cannot be read is reported and left out; the lines after it are read all the same.
"""

from __future__ import annotations

import re
from dataclasses import dataclass, field
from typing import NamedTuple

from flowgraph.source.diagnostic import Diagnostic
from flowgraph.source.span import Source, Span
from flowgraph.text.exact import LEVELS, LINE_LENGTH
from flowgraph.text.words import starts_a_claim, starts_a_line

_MARK = re.compile(r'"[^"\n]*"?|#[^\n]*|\n|[()\[\]{}]|[^\x20-\x7e\t\r\n]+')
_GOES_ON = (",", "+", "-", "*", "/", "^", "=", "..")
_VISIBLE = re.compile(r"\S")
_OPERATOR = re.compile(r"\.\.|<=|>=|[-+*/^=,.<>]")
_BEGINS_BLOCK = re.compile(r"(?:diagram|repeat)\s")
_PLAIN = {
    "\u2212": "-",
    "\u2013": "-",
    "\u2014": "-",
    "\u00d7": "*",
    "\u00b7": "*",
    "\u00f7": "/",
    "\u2026": "..",
    "\u201c": '"',
    "\u201d": '"',
}
_CLOSER = {"(": ")", "[": "]"}


class Line(NamedTuple):
    """The characters of one logical line; `broken` when something in it was already reported."""

    start: int
    end: int
    broken: bool


@dataclass(slots=True)
class Block:
    """A line that ends in { and the lines up to its }. The file itself is a block without a head."""

    head: Line
    lines: list[Line | Block] = field(default_factory=list)


def read_lines(source: Source) -> tuple[Block, list[Diagnostic]]:
    """All logical lines of a file, nested by their braces, and what is wrong with them."""
    reader = _Reader(source)
    for mark in _MARK.finditer(source.text):
        reader.take(mark.group(), mark.start(), mark.end())
    return reader.finish(), reader.findings


class _Reader:
    """Takes the marks of a file one by one and cuts logical lines between them."""

    def __init__(self, source: Source) -> None:
        self.findings: list[Diagnostic] = []
        self._source = source
        self._text = source.text
        self._blocks = [Block(Line(0, 0, False))]
        self._brackets: list[int] = []
        self._begin = 0  # where the logical line begins
        self._from = 0  # where the part of it begins that was not looked at yet
        self._end = 0  # behind its last character that is no blank and no comment
        self._comment = -1
        self._broken = False

    def take(self, mark: str, start: int, end: int) -> None:
        match mark[0]:
            case "\n":
                self._end_of_line(start)
            case "#":
                self._comment = start
            case '"':
                if len(mark) == 1 or mark[-1] != '"':
                    self._report("text-open", "this text has no closing quote", start, end, "close it on the same line")
            case "(" | "[":
                self._open_bracket(start)
            case ")" | "]":
                self._close_bracket(start)
            case "{":
                self._open_block(start)
            case "}":
                self._close_block(start)
            case _:
                self._strange(mark, start, end)

    def finish(self) -> Block:
        """Ends the last line and every block that is still open."""
        self._look_at(len(self._text) if self._comment < 0 else self._comment)
        if self._goes_on():
            self._unfinished("and there the file ends")
        self._add_line()
        for block in self._blocks[:0:-1]:
            at = self._text.index("{", block.head.end)
            self._report("block-open", "this { is never closed", at, at + 1, "add the } that ends it")
        return self._blocks[0]

    def _report(self, code: str, message: str, start: int, end: int, mend: str = "") -> None:
        if not self._broken:
            claim = "claim-" if starts_a_claim(self._text, self._first()) else ""
            self.findings.append(Diagnostic(claim + code, message, Span(self._source, start, end), help=mend))
        self._broken = True

    def _first(self) -> int:
        """The offset of the first character of the logical line that is no blank."""
        found = _VISIBLE.search(self._text, self._begin)
        return found.start() if found else self._begin

    def _look_at(self, until: int) -> None:
        """Takes the text up to `until` into the logical line."""
        part = self._text[self._from : until].rstrip()
        if part:
            self._end = self._from + len(part)
        self._from = until

    def _goes_on(self) -> bool:
        """Whether the logical line cannot end where it was looked at last."""
        if self._brackets:
            return True
        return self._begin < self._end and self._text.endswith(_GOES_ON, self._begin, self._end)

    def _end_of_line(self, at: int) -> None:
        """A physical line ends: the logical line ends with it, or goes on."""
        self._look_at(at if self._comment < 0 else self._comment)
        self._comment = -1
        self._from = at + 1
        if self._goes_on() and at - self._begin <= LINE_LENGTH:
            if not starts_a_line(self._text, at + 1):
                return
            self._unfinished("but the next line begins a new one")
        self._add_line()

    def _unfinished(self, why: str) -> None:
        """Reports the bracket or operator because of which the line cannot end."""
        if self._brackets:
            at = self._brackets[-1]
            self._report(
                "bracket-open",
                f"this {self._text[at]} is never closed",
                at,
                at + 1,
                f"add the {_CLOSER[self._text[at]]}",
            )
            return
        last = next(mark for mark in _GOES_ON if self._text.endswith(mark, self._begin, self._end))
        self._report(
            "line-open",
            f"a line that ends with {last} goes on, {why}",
            self._end - len(last),
            self._end,
            f"take the {last} away, or write what follows it",
        )

    def _cut(self) -> Line | None:
        """The logical line read so far, if it says anything; the next one begins here."""
        text = self._text[self._begin : self._end]
        start = self._begin + len(text) - len(text.lstrip())
        line = None
        if start < self._end:
            self._judge(start)
            line = Line(start, self._end, self._broken)
        self._begin = self._end = self._from
        self._broken = False
        self._brackets.clear()
        return line

    def _judge(self, start: int) -> None:
        """Reports a whole logical line that is too long or begins in the middle."""
        operator = _OPERATOR.match(self._text, start)
        if operator:
            before = self._blocks[-1].lines[-1:]
            if before and isinstance(before[0], Line):
                self._blocks[-1].lines[-1] = before[0]._replace(broken=True)
            self._report(
                "line-operator",
                f"a line cannot begin with {operator.group()}",
                start,
                operator.end(),
                f"put the {operator.group()} at the end of the line before, which then goes on",
            )
        if self._end - start > LINE_LENGTH:
            self._report(
                "line-too-long",
                f"this line is longer than {LINE_LENGTH} characters",
                start,
                start + 1,
                'keep long lists in a file of their own: coef h = read "h.csv"',
            )

    def _add_line(self) -> None:
        line = self._cut()
        if line is not None:
            self._blocks[-1].lines.append(line)

    def _open_bracket(self, at: int) -> None:
        self._brackets.append(at)
        if len(self._brackets) > LEVELS:
            self._report(
                "too-deep", f"brackets more than {LEVELS} deep", at, at + 1, "give the inner part a name of its own"
            )

    def _close_bracket(self, at: int) -> None:
        mark = self._text[at]
        if self._brackets and _CLOSER[self._text[self._brackets[-1]]] == mark:
            self._brackets.pop()
        elif self._brackets:
            opened = self._text[self._brackets.pop()]
            self._report("bracket-stray", f"this {mark} closes a {opened}", at, at + 1, f"write {_CLOSER[opened]}")
        else:
            self._report(
                "bracket-stray", f"this {mark} closes nothing", at, at + 1, "take it away, or open its bracket"
            )

    def _open_block(self, at: int) -> None:
        self._look_at(at)
        self._from = at + 1
        if self._goes_on():
            self._unfinished("but here a block begins")
        head = self._cut() or self._head_above(at)
        if head is None:
            self._report(
                "block-alone",
                "this { has no diagram or repeat line in front of it",
                at,
                at + 1,
                "put it at the end of that line",
            )
            self._broken = False
        if len(self._blocks) == LEVELS + 1:
            self._report("too-deep", f"blocks more than {LEVELS} deep", at, at + 1)
            self._broken = False
        self._blocks.append(Block(head or Line(at, at, True)))

    def _head_above(self, at: int) -> Line | None:
        """The diagram or repeat line above a { that begins a line of its own; that is told."""
        lines = self._blocks[-1].lines
        line = lines[-1] if lines else None
        if not isinstance(line, Line) or line.broken or not _BEGINS_BLOCK.match(self._text, line.start):
            return None
        word = self._text[line.start : line.end].split()[0]
        self._report(
            "block-alone", "this { stands on a line of its own", at, at + 1, f"put it at the end of the {word} line"
        )
        self._broken = False
        lines.pop()
        return line

    def _close_block(self, at: int) -> None:
        self._look_at(at)
        self._from = at + 1
        if self._goes_on():
            self._unfinished("but here the block ends")
        self._add_line()
        self._begin = self._end = at + 1
        if len(self._blocks) == 1:
            self._report("block-stray", "this } closes nothing", at, at + 1, "take it away")
            self._broken = False
            return
        block = self._blocks.pop()
        if len(self._blocks) <= LEVELS:
            self._blocks[-1].lines.append(block)

    def _strange(self, mark: str, start: int, end: int) -> None:
        """Characters that stand outside the language."""
        plain = _PLAIN.get(mark[0])
        shown = mark[0] if mark[0].isprintable() else f"U+{ord(mark[0]):04X}"
        mend = f"write {plain}" if plain else "other characters may stand in comments and texts"
        self._report("character", f"the character {shown} is not part of the language", start, start + 1, mend)
