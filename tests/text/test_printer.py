"""The printer: what it writes is canonical, and reads back as the same diagram."""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction

import pytest
from hypothesis import given
from hypothesis import strategies as st
from read_diagram import read_diagram
from strategies import diagrams

from flowgraph.diagram.diagram import Coefficient, Diagram
from flowgraph.diagram.elements import Gain, Input, Output, Signal
from flowgraph.diagram.expression import Expression, Function, Name, Negative, Number, Pi, Power, Product, Quotient, Sum
from flowgraph.text.load import load_text
from flowgraph.text.printer import print_diagram, print_expression, print_file
from flowgraph.text.read_value import read_value


@given(diagrams())
def test_printed_diagrams_read_back_equal(diagram: Diagram) -> None:
    """Print, then read: elements, outputs, coefficients and contents are the same."""
    assert read_diagram(print_diagram(diagram)) == diagram


@given(diagrams())
def test_printing_is_canonical(diagram: Diagram) -> None:
    """What was read back prints as it was printed."""
    printed = print_diagram(diagram)
    assert print_diagram(read_diagram(printed)) == printed


def numbers() -> st.SearchStrategy[Expression]:
    """Positive and negative numbers, whole, decimal and neither, with and without a unit."""
    value = st.fractions(Fraction(-20), Fraction(20), max_denominator=12)
    return st.builds(Number, value, st.sampled_from(["", "", "Hz", "kHz", "ms", "%"]))


def dress(inner: st.SearchStrategy[Expression]) -> st.SearchStrategy[Expression]:
    """The ways to put expressions together that the reader does not simplify."""
    several = st.lists(inner, min_size=2, max_size=3).map(tuple)
    no_number = inner.filter(lambda part: not isinstance(part, Number))
    exponent = st.integers(-3, 3).map(Fraction)
    return st.one_of(
        st.builds(Sum, several),
        st.builds(Product, several),
        no_number.map(Negative),
        st.builds(Quotient, inner, no_number),
        st.builds(Power, inner, exponent),
        st.builds(Function, st.sampled_from(["sqrt", "sin", "cos", "tan", "exp"]), inner),
    )


EXPRESSIONS = st.recursive(numbers() | st.sampled_from([Name("a"), Name("b[2]"), Pi()]), dress, max_leaves=8)


def with_gain(expression: Expression) -> str:
    """A diagram with one gain of this coefficient."""
    gain = f"gain g = ({print_expression(expression)})*x"
    return f"diagram d {{\n coef a\n coef b[2]\n input x\n {gain}\n output y = g\n}}\n"


def untouched(expression: Expression) -> Expression:
    """The coefficient expression of a gain read from text."""
    element = load_text(with_gain(expression)).diagrams[0].elements["g"]
    assert isinstance(element, Gain)
    return element.coefficient


@given(EXPRESSIONS.filter(lambda expression: not _mixes_units(expression)))
def test_printed_expressions_read_back_equal(expression: Expression) -> None:
    """Brackets stand where the reader would group otherwise, and nowhere is a digit lost."""
    assert untouched(expression) == expression


def _mixes_units(expression: Expression) -> bool:
    """Whether powers of seconds do not fit, or a value leaves the bounds or divides by zero."""
    return not load_text(with_gain(expression)).diagrams


@pytest.mark.parametrize(
    ("expression", "text"),
    [
        (Number(Fraction(19, 20)), "0.95"),
        (Number(Fraction(1, 3)), "(1/3)"),
        (Number(Fraction(-1, 3)), "(-1/3)"),
        (Number(Fraction(48000), "kHz"), "48 kHz"),
        (Number(Fraction(1, 4), "ms"), "250 ms"),
        (Number(Fraction(1, 4), "%"), "25%"),
        (Power(Name("z"), Fraction(-1)), "z^-1"),
        (Power(Number(Fraction(10)), Fraction(-3, 10)), "10^(-3/10)"),
        (Sum((Name("a"), Negative(Name("b")))), "a - b"),
        (Product((Sum((Name("a"), Name("b"))), Name("c"))), "(a + b)*c"),
        (Quotient(Name("a"), Product((Name("b"), Name("c")))), "a/(b*c)"),
        (Negative(Sum((Name("a"), Name("b")))), "-(a + b)"),
        (Function("tan", Quotient(Product((Pi(), Name("f0"))), Number(Fraction(48000), "Hz"))), "tan(pi*f0/48000 Hz)"),
    ],
)
def test_how_expressions_are_written(expression: Expression, text: str) -> None:
    """Decimals where they end, units as they were, the fewest brackets."""
    assert print_expression(expression) == text


STATION = """diagram section {
    coef b0
    coef a1 = 0.5
    input x
    output y
    delay y1 = y
    adder y = b0*x + a1*y1
    intent y / x = b0/(1 - a1*z^-1)
}
diagram station {
    title "river gauge"
    version "3"
    note "the level sensor sits 2 m above the bed"
    rate 8 kHz
    coef g = cos(2*pi*50 Hz/rate)
    coef h = [1, -1/3, 0.25]
    input in[left], in[right]
    output out[left], out[right]
    row out[left], out[right]
    repeat ch in left, right {
        use low[ch] = section(in[ch]) with b0 = g, a1 = 1/4
        delay line[ch] = low[ch] by 1 ms starts 1
        adder out[ch] = h[0]*low[ch] + h[1]*line[ch][3] - h[2]*line[ch][end]
        intent out[ch][n] = g*in[ch][n] + in[ch][n-1], in[ch][-1] = 1
        require "SR-7" gain out[ch] / in[ch] at 50 Hz within -3 .. 2.5 dB
    }
    require stable
    require cells <= 20
}
"""


def test_a_whole_diagram_prints_like_this() -> None:
    """Inner names are written with _, arrays and claims stay what they are."""
    assert print_diagram(read_diagram(STATION)) == (
        "diagram station {\n"
        '    title "river gauge"\n'
        '    version "3"\n'
        '    note "the level sensor sits 2 m above the bed"\n'
        "    rate 8 kHz\n"
        "    repeat label in left, right { }\n"
        "    coef g = cos(2*pi*50 Hz/8000 Hz)\n"
        "    coef h = [1, (-1/3), 0.25]\n"
        "    coef low_left_b0 = g\n"
        "    const low_left_a1 = 0.25\n"
        "    coef low_right_b0 = g\n"
        "    const low_right_a1 = 0.25\n"
        "    input in[left], in[right]\n"
        "    output out[left]\n"
        "    output out[right]\n"
        "    delay low_left_y1 = low_left_y\n"
        "    adder low_left_y = low_left_b0*in[left] + low_left_a1*low_left_y1\n"
        "    delay line[left] = low_left_y by 8 starts 1\n"
        "    adder out[left] = h[0]*low_left_y + h[1]*line[left][3] - h[2]*line[left][8]\n"
        "    delay low_right_y1 = low_right_y\n"
        "    adder low_right_y = low_right_b0*in[right] + low_right_a1*low_right_y1\n"
        "    delay line[right] = low_right_y by 8 starts 1\n"
        "    adder out[right] = h[0]*low_right_y + h[1]*line[right][3] - h[2]*line[right][8]\n"
        "    row out[left], out[right]\n"
        "    intent out[left][n] = g*in[left][n] + in[left][n-1], in[left][-1] = 1\n"
        '    require "SR-7" gain out[left] / in[left] at 50 Hz within -3 .. 2.5 dB\n'
        "    intent out[right][n] = g*in[right][n] + in[right][n-1], in[right][-1] = 1\n"
        '    require "SR-7" gain out[right] / in[right] at 50 Hz within -3 .. 2.5 dB\n'
        "    require stable\n"
        "    require cells <= 20\n"
        "}\n"
    )


def test_a_printed_diagram_checks_by_itself() -> None:
    """Labels, uses and arrays read back without a finding, with the same claims and page."""
    diagram = read_diagram(STATION)
    loaded = load_text(print_file(diagram))
    assert loaded.findings == ()
    [again] = loaded.diagrams
    assert (again.claims, again.rate, again.rows, again.notes) == (
        diagram.claims,
        diagram.rate,
        diagram.rows,
        diagram.notes,
    )
    assert list(again.outputs) == list(diagram.outputs)


def test_print_file_prints_what_claims_refer_to() -> None:
    """The other diagram comes first, in its own terms."""
    text = STATION.partition("diagram station")[0] + (
        "diagram level {\n    coef g = 0.5\n    input x\n    output y\n    delay y1 = y\n    adder y = g*x + 0.5*y1\n"
        "    intent y = section(x) with b0 = g\n}\n"
    )
    diagram = read_diagram(text)
    printed = print_file(diagram)
    loaded = load_text(printed)
    assert loaded.findings == ()
    assert [found.name for found in loaded.diagrams] == ["section", "level"]
    assert loaded.diagrams[-1].claims == diagram.claims
    assert "intent y = section(x) with b0 = g" in printed


def test_inner_names_are_numbered_where_taken() -> None:
    """low.w and low_w do not meet."""
    elements = {
        "x": Input("x"),
        "low_w": Gain("low_w", Name("a"), Signal("x")),
        "low.w": Gain("low.w", Name("a"), Signal("low_w")),
    }
    diagram = Diagram("d", elements, {"y": Output("y", Signal("low.w"))}, {"a": Coefficient("a")})
    assert "gain low_w_2 = a*low_w\n" in print_diagram(diagram)


def test_what_nothing_reads_is_said_to_be_unused() -> None:
    """So the printed text has no finding that the diagram did not have."""
    diagram = read_diagram("diagram d {\n input x, u\n output y\n delay y = x\n unused u\n}")
    assert read_diagram(print_diagram(replace(diagram, name="d"))) == diagram


@pytest.mark.parametrize(("text", "value"), [("0.98", Number(Fraction(49, 50))), ("-1/3", Number(Fraction(-1, 3)))])
def test_values_from_the_command_line(text: str, value: Expression) -> None:
    """A value alone is read as behind `coef r =`."""
    assert read_value(text) == value


@pytest.mark.parametrize(
    "text", ["", "x", "1 +", "[1, 2]", "10^10^10", "1/0", "2 2", "a = 3", 'read "h.csv"', "(" * 999]
)
def test_what_is_no_value_is_refused(text: str) -> None:
    """A sentence says why."""
    with pytest.raises(ValueError, match=r"\w+"):
        read_value(text)
