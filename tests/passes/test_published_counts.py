"""Counts that textbooks and papers give for well-known structures, before and after reducing."""

from fractions import Fraction

import pytest
from drawn import behaviour, diagram_of

from flowgraph.diagram.diagram import Counts, Diagram, count
from flowgraph.passes.merge_equal import merge_equal
from flowgraph.passes.reduce import reduce_diagram, take_step
from flowgraph.text.load import load_text

OWN_CHAINS = """
    coef   b0, b1, b2, a1, a2
    input  x
    output y
    delay  p1 = x
    delay  q1, q2 = x
    delay  r1 = y
    delay  s1, s2 = y
    adder  v = b0*x + b1*p1 + b2*q2
    adder  y = v - a1*r1 - a2*s2
"""

INTEGER_LOW_PASS = """
    input  x
    output y
    delay  x6 = x by 6
    delay  x12 = x by 12
    delay  y1 = y
    delay  u1, u2 = y
    adder  y = 2*y1 - u2 + x - 2*x6[6] + x12[12]
"""

INTEGER_HIGH_PASS = """
    input  x
    output y
    delay  x16 = x by 16
    delay  x32 = x by 32
    delay  s1 = s
    adder  s = x - x32[32] + s1
    adder  y = x16[16] - 1/32*s
"""


def moving_average(length: int) -> str:
    """The recursive moving average, comb first."""
    return f"""
    input  x
    output y
    delay  line = x by {length}
    delay  s1 = s
    adder  s = x - line[{length}] + s1
    gain   y = 1/{length}*s
"""


def impulse_response(diagram: Diagram, samples: int) -> list[Fraction]:
    """The exact response at port y to a one at sample 0."""
    from exact_values import exact_values

    from flowgraph.diagram.simulate import simulate

    one = [Fraction(1)]
    return simulate(diagram, exact_values(diagram), {"x": one}, samples, Fraction(0))["y"]


def cells_after_merging(diagram: Diagram) -> tuple[int, int]:
    """Cells before and after equal cells became one, nothing else done."""
    step = take_step(merge_equal, diagram)
    assert step is not None
    assert step.proof.method == "exact"
    assert step.proof.keeps_rounding
    assert behaviour(step.after) == behaviour(diagram)
    return count(diagram).cells, count(step.after).cells


@pytest.mark.parametrize(
    ("body", "before", "after"),
    [(OWN_CHAINS, 6, 4), (INTEGER_LOW_PASS, 21, 14), (INTEGER_HIGH_PASS, 49, 33)],
    ids=["direct form I section", "integer low-pass", "integer high-pass"],
)
def test_merged_chains(body: str, before: int, after: int) -> None:
    """One chain for each tap against one shared line (derived; filters: Tompkins, Biomedical DSP, 12.9 to 12.14)."""
    assert cells_after_merging(diagram_of(body)) == (before, after)


@pytest.mark.parametrize("taps", [2, 5, 24])
def test_merged_taps(taps: int) -> None:
    """N taps with a chain each hold N(N-1)/2 cells, one line holds N - 1 (derived)."""
    chains = [f"delay {', '.join(f't{k}_{cell}' for cell in range(1, k + 1))} = x" for k in range(1, taps)]
    total = " + ".join(["x", *(f"{k + 2}*t{k}_{k}" for k in range(1, taps))])
    diagram = diagram_of("\n".join(["input x", "output y", *chains, f"adder y = {total}"]))
    if taps == 2:
        assert take_step(merge_equal, diagram) is None
        assert count(diagram).cells == 1
    else:
        assert cells_after_merging(diagram) == (taps * (taps - 1) // 2, taps - 1)


@pytest.mark.parametrize("adders", ["one", "two"])
def test_direct_form_one_becomes_two(adders: str) -> None:
    """(1+2w+w^2)/(1-3/4w+1/8w^2): four cells become two, the response stays (Oppenheim and Schafer, from memory)."""
    forward, loop = "x + 2*x1 + x2", "+ 3/4*y1 - 1/8*y2"
    lines = f"adder y = {forward} {loop}" if adders == "one" else f"adder v = {forward}\nadder y = v {loop}"
    diagram = diagram_of(f"input x\noutput y\ndelay x1, x2 = x\ndelay y1, y2 = y\n{lines}")
    reduction = reduce_diagram(diagram)
    assert [step.proof.method for step in reduction.steps] == ["exact"]
    assert (reduction.counts()[0].cells, reduction.counts()[1].cells) == (4, 2)
    published = ["1", "11/4", "47/16", "119/64", "263/256", "551/1024", "1127/4096", "2279/16384"]
    assert impulse_response(reduction.after, 8) == [Fraction(value) for value in published]


def test_operations_of_a_section() -> None:
    """A second-order section: 5 multiplies, 4 adds; 4 cells in direct form I, 2 in direct form II (textbook)."""
    diagram = diagram_of(OWN_CHAINS)
    assert reduce_diagram(diagram).counts() == (Counts(6, 5, 4), Counts(2, 5, 4))


@pytest.mark.parametrize(
    ("body", "counts"),
    [
        ("coef r\ninput x\noutput y\ndelay y1 = y\nadder y = r*y1 + (1 - r)*x", Counts(1, 2, 1)),
        ("coef c\ninput x\noutput s\ndelay s1, s2 = s\nadder s = x + c*s1 - s2", Counts(2, 1, 2)),
    ],
    ids=["leaky integrator", "Goertzel"],
)
def test_least_structures_stay(body: str, counts: Counts) -> None:
    """Structures at their textbook counts have nothing to save."""
    reduction = reduce_diagram(diagram_of(body))
    assert reduction.steps == ()
    assert reduction.counts() == (counts, counts)


@pytest.mark.parametrize("length", [4, 8, 30])
def test_a_moving_average_keeps_its_comb_first(length: int) -> None:
    """M + 1 cells recursive (textbook); the exchange that saves one would let the integrator run away."""
    diagram = diagram_of(moving_average(length))
    reduction = reduce_diagram(diagram)
    assert reduction.counts()[1].cells == length + 1
    assert impulse_response(reduction.after, length + 3) == [Fraction(1, length)] * length + [Fraction(0)] * 3


def test_integer_filters_keep_their_order() -> None:
    """Poles on the unit circle that the section before cancels stay behind it: 14 and 33 cells after reducing."""
    assert reduce_diagram(diagram_of(INTEGER_LOW_PASS)).counts()[1] == Counts(14, 0, 4)
    assert reduce_diagram(diagram_of(INTEGER_HIGH_PASS)).counts()[1] == Counts(33, 0, 3)


def test_a_longer_exchange() -> None:
    """Two direct form I sections whose middle lines are one already: 6 cells become 4, over more than two sections."""
    diagram = diagram_of("""
        input  x
        output y
        delay  x1, x2 = x
        delay  u1, u2 = u
        delay  y1, y2 = y
        adder  u = 3*x + 5*x1 + 7*x2 - 1/3*u1 - 1/5*u2
        adder  y = 3*u + 5*u1 + 7*u2 - 1/4*y1 - 1/7*y2
    """)
    reduction = reduce_diagram(diagram)
    assert reduction.counts() == (Counts(6, 9, 8), Counts(4, 9, 8))
    assert behaviour(reduction.after) == behaviour(diagram)


def test_parallel_sections() -> None:
    """Sections that share their input line each become direct form II where that costs no cell."""
    diagram = diagram_of("""
        input  x
        output y
        delay  x1, x2 = x
        delay  u1, u2, u3 = u
        delay  q1, q2 = q
        delay  v1, v2 = x
        adder  u = x + 5*v1 + 7*v2 - 1/3*u1 - 1/5*u3
        adder  q = 3*x + 7*x2 - 1/4*q1 - 1/7*q2
        adder  y = u + q
    """)
    reduction = reduce_diagram(diagram)
    assert reduction.counts()[1].cells == 5
    assert behaviour(reduction.after) == behaviour(diagram)


@pytest.mark.parametrize("sections", [1, 2, 7])
def test_a_cascade_of_sections(sections: int) -> None:
    """Direct form I sections used in a cascade: each becomes direct form II by itself, all in one proved step."""
    text = """
        diagram section {
            coef   b0, b1, b2, a1, a2
            input  x
            output y
            delay  x1, x2 = x
            delay  y1, y2 = y
            adder  y = b0*x + b1*x1 + b2*x2 - a1*y1 - a2*y2
        }
        diagram chain {
            coef   p = [%s]
            input  x
            output y
            cascade y = section(x) with b0 = each p, b1 = 1/3, b2 = 1/5, a1 = 1/7, a2 = each p
        }
    """
    values = ", ".join(f"{k + 1}/17" for k in range(sections))
    diagram = load_text(text % values).diagrams[-1]
    reduction = reduce_diagram(diagram)
    assert [(step.name, step.proof.method) for step in reduction.steps] == [("exchange_sections", "exact")]
    assert (reduction.counts()[0].cells, reduction.counts()[1].cells) == (4 * sections, 2 * sections)
    assert behaviour(reduction.after) == behaviour(diagram)


@pytest.mark.parametrize("adders", ["one", "two"])
def test_sections_inside_a_loop(adders: str) -> None:
    """A direct form I section within a larger loop is exchanged as well."""
    forward, loop = "e + 3*e1 + 5*e2", "- 1/3*u1 - 1/7*u2"
    lines = f"adder u = {forward} {loop}" if adders == "one" else f"adder v = {forward}\nadder u = v {loop}"
    diagram = diagram_of(f"""
        coef   k
        input  x
        output y
        adder  e = x - k*y1
        delay  y1 = y
        delay  e1, e2 = e
        delay  u1, u2 = u
        adder  y = 1/2*u + e
        {lines}
    """)
    reduction = reduce_diagram(diagram)
    assert (reduction.counts()[0].cells, reduction.counts()[1].cells) == (5, 3)
    assert behaviour(reduction.after) == behaviour(diagram)
