"""What a diagram should do, as written: intents (behaviour) and requirements (limits)."""

from __future__ import annotations

from dataclasses import dataclass, field
from fractions import Fraction
from typing import TYPE_CHECKING, Literal, TypeAlias

from flowgraph.diagram.expression import Expression
from flowgraph.source.span import NOWHERE, Span

if TYPE_CHECKING:
    from flowgraph.diagram.diagram import Diagram


@dataclass(frozen=True, slots=True)
class EquationIntent:
    """`intent y[n] = right, y[-1] = 1`: covers every input and the starting contents.

    `right` is linear in `Sample`s of inputs (late >= 0) and of the output itself (late >= 1).
    `history` gives values of signals before sample 0 as (signal, how long before, value): y[-1] = 1
    is ("y", 1, 1); what it does not name is 0.
    """

    output: str
    right: Expression
    history: tuple[tuple[str, int, Expression], ...] = ()
    span: Span = field(default=NOWHERE, compare=False, repr=False)


@dataclass(frozen=True, slots=True)
class RatioIntent:
    """`intent y / x = ratio late 3 samples`: the response to x alone; `Name("z")` is the letter z."""

    output: str
    input: str
    ratio: Expression
    late: int = 0
    span: Span = field(default=NOWHERE, compare=False, repr=False)


@dataclass(frozen=True, slots=True)
class DiagramIntent:
    """`intent y = OTHER(x) with b0 = g`: the one output of `other`, fed with this diagram's inputs.

    `other` is elaborated in this diagram's terms: its coefficients are named `OTHER.b0` and given
    ones follow this diagram's. `inputs` maps each input of `other` to an input of this diagram.
    `bindings` are the coefficients given, as written, for printing the line back.
    """

    output: str
    other: Diagram
    inputs: tuple[tuple[str, str], ...]
    bindings: tuple[tuple[str, Expression], ...] = ()
    span: Span = field(default=NOWHERE, compare=False, repr=False)


Intent: TypeAlias = EquationIntent | RatioIntent | DiagramIntent


@dataclass(frozen=True, slots=True)
class StableRequirement:
    """`require stable`: every mode decays, hidden ones too."""

    number: str = ""
    span: Span = field(default=NOWHERE, compare=False, repr=False)


@dataclass(frozen=True, slots=True)
class BoundedRequirement:
    """`require bounded y / x`: bounded inputs give bounded outputs; cancelled modes are allowed."""

    output: str
    input: str
    number: str = ""
    span: Span = field(default=NOWHERE, compare=False, repr=False)


@dataclass(frozen=True, slots=True)
class GainRequirement:
    """`require gain y / x at F within A .. B dB`: frequency in hertz, limits in decibels or open."""

    output: str
    input: str
    frequency: Fraction
    lowest: Fraction | None
    highest: Fraction | None
    number: str = ""
    span: Span = field(default=NOWHERE, compare=False, repr=False)


@dataclass(frozen=True, slots=True)
class CountRequirement:
    """`require cells <= 4` or `require multiplies <= 5`: as drawn, used diagrams included."""

    counted: Literal["cells", "multiplies"]
    highest: int
    number: str = ""
    span: Span = field(default=NOWHERE, compare=False, repr=False)


Requirement: TypeAlias = StableRequirement | BoundedRequirement | GainRequirement | CountRequirement
Claim: TypeAlias = Intent | Requirement
