"""Structures beside which sections are exchanged: rings, lines with contents, cells that folding left unread."""

import pytest
from drawn import behaviour, diagram_of

from flowgraph.passes.reduce import reduce_diagram

RING = """
    input  x
    output y, v
    delay  line = s by 4
    delay  s1 = s
    delay  d = d
    delay  y1 = y
    delay  u1 = y
    adder  s = 1/2*line[3] + 1/3*line[2] + s1 + d
    gain   y = 2*s
    gain   v = 1*d
"""

CONTENTS_AHEAD = """
    input  x
    output y
    delay  held = x starts 3
    delay  h1, h2 = held
    delay  y1, y2 = y
    adder  y = held + 3*h1 + 5*h2 - 1/3*y1 - 1/7*y2
"""

LEFT_UNREAD = """
    input  x
    output y
    delay  d = s
    delay  a1 = q
    delay  a2 = a1
    delay  a3 = a1
    delay  c = y starts 1
    gain   g = 2*a3
    adder  s = 1/2*x - g + 2*a1 + 2*a3
    adder  y = d + 1/2*a1 + 1/2*s
    adder  q = c + 3*a2
"""


@pytest.mark.parametrize(
    ("body", "cells"), [(RING, 4), (CONTENTS_AHEAD, 5), (LEFT_UNREAD, 4)], ids=["ring", "contents ahead", "left unread"]
)
def test_corner(body: str, cells: int) -> None:
    """What is reduced behaves as drawn, from its starting contents on."""
    diagram = diagram_of(body)
    reduction = reduce_diagram(diagram)
    assert reduction.counts()[1].cells == cells
    assert behaviour(reduction.after) == behaviour(diagram)
