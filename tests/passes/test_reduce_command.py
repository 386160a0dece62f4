"""`flowgraph reduce` at the shell."""

import json
from dataclasses import replace
from pathlib import Path

import pytest

from flowgraph.cli.main import main
from flowgraph.diagram.diagram import Diagram
from flowgraph.passes import reduce
from flowgraph.passes.change import Change
from flowgraph.text.load import load

SECTION = """\
diagram section {
    coef b0, b1, a1
    input x
    output y
    delay x1 = x
    delay y1 = y
    adder y = b0*x + b1*x1 - a1*y1
    intent y[n] = b0*x[n] + b1*x[n-1] - a1*y[n-1]
}
"""

REDUCED = """\
diagram section {
    coef b0, b1, a1
    input x
    output y
    adder w = x - a1*w1
    delay w1 = w
    adder y = b0*w + b1*w1
    intent y[n] = b0*x[n] + b1*x[n-1] - a1*y[n-1]
}
"""

TOLD = """\
section           before   after
  cells                2       1
  multiplies           3       3
  adds                 2       2

1. exchange_sections: exchanged the sections before y: 2 cells became 1, new w1
   law    Cascaded sections at rest may change places, and the lines that
          then hold the same signal are shared.
   proof  exact; rounds differently

cells that became one
  x1, y1 -> w1
"""


@pytest.fixture
def section(tmp_path: Path) -> Path:
    """A file with one direct form I section."""
    path = tmp_path / "section.sfg"
    path.write_text(SECTION, encoding="utf-8")
    return path


def test_tells_counts_steps_and_text(section: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Counts before and after, each step with its law and proof, what became one, and the text."""
    assert main(["reduce", str(section)]) == 0
    assert capsys.readouterr().out == TOLD + "\n" + REDUCED


def test_prints_the_diagram_after_each_step(section: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """--steps shows the diagram under the step that made it."""
    assert main(["reduce", str(section), "--steps"]) == 0
    shown = "\n".join("   " + line for line in REDUCED.splitlines())
    assert f"   proof  exact; rounds differently\n\n{shown}\n" in capsys.readouterr().out


def test_writes_a_file_that_holds_its_claims(section: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """-o writes the text, and check and verify hold on it; a second run has nothing to save."""
    written = section.with_name("reduced.sfg")
    assert main(["reduce", str(section), "-o", str(written)]) == 0
    assert capsys.readouterr().out == TOLD
    assert written.read_text(encoding="utf-8") == REDUCED
    assert main(["check", str(written)]) == 0
    assert main(["verify", str(written)]) == 0
    capsys.readouterr()
    assert main(["reduce", str(written)]) == 0
    assert "\nnothing to save\n" in capsys.readouterr().out


def test_json(section: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """One object with counts, steps, merged cells and the text."""
    assert main(["reduce", str(section), "--json"]) == 0
    assert json.loads(capsys.readouterr().out) == {
        "name": "section",
        "before": {"cells": 2, "multiplies": 3, "adds": 2},
        "after": {"cells": 1, "multiplies": 3, "adds": 2},
        "steps": [
            {
                "pass": "exchange_sections",
                "law": "Cascaded sections at rest may change places, "
                "and the lines that then hold the same signal are shared.",
                "message": "exchanged the sections before y: 2 cells became 1, new w1",
                "proof": "exact",
                "error_below": 0,
                "keeps_rounding": False,
            }
        ],
        "merged": [{"cells": ["x1", "y1"], "into": "w1"}],
        "text": REDUCED,
    }


@pytest.mark.parametrize(
    ("line", "code"),
    [("    gain spare = 2*x\n", "spare"), ("", "no intent for y")],
    ids=["a signal that nothing reads", "an output without an intent"],
)
def test_refuses_a_diagram_with_findings(
    line: str, code: str, section: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """Findings are told, nothing is reduced and nothing written."""
    intent = SECTION.splitlines(keepends=True)[-2]
    section.write_text(SECTION.replace(intent, line + (intent if line else "")), encoding="utf-8")
    written = section.with_name("reduced.sfg")
    assert main(["reduce", str(section), "-o", str(written)]) == 1
    told = capsys.readouterr()
    assert told.out == ""
    assert code in told.err
    assert not written.exists()


def test_a_fault_of_a_pass_is_told_as_ours(
    section: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    """The pass is named, both diagrams are printed, and nothing is written."""

    def forget_line(diagram: Diagram) -> Change:
        return Change(replace(diagram, elements={n: e for n, e in diagram.elements.items() if n != "x1"}), "forgot")

    monkeypatch.setattr(reduce, "PASSES", (forget_line,))
    written = section.with_name("reduced.sfg")
    assert main(["reduce", str(section), "-o", str(written)]) == 2
    told = capsys.readouterr()
    assert told.out == ""
    assert (
        "internal fault, nothing was written: the pass forget_line is wrong: y reads x1, which is not there" in told.err
    )
    assert f"# before forget_line\n{SECTION}" in told.err
    assert "# after forget_line\nInput(name='x')\nDelay(name='y1'," in told.err
    assert not written.exists()


def test_every_reduced_text_reads_back(tmp_path: Path) -> None:
    """Names of used diagrams, indexes and families come back as plain names, the diagram as the same one."""
    path = tmp_path / "chain.sfg"
    chain = """\
diagram chain {
    input x
    output y
    cascade y = section(x) with b0 = each p, b1 = 1/3, a1 = 1/7
    coef p = [1/3, 1/5, 1/9]
    intent y / x = product(k = 0 .. 2, (p[k] + 1/3*z^-1) / (1 + 1/7*z^-1))
    intent y[n] = y[n-1]
}
"""
    path.write_text(SECTION + chain.replace("    intent y[n] = y[n-1]\n", ""), encoding="utf-8")
    written = tmp_path / "reduced.sfg"
    assert main(["reduce", f"{path}:chain", "-o", str(written)]) == 0
    [again] = load(str(written)).diagrams
    assert load(str(written)).findings == ()
    assert [line.length for line in again.delays()] == [1, 1, 1]
    assert main(["verify", str(written)]) == 0


COMBS = """\
diagram combs_of_the_level_gauge {
    input x
    output y
    adder s1 = x + i1
    delay i1 = s1
    adder s2 = s1 + i2
    delay i2 = s2
    adder s3 = s2 + i3
    delay i3 = s3
    delay c1 = s3 by 8
    delay far = s3 by 11
    adder k1 = s3 - c1[8]
    delay c2 = k1 by 8
    adder k2 = k1 - c2[8] - far[11]
    delay c3 = k2 by 8
    adder y = k2 - c3[8]
    intent y / x = (1 - z^-8)*((1 - z^-8)^2 - z^-11)/(1 - z^-1)^3
}
"""

COMBS_TOLD = """\
combs_of_the_level_gauge  before   after
  cells                       38      29
  multiplies                   0       0
  adds                         7       7

1. merge_equal: merged 9 cells: i3 into far[1], c1[1 .. 8] into far[1 .. 8]
   law    Cells with equal starting contents that take in equal signals hold
          equal samples, and so do equal sums.
   proof  exact; keeps every rounding

cells that became one
  i3, c1[1], far[1] -> far[1]
  c1[2 .. 8], far[2 .. 8] -> far[2 .. 8]
"""


def test_tells_cells_of_lines_as_ranges(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Every cell that shares is told, neighbours of a line together; a long name widens the table."""
    path = tmp_path / "combs.sfg"
    path.write_text(COMBS, encoding="utf-8")
    assert main(["reduce", str(path), "-o", str(tmp_path / "reduced.sfg")]) == 0
    assert capsys.readouterr().out == COMBS_TOLD


def test_long_lists_stay_within_80_columns(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """A list of many cells goes on in the next line, between names and never inside a range."""
    lines = [f"line_number_{k}" for k in range(9)]
    path = tmp_path / "lines.sfg"
    total = " + ".join(f"{k + 1}*{name}[12]" for k, name in enumerate(lines))
    drawn = [f"    delay {name} = x by 12" for name in lines]
    text = [
        "diagram lines {",
        "    input x",
        "    output y",
        *drawn,
        f"    adder y = {total}",
        "    intent y / x = 45*z^-12",
    ]
    path.write_text("\n".join([*text, "}"]), encoding="utf-8")
    assert main(["reduce", str(path), "-o", str(tmp_path / "reduced.sfg")]) == 0
    told = capsys.readouterr().out.splitlines()
    assert max(map(len, told)) <= 80
    listed = " ".join(line.strip() for line in told[told.index("cells that became one") + 1 :])
    assert listed == f"{', '.join(f'{name}[1 .. 12]' for name in lines)} -> line_number_0[1 .. 12]"
    assert all(line.count("[") == line.count("]") for line in told)


@pytest.mark.parametrize("argument", ["", ":section"], ids=["the file", "a diagram of the file"])
def test_never_replaces_the_file_it_reads(argument: str, section: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """-o with the diagram file itself is refused, and the file stays as it is."""
    assert main(["reduce", f"{section}{argument}", "-o", str(section)]) == 2
    told = capsys.readouterr()
    assert told.out == ""
    assert told.err.startswith(f"error: {section}: ")
    assert "name another output" in told.err
    assert section.read_text(encoding="utf-8") == SECTION


def test_never_replaces_a_file_it_includes(section: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """A file that a used diagram comes from is read as well, and stays as it is."""
    node = section.with_name("node.sfg")
    lines = ["input x", "output y = low", "use low = section(x) with b0 = 1, b1 = 1/2, a1 = 1/3"]
    body = "\n    ".join([*lines, "intent y / x = (1 + 1/2*z^-1) / (1 + 1/3*z^-1)"])
    node.write_text(f'include "section.sfg"\ndiagram node {{\n    {body}\n}}\n', encoding="utf-8")
    assert main(["reduce", str(node), "-o", str(section)]) == 2
    assert "name another output" in capsys.readouterr().err
    assert section.read_text(encoding="utf-8") == SECTION
