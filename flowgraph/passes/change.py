"""What a pass hands back: the rewritten diagram and what the driver needs to prove it.

The driver trusts none of it. A change either says which signals carry the same samples, and is then
proved element by element, or names the regions it rewrote, and each is then proved as a diagram.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.elements import Signal


@dataclass(frozen=True, slots=True)
class Change:
    """One step of a pass.

    `moved` leads from signals of the diagram before to the signals that do their work after; what
    it leaves out keeps its name or is gone. Without `regions` both carry the same samples. With
    `regions` (names of elements before and after, each changed element in exactly one) the claim
    is: every signal that leaves a region is unchanged, and a moved cell only shows where it went.
    """

    after: Diagram
    message: str
    moved: Mapping[Signal, Signal] = field(default_factory=dict)
    regions: tuple[frozenset[str], ...] = ()
