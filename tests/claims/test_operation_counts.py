"""Operation counts and delay-free loops of published structures."""

from __future__ import annotations

import pytest
from read_diagram import read_diagram

from flowgraph.diagram.diagram import count
from flowgraph.source.diagnostic import Diagnostic
from flowgraph.text.load import load_text


def fir(taps: int) -> str:
    return (
        f"coef h = [{', '.join(str(k + 3) for k in range(taps))}]\ninput x\noutput y\ndelay line = x by {taps - 1}\n"
        + (f"adder y = total(k = 0 .. {taps - 1}, h[k]*line[k])")
    )


def integrators_and_combs(stages: int) -> str:
    lines = ["input x", "output y", "wire s[0] = x"]
    for k in range(1, stages + 1):
        lines += [f"adder s[{k}] = s[{k - 1}] + i{k}", f"delay i{k} = s[{k}]"]
    lines.append(f"wire c[0] = s[{stages}]")
    for k in range(1, stages + 1):
        lines += [f"delay d{k} = c[{k - 1}] by 8", f"adder c[{k}] = c[{k - 1}] - d{k}[end]"]
    return "\n".join([*lines, f"wire y = c[{stages}]"])


LATTICE_LADDER = """
    coef k1, k2, k3, v0, v1, v2, v3
    input x
    output y
    adder f2 = x - k3*s3
    adder f1 = f2 - k2*s2
    adder f0 = f1 - k1*s1
    adder g1 = k1*f0 + s1
    adder g2 = k2*f1 + s2
    adder g3 = k3*f2 + s3
    delay s1 = f0
    delay s2 = g1
    delay s3 = g2
    adder y = v0*f0 + v1*g1 + v2*g2 + v3*g3
"""

SECTION = "coef b0, b1, b2, a1, a2\ninput x\noutput y\n"


# Textbook counts: leaky integrator and Goertzel as common practice; second-order sections, FIR,
# integrator-comb chains and the lattice-ladder as in Proakis & Manolakis (from memory).
@pytest.mark.parametrize(
    ("structure", "multiplies", "adds", "cells"),
    [
        (SECTION + "delay x1, x2 = x\ndelay y1, y2 = y\nadder y = b0*x + b1*x1 + b2*x2 - a1*y1 - a2*y2", 5, 4, 4),
        (SECTION + "adder w = x - a1*w1 - a2*w2\ndelay w1, w2 = w\nadder y = b0*w + b1*w1 + b2*w2", 5, 4, 2),
        ("coef c\ninput x\noutput s\nadder s = x + c*s1 - s2\ndelay s1, s2 = s", 1, 2, 2),
        (fir(24), 24, 23, 23),
        (LATTICE_LADDER, 10, 9, 3),
        (integrators_and_combs(3), 0, 6, 27),
    ],
    ids=["direct form I", "direct form II", "Goertzel", "FIR of 24 taps", "lattice-ladder", "integrators and combs"],
)
def test_operation_counts(structure: str, multiplies: int, adds: int, cells: int) -> None:
    """Multiplies, two-input adds and cells of textbook structures."""
    counted = count(read_diagram(f"diagram d {{\n{structure}\n}}"))
    assert (counted.multiplies, counted.adds, counted.cells) == (multiplies, adds, cells)


def loops(structure: str) -> list[Diagnostic]:
    loaded = load_text(f"diagram d {{\n{structure}\n}}")
    return [found for found in loaded.findings if found.code == "delay-free-loop"]


CHAMBERLIN = """
    coef f, q
    input x
    output low, band, high
    adder low = low1 + f*band1
    adder high = x - low - q*band1
    adder band = f*high + band1
    delay low1 = low
    delay band1 = band
"""

ALL_PASSES = """
    coef a, b
    input x
    output y
    adder v = x + p
    adder y = -a*v + s1
    adder u1 = v + a*y
    delay s1 = u1
    adder p = -b*y + s2
    adder u2 = y + b*p
    delay s2 = u2
"""


# L. Wanhammar, DSP Integrated Circuits, 6.3.3; R. E. Crochiere, A. V. Oppenheim 1975 (from memory).
def test_a_sum_that_reads_itself_is_refused() -> None:
    """y = x + a y at once cannot be computed; one delay in the loop mends it."""
    lines = "coef a\ninput x\noutput y\n"
    assert "y -> y" in loops(lines + "adder y = x + a*y")[0].message
    assert loops(lines + "adder y = x + a*y1\ndelay y1 = y") == []


def test_the_state_variable_filter_with_the_current_band_is_refused() -> None:
    """low reads band, high reads low, band reads high: all three are named; the published form has the delay."""
    assert loops(CHAMBERLIN) == []
    found = loops(CHAMBERLIN.replace("low1 + f*band1", "low1 + f*band"))
    assert len(found) == 1
    assert all(name in found[0].message for name in ("low", "high", "band"))
    assert len(found[0].notes) >= 2


def test_two_all_passes_in_a_loop_are_refused() -> None:
    """Each first-order all-pass has a direct path, so two in a ring close a loop without a delay."""
    assert len(loops(ALL_PASSES)) == 1
    assert loops(ALL_PASSES.replace("adder v = x + p\n", "adder v = x + p1\n delay p1 = p\n")) == []
