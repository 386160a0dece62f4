"""What is said of one claim."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from flowgraph.source.span import Span

Outcome = Literal["proved", "refuted", "undecided"]


@dataclass(frozen=True, slots=True)
class Counterexample:
    """An input that shows the difference: the first sample at which both sides part, and both values.

    `source` is the input that gets a unit pulse at n = 0, or "" for the starting contents alone.
    `coefficients` are the values at which it was computed, where they are not those of the file.
    """

    output: str
    source: str
    sample: int
    diagram: str
    claim: str
    coefficients: tuple[tuple[str, str], ...] = ()


@dataclass(frozen=True, slots=True)
class Verdict:
    """The outcome for one claim.

    `method` is the road that decided: "exact", "identity test" (then error_below is k in 2^-k),
    "certified" for enclosures, "counted". `conditions` are what a proof rests on. `use` and
    `used_as` are the place and the path of the use that gave the values, where the claim belongs to a
    used diagram.
    """

    claim: str
    span: Span
    outcome: Outcome
    method: str
    error_below: int = 0
    conditions: tuple[str, ...] = ()
    counterexample: Counterexample | None = None
    reason: str = ""
    number: str = ""
    use: Span | None = None
    used_as: str = ""
