"""What the parser makes of a line: typed, untouched by names' meanings. Offsets count characters of the file."""

from __future__ import annotations

from typing import Literal, NamedTuple, TypeAlias

from flowgraph.source.span import Source
from flowgraph.text.written import (
    At as At,
)
from flowgraph.text.written import (
    Bracket as Bracket,
)
from flowgraph.text.written import (
    Call as Call,
)
from flowgraph.text.written import (
    CountOf as CountOf,
)
from flowgraph.text.written import (
    Expr as Expr,
)
from flowgraph.text.written import (
    Factor as Factor,
)
from flowgraph.text.written import (
    Figure as Figure,
)
from flowgraph.text.written import (
    Fold as Fold,
)
from flowgraph.text.written import (
    Raised as Raised,
)
from flowgraph.text.written import (
    Reference as Reference,
)
from flowgraph.text.written import (
    Scaled as Scaled,
)
from flowgraph.text.written import (
    Signed as Signed,
)
from flowgraph.text.written import (
    Total as Total,
)
from flowgraph.text.written import (
    Word as Word,
)


class DiagramHead(NamedTuple):
    name: Word


class Include(NamedTuple):
    path: Word


class PageLine(NamedTuple):
    kind: Literal["title", "version", "note"]
    text: Word


class Row(NamedTuple):
    names: tuple[Reference, ...]


class Unused(NamedTuple):
    names: tuple[Reference, ...]


class Rate(NamedTuple):
    value: Expr


class Const(NamedTuple):
    name: Reference
    value: Expr


class OpenCoefs(NamedTuple):
    names: tuple[Reference, ...]


class Coef(NamedTuple):
    name: Reference
    value: Expr


class CoefList(NamedTuple):
    name: Reference
    values: tuple[Expr, ...]


class CoefFile(NamedTuple):
    name: Reference
    path: Word


class InputLine(NamedTuple):
    names: tuple[Reference, ...]


class OutputLine(NamedTuple):
    names: tuple[Reference, ...]


class OutputOf(NamedTuple):
    name: Reference
    right: Expr


class AdderLine(NamedTuple):
    name: Reference
    right: Expr


class GainLine(NamedTuple):
    name: Reference
    right: Expr


class WireLine(NamedTuple):
    name: Reference
    right: Expr


class DelayLine(NamedTuple):
    """`starts` is None when left out; `listed` when it stands in [ ]."""

    names: tuple[Reference, ...]
    right: Expr
    by: Expr | None
    starts: tuple[Expr, ...] | None
    listed: bool


class Argument(NamedTuple):
    """What is fed into a used diagram, by the name of its input or by place."""

    name: Word | None
    value: Expr


class Binding(NamedTuple):
    """`b0 = value`, or `c = each array`."""

    name: Reference
    value: Expr
    each: bool


class Application(NamedTuple):
    """`section(raw) with b0 = g`."""

    diagram: Word
    arguments: tuple[Argument, ...]
    bindings: tuple[Binding, ...]


class UseLine(NamedTuple):
    name: Reference
    applied: Application


class CascadeLine(NamedTuple):
    name: Reference
    applied: Application


class RepeatHead(NamedTuple):
    variable: Word
    first: Expr
    last: Expr


class RepeatIn(NamedTuple):
    variable: Word
    labels: tuple[Word, ...]


class EquationLine(NamedTuple):
    left: Reference
    right: Expr
    history: tuple[tuple[Reference, Expr], ...]


class RatioLine(NamedTuple):
    output: Reference
    input: Reference
    ratio: Expr
    late: Expr | None


class SameAsLine(NamedTuple):
    output: Reference
    applied: Application


class StableLine(NamedTuple):
    number: str


class BoundedLine(NamedTuple):
    number: str
    output: Reference
    input: Reference


class GainLimitLine(NamedTuple):
    number: str
    output: Reference
    input: Reference
    frequency: Expr
    lowest: Expr | None
    highest: Expr | None


class CountLine(NamedTuple):
    number: str
    counted: str
    highest: Expr


RequirementNode: TypeAlias = StableLine | BoundedLine | GainLimitLine | CountLine
ClaimNode: TypeAlias = EquationLine | RatioLine | SameAsLine | StableLine | BoundedLine | GainLimitLine | CountLine
DefiningNode: TypeAlias = InputLine | OutputOf | AdderLine | GainLine | WireLine | DelayLine | UseLine | CascadeLine
Node: TypeAlias = (
    DiagramHead
    | Include
    | PageLine
    | Row
    | Unused
    | Rate
    | Const
    | OpenCoefs
    | Coef
    | CoefList
    | CoefFile
    | OutputLine
    | RepeatHead
    | RepeatIn
    | DefiningNode
    | ClaimNode
)


class Statement(NamedTuple):
    """One parsed line and where it stands."""

    node: Node
    start: int
    end: int


class Broken(NamedTuple):
    """A line that could not be parsed; it was reported. What it names may be defined or read there."""

    start: int
    end: int


class Repeat(NamedTuple):
    """A `repeat` line and the lines between its braces."""

    head: RepeatHead | RepeatIn
    body: tuple[BodyLine, ...]
    start: int
    end: int


BodyLine: TypeAlias = Statement | Broken | Repeat


class DiagramText(NamedTuple):
    """One `diagram NAME { .. }` as parsed; `end` is behind its head."""

    name: Word
    body: tuple[BodyLine, ...]
    source: Source
    start: int
    end: int


class FileText(NamedTuple):
    """One file as parsed."""

    source: Source
    includes: tuple[Statement, ...]
    diagrams: tuple[DiagramText, ...]
