"""Direct form I as people draw it: each comes out with two cells, or stays for a reason."""

import pytest
from drawn import behaviour, diagram_of

from flowgraph.passes.reduce import reduce_diagram

CELLS = "delay x1, x2 = x\ndelay y1, y2 = y\n"
LINES = "delay xs = x by 2\ndelay ys = y by 2\n"
FORWARD, BACK = "b0*x + b1*xs[1] + b2*xs[2]", "- a1*ys[1] - a2*ys[2]"

TO_TWO_CELLS = {
    "each product a gain line": CELLS
    + "gain g0 = b0*x\ngain g1 = b1*x1\ngain g2 = b2*x2\ngain h1 = a1*y1\ngain h2 = a2*y2\n"
    "adder y = g0 + g1 + g2 - h1 - h2",
    "gain lines and an adder for every two": CELLS
    + "gain g0 = b0*x\ngain g1 = b1*x1\ngain g2 = b2*x2\ngain h1 = a1*y1\ngain h2 = a2*y2\n"
    "adder f1 = g1 + g2\nadder f = g0 + f1\nadder r = h1 + h2\nadder y = f - r",
    "long lines": LINES + f"adder y = {FORWARD} {BACK}",
    "a long line beside cells": f"delay xs = x by 2\ndelay y1, y2 = y\nadder y = {FORWARD} - a1*y1 - a2*y2",
    "long lines and gain lines": LINES
    + f"gain g0 = b0*x\ngain g1 = b1*xs[1]\ngain g2 = b2*xs[2]\nadder y = g0 + g1 + g2 {BACK}",
    "wires between": "wire xin = x\nwire fb = y\nwire vv = v\ndelay xs = xin by 2\ndelay ys = fb by 2\n"
    "wire x1 = xs[1]\ngain g0 = b0*xin\ngain g1 = b1*x1\nadder v = g0 + g1 + b2*xs[2]\n"
    f"adder y = vv {BACK}",
    "gains by 1 between": "gain xin = 1*x\ngain fb = 1*y\ngain vv = 1*v\ndelay xs = xin by 2\ndelay ys = fb by 2\n"
    f"adder v = b0*xin + b1*xs[1] + b2*xs[2]\nadder y = vv {BACK}",
    "a second port": LINES + f"output again = y\nadder y = {FORWARD} {BACK}",
    "a second port behind a gain": LINES + f"output low\ngain low = 1/3*y\nadder y = {FORWARD} {BACK}",
}

STAY = {
    "a port shows the signal between": LINES + f"output v\nadder v = {FORWARD}\nadder y = v {BACK}",
    "a port shows the last cell": LINES + f"output late = ys[2]\nadder y = {FORWARD} {BACK}",
    "a port shows a product": LINES + f"output h1\ngain h1 = a1*ys[1]\nadder y = {FORWARD} - h1 - a2*ys[2]",
}


def with_ports(body: str) -> str:
    return f"coef b0, b1, b2, a1, a2\ninput x\noutput y\n{body}"


@pytest.mark.parametrize("body", TO_TWO_CELLS.values(), ids=TO_TWO_CELLS)
def test_becomes_the_two_cell_form(body: str) -> None:
    """Four cells become two, with the products it had, and the behaviour stays."""
    diagram = diagram_of(with_ports(body))
    reduction = reduce_diagram(diagram)
    before, after = reduction.counts()
    assert (before.cells, after.cells) == (4, 2)
    assert (after.multiplies, after.adds) == (before.multiplies, before.adds)
    assert behaviour(reduction.after) == behaviour(diagram)


@pytest.mark.parametrize("body", STAY.values(), ids=STAY)
def test_stays_where_a_port_shows_what_would_go(body: str) -> None:
    """A signal inside the sections that a port shows holds them where they are."""
    diagram = diagram_of(with_ports(body))
    assert reduce_diagram(diagram).steps == ()
