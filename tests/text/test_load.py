"""Files and texts as diagrams: what names, numbers, repeats and uses become."""

from __future__ import annotations

from fractions import Fraction
from pathlib import Path

from read_diagram import read_diagram, read_diagrams

from flowgraph.diagram.claim import DiagramIntent, EquationIntent, GainRequirement, RatioIntent
from flowgraph.diagram.diagram import Coefficient, count
from flowgraph.diagram.elements import Adder, Delay, Gain, Signal, Term
from flowgraph.diagram.expression import Name, Number, Product, Quotient, Sample, Sum
from flowgraph.text.load import load, load_text

SECTION = """diagram section {
    coef b0
    coef b1 = 2
    coef b2 = b0*b1
    input x
    output y
    delay x1 = x
    adder y = b0*x + b2*x1
    intent y / x = b0 + b2*z^-1
}
"""


def plain(lines: str) -> str:
    """A diagram around some lines, with input x and output y."""
    return f"diagram level {{\n input x\n output y\n{lines}\n}}\n"


def test_numbers_are_exact_from_the_first_character() -> None:
    """0.95 is 19/20, 12_000 and 2e-5 are what they say, 25 % is 1/4."""
    diagram = read_diagram(
        plain("coef a = 0.95\ncoef b = 12_000\ncoef c = 2e-5\ncoef d = 25 %\ngain g = a*b*c*d*x\nwire y = g")
    )
    values = [coefficient.value for coefficient in diagram.coefficients.values()]
    assert values == [
        Number(Fraction(19, 20)),
        Number(Fraction(12000)),
        Number(Fraction(1, 50000)),
        Number(Fraction(1, 4), "%"),
    ]


def test_the_sign_of_a_power_is_outside() -> None:
    """-2^2 is -4, 2^-1 is 1/2, 2^3^2 is 2^9."""
    diagram = read_diagram(
        plain("const a = -2^2\nconst b = 2^-1\nconst c = 2^3^2\nadder y = a*x + b*d + c*e\ndelay d, e = x")
    )
    assert [term.coefficient for term in diagram.elements["y"].terms] == [  # type: ignore[union-attr]
        Number(Fraction(-4)),
        Number(Fraction(1, 2)),
        Number(Fraction(512)),
    ]


def test_a_unit_binds_to_its_number() -> None:
    """48 kHz is 48000 in hertz, rate/4 is a quantity in hertz, 250 us at 48 kHz are 12 cells."""
    diagram = read_diagram(plain("rate 48 kHz\ndelay l = x by 250 us\ncoef c = rate/4/1 kHz\nadder y = c*x + l[end]"))
    assert diagram.rate == 48000
    assert diagram.elements["l"] == Delay("l", Signal("x"), 12)
    assert diagram.coefficients["c"].value == Quotient(Number(Fraction(12000), "Hz"), Number(Fraction(1000), "kHz"))


def test_wires_and_tap_0_are_resolved() -> None:
    """A wire, an output with a source and line[0] are the signal they stand for."""
    diagram = read_diagram(
        "diagram d {\n input x\n output v = l[0]\n output y\n wire w = x\n delay l = w by 2\n adder y = w + l[2]\n}"
    )
    assert diagram.outputs["v"].signal == Signal("x")
    assert diagram.elements["y"] == Adder("y", (Term(Signal("x")), Term(Signal("l", 2))))


def test_starts_fill_a_line_or_are_listed() -> None:
    """One value fills all cells; a list gives line[1] first; names take one each."""
    one, two = Number(Fraction(1)), Number(Fraction(-2))
    diagram = read_diagram(
        plain(
            "delay a = x by 2 starts 1\ndelay b = x by 2 starts [1, -2]\ndelay c, d = x starts 1, -2\n"
            "adder y = a[end] + b[1] + b[2] + c + d"
        )
    )
    assert [delay.starts for delay in diagram.delays()] == [(one, one), (one, two), (one,), (two,)]
    assert diagram.elements["d"] == Delay("d", Signal("c", 1), 1, (two,))


def test_a_repeat_spells_out_its_lines() -> None:
    """Names carry the index; totals stand for their terms in rising order."""
    diagram = read_diagram(
        plain("const N = 2\ncoef h = [1, 2, 3]\nrepeat k = 1 .. N {\n delay d[k] = s[k-1]\n wire s[k] = d[k]\n}\n"
              "wire s[0] = x\nadder y = total(k = 0 .. count(h) - 1, h[k]*s[k])")
    )  # fmt: skip
    assert list(diagram.elements) == ["x", "d[1]", "d[2]", "y"]
    assert diagram.elements["y"] == Adder(
        "y",
        (
            Term(Signal("x"), False, Name("h[0]")),
            Term(Signal("d[1]", 1), False, Name("h[1]")),
            Term(Signal("d[2]", 1), False, Name("h[2]")),
        ),
    )


def test_labels_are_indices() -> None:
    """`repeat ch in left, right` gives in[left] and in[right]."""
    diagram = read_diagram(
        "diagram d {\n input in[left], in[right]\n output out[left], out[right]\n"
        " repeat ch in left, right { gain out[ch] = 2*in[ch] }\n}"
    )
    assert diagram.elements["out[right]"] == Gain("out[right]", Number(Fraction(2)), Signal("in[right]"))


def test_a_use_spells_out_the_diagram_under_its_name() -> None:
    """Elements and coefficients get the path in front; what is given follows the user's."""
    diagram = read_diagram(SECTION + plain("coef g\nuse low = section(x) with b0 = g\nadder y = x + low"))
    assert list(diagram.elements) == ["x", "low.x1", "low.y", "y"]
    assert diagram.elements["y"] == Adder("y", (Term(Signal("x")), Term(Signal("low.y"))))
    assert diagram.coefficients == {
        "g": Coefficient("g"),
        "low.b0": Coefficient("low.b0", Name("g"), True),
        "low.b1": Coefficient("low.b1", Number(Fraction(2))),
        "low.b2": Coefficient("low.b2", Product((Name("low.b0"), Name("low.b1")))),
    }
    [use] = diagram.uses
    assert (use.path, use.diagram.name, use.bindings) == ("low", "section", {"b0": Name("g")})


def test_a_cascade_takes_one_row_each() -> None:
    """y[0], y[1] follow each other, and y is the last."""
    diagram = read_diagram(
        SECTION + plain("coef c = [3, 4]\ncascade s = section(x) with b0 = each c\nadder y = s + s[0]")
    )
    assert diagram.elements["s[1].x1"] == Delay("s[1].x1", Signal("s[0].y"))
    assert diagram.elements["y"] == Adder("y", (Term(Signal("s[1].y")), Term(Signal("s[0].y"))))
    assert diagram.coefficients["s[1].b0"] == Coefficient("s[1].b0", Name("c[1]"), True)


def test_a_used_diagram_takes_its_user_s_rate() -> None:
    """The diagram itself is read at that rate too, so that its lengths in time have a meaning."""
    echo = (
        "diagram echo {\n input x\n output y\n delay l = x by 2 ms\n adder y = x + l[end]\n"
        " intent y / x = 1 + z^-16\n}\n"
    )
    both = read_diagrams(echo + plain("rate 8 kHz\nuse y = echo(x)\nintent y / x = 1 + z^-16"))
    assert both["echo"].elements["l"] == Delay("l", Signal("x"), 16)
    assert both["level"].elements["y.l"] == Delay("y.l", Signal("x"), 16)
    assert load_text(echo + plain("rate 8 kHz\nuse y = echo(x)\nintent y / x = 1 + z^-16")).findings == ()


def test_claims_are_typed() -> None:
    """An equation has samples, a ratio has z, another diagram stands in this one's terms."""
    diagram = read_diagram(
        SECTION + plain(
            "rate 8 kHz\ncoef g\nuse y = section(x) with b0 = g\nintent y[n] = g*x[n] + 2*g*x[n-1], x[-1] = 1\n"
            "intent y / x = g + z^-1 late 2 samples\nintent y = section(x) with b0 = g\n"
            'require "SR-1" gain y / x at 1 kHz within -3 .. 2 dB\nrequire cells <= 4'
        )
    )  # fmt: skip
    equation, ratio, same, gain, cells = diagram.claims
    two_g = Product((Number(Fraction(2)), Name("g"), Sample("x", 1)))
    assert equation == EquationIntent(
        "y", Sum((Product((Name("g"), Sample("x", 0))), two_g)), (("x", 1, Number(Fraction(1))),)
    )
    assert isinstance(ratio, RatioIntent)
    assert (ratio.late, ratio.output, ratio.input) == (2, "y", "x")
    assert isinstance(same, DiagramIntent)
    assert same.other.coefficients["section.b0"] == Coefficient("section.b0", Name("g"), True)
    assert same.other.elements["x1"] == Delay("x1", Signal("x"))
    assert same.inputs == (("x", "x"),)
    assert gain == GainRequirement("y", "x", Fraction(1000), Fraction(-3), Fraction(2), "SR-1")
    assert str(cells.span) == "diagram.sfg:21:1"


def test_a_broken_claim_leaves_the_diagram_whole() -> None:
    """Its code begins with claim-, and the diagram is there."""
    loaded = load_text(plain("delay y = x\nintent y / x = q*z^-1"))
    assert [found.code for found in loaded.findings] == ["claim-undefined"]
    assert [count(diagram).cells for diagram in loaded.diagrams] == [1]


def test_a_diagram_with_a_delay_free_loop_is_there_to_be_drawn() -> None:
    """The loop is told, and the diagram built."""
    loaded = load_text(plain("adder y = x + 2*y\nintent y[n] = -x[n]"))
    assert [found.code for found in loaded.findings] == ["delay-free-loop"]
    assert [diagram.name for diagram in loaded.diagrams] == ["level"]


def test_several_independent_errors_are_told_in_one_run() -> None:
    """A bad line hides no other, and nothing follows from it."""
    text = plain("gain g = x*2\nadder w = g + q\ninputz\ndelay l = x by 0\nadder y = x + l[1]")
    assert [found.span.line for found in load_text(text).findings] == [4, 5, 6, 7]


def test_includes_bring_their_diagrams(tmp_path: Path) -> None:
    """From below the file's folder, or the library's; a file included twice is read once."""
    (tmp_path / "parts").mkdir()
    (tmp_path / "library").mkdir()
    (tmp_path / "parts" / "section.sfg").write_text(SECTION)
    (tmp_path / "library" / "echo.sfg").write_text(
        "diagram echo {\n input x\n output y\n delay y = x\n intent y / x = z^-1\n}\n"
    )
    path = tmp_path / "level.sfg"
    path.write_text(
        'include "parts/section.sfg"\ninclude "parts/section.sfg"\ninclude "echo.sfg"\n'
        + plain("use e = echo(x)\nuse y = section(e) with b0 = 1\nintent y / x = z^-1 + 2*z^-2")
    )
    loaded = load(str(path), library=str(tmp_path / "library"))
    assert loaded.findings == ()
    assert [diagram.name for diagram in loaded.diagrams] == ["section", "echo", "level"]
    assert load(str(path)).findings[0].message == "echo.sfg cannot be read: no such file or directory"


def test_line_ends_tabs_and_byte_order_marks_are_accepted() -> None:
    """The same diagram, whatever the editor."""
    text = plain("delay y = x\nintent y / x = z^-1")
    assert load_text("\ufeff" + text.replace("\n", "\r\n").replace(" ", "\t")).diagrams == load_text(text).diagrams
    assert load_text(text.replace("\n", "\r\n")).findings == ()
