"""What names mean inside one diagram, and the findings made there."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from fractions import Fraction
from typing import NamedTuple, TypeAlias

from flowgraph.diagram.diagram import Coefficient
from flowgraph.diagram.elements import Element, Signal
from flowgraph.diagram.expression import Expression
from flowgraph.source.diagnostic import Diagnostic, Note
from flowgraph.source.span import Source, Span
from flowgraph.text import syntax as s
from flowgraph.text.exact import ELEMENTS
from flowgraph.text.words import LONGEST_NAME, RESERVED, names_in_text

Env: TypeAlias = Mapping[str, int | str]
"""The variables of the repeats and totals around a place, with their numbers or labels."""


class Fixed(NamedTuple):
    """The value of a const and its power of seconds."""

    value: Fraction
    seconds: Fraction


class Alias(NamedTuple):
    """A second name: the reference it stands for, in the terms of its own line."""

    target: s.Reference
    env: Env
    start: int
    end: int


class Fault(Exception):
    """A line that cannot be elaborated. Without a finding it only follows from one that was told."""

    def __init__(self, finding: Diagnostic | None = None) -> None:
        super().__init__(finding.message if finding else "")
        self.finding = finding


@dataclass(slots=True)
class Scope:
    """The names of one diagram while it is elaborated; full names (`f[2]`, `low.y`) are the keys."""

    source: Source
    rate: Fraction | None = None
    consts: dict[str, Fixed] = field(default_factory=dict)
    labels: set[str] = field(default_factory=set)
    arrays: dict[str, int] = field(default_factory=dict)
    coefs: dict[str, Coefficient] = field(default_factory=dict)
    seconds: dict[str, Fraction | None] = field(default_factory=dict)
    signals: dict[str, Signal] = field(default_factory=dict)
    lines: dict[str, int] = field(default_factory=dict)
    aliases: dict[str, Alias] = field(default_factory=dict)
    followed: dict[str, Signal] = field(default_factory=dict)
    """What aliases stand for, once it was found."""
    ports: dict[str, Span] = field(default_factory=dict)
    """Output ports."""
    defined: dict[str, tuple[int, int]] = field(default_factory=dict)
    kinds: dict[str, str] = field(default_factory=dict)
    """What each first name is: `f` of `f[2]` is an adder."""
    broken: set[str] = field(default_factory=set)
    """Names that a line which could not be understood may define."""
    excused: set[str] = field(default_factory=set)
    """Names that such a line may read."""
    claimed: set[str] = field(default_factory=set)
    """Everything named in claims that could not be understood."""
    read: set[str] = field(default_factory=set)
    findings: list[Diagnostic] = field(default_factory=list)
    left_out: set[int] = field(default_factory=set)
    """Where repeats begin that could not be spelled out."""
    chained: list[tuple[Element, Element]] = field(default_factory=list)
    """Neighbours in one delay line of several names."""
    used_rate: bool = False
    unresolved: bool = False
    size: int = 0
    levels: int = 1
    terms: int = 0
    """What total and product have made of the line at hand."""
    _shapes: dict[str, tuple[bool, bool]] = field(default_factory=dict)
    """Whether a first name is a number, and whether it carries an index."""
    steady: dict[tuple[int, int], Expression] = field(default_factory=dict)
    """Coefficient expressions by their place, where they read no repeat variable."""
    _spans: dict[tuple[int, int], Span] = field(default_factory=dict)
    _told: set[tuple[str, int, int]] = field(default_factory=set)

    def span(self, start: int, end: int) -> Span:
        key = (start, end)
        found = self._spans.get(key)
        if found is None:
            found = self._spans[key] = Span(self.source, start, end)
        return found

    def fault(
        self, code: str, message: str, start: int, end: int, mend: str = "", notes: tuple[Note, ...] = ()
    ) -> Fault:
        """An error at a place of this diagram, to be raised."""
        return Fault(Diagnostic(code, message, self.span(start, end), notes=notes, help=mend))

    def silent(self) -> Fault:
        """A fault that follows from one already told."""
        return Fault()

    def tell(self, finding: Diagnostic | None) -> None:
        """Keeps a finding; the same fault of the same place in a repeat is told once."""
        if finding is None:
            return
        key = (finding.code, finding.span.start, finding.span.end)
        if key not in self._told or finding.span.source is not self.source:
            self._told.add(key)
            self.findings.append(finding)

    def give_up(self, start: int, end: int) -> None:
        """Leaves a line out of account: what it names may be read there, and what it seems to define is unknown."""
        text = self.source.text[start:end]
        left, equals, _ = text.partition("=")
        self.excused.update(names_in_text(text))
        left_names = names_in_text(left if equals else text)
        self.broken.update(name for name in left_names if name not in self.defined)
        self.unresolved = True

    def grow(self, elements: int, start: int, end: int) -> None:
        """Counts elements and cells. Raises Fault beyond the stated bound."""
        self.size += elements
        if self.size > ELEMENTS:
            raise self.fault("too-large", f"the diagram grows beyond {ELEMENTS} elements and cells here", start, end)

    def define(self, name: str, kind: str, where: s.Reference | s.Word) -> None:
        """Gives a name its one meaning. Raises Fault if it has one, or may not be a name."""
        first = where.name if isinstance(where, s.Reference) else where.text
        if first in RESERVED:
            raise self.fault(
                "reserved",
                f"{first} is a word of the language and no name",
                where.start,
                where.end,
                "choose another name",
            )
        if len(first) > LONGEST_NAME:
            raise self.fault("name-too-long", f"a name has at most {LONGEST_NAME} characters", where.start, where.end)
        if name in self.defined:
            start, end = self.defined[name]
            note = Note(f"{name} is defined here first", self.span(start, end))
            raise self.fault(
                "defined-twice",
                f"{name} is defined twice",
                where.start,
                where.end,
                "give one of them another name",
                (note,),
            )
        known = self.kinds.setdefault(first, kind)
        shape = (kind in ("coefficient", "const"), name != first)
        if self._shapes.setdefault(first, shape) != shape:
            raise self._mixed(first, known, where)
        self.defined[name] = (where.start, where.end)

    def _mixed(self, first: str, known: str, where: s.Reference | s.Word) -> Fault:
        """A name that is a signal and a coefficient, or stands with an index and without."""
        start, end = next(self.defined[name] for name in self.defined if name.partition("[")[0] == first)
        note = Note(f"{first} is {_a(known)}{' with an index' * self._shapes[first][1]} here", self.span(start, end))
        return self.fault(
            "defined-twice",
            f"{first} has another meaning already",
            where.start,
            where.end,
            "give one of them another name",
            (note,),
        )


def _a(kind: str) -> str:
    return ("an " if kind[0] in "aeio" else "a ") + kind
