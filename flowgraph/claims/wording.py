"""A claim in words: as it stands in the file, unless that line stands for several claims."""

from __future__ import annotations

from flowgraph.diagram.claim import Claim
from flowgraph.diagram.diagram import Diagram
from flowgraph.source.span import NOWHERE
from flowgraph.text.print_claims import print_claim


def claim_text(claim: Claim, diagram: Diagram) -> str:
    """The line of the claim; a line inside `repeat` is printed with its own index put in."""
    shared = sum(other.span == claim.span for other in diagram.claims) > 1
    if claim.span == NOWHERE or shared:
        return print_claim(claim, {})
    return " ".join(claim.span.text.split())
