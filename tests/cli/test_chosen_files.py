"""What a command works on: FILE, FILE:NAME, several, -, includes, --library, and values tried by --with."""

from __future__ import annotations

import io
from pathlib import Path

import pytest

from flowgraph.cli.main import main

ONE_POLE = """\
diagram one_pole {
    coef   a
    input  x
    output y
    adder  y = x + a*y1
    delay  y1 = y
    intent y / x = 1 / (1 - a*z^-1)
    require stable
}
"""
GAUGE = """\
diagram gauge {
    rate   10 Hz
    coef   r = 0.5
    coef   h = [2, 3]
    input  level
    output out
    use    p = one_pole(level) with a = r
    adder  out = h[0]/r*p + h[1]*level
    intent out / level = h[0]/r / (1 - r*z^-1) + h[1]
    require gain out / level at 0 Hz within 20 .. 22 dB
}
"""
SPARE = ONE_POLE.replace("one_pole", "spare")


@pytest.fixture(autouse=True)
def _in_a_folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """gauge.sfg includes parts.sfg; parts.sfg has a diagram that gauge does not use."""
    monkeypatch.chdir(tmp_path)
    Path("parts.sfg").write_text(ONE_POLE + SPARE)
    Path("gauge.sfg").write_text('include "parts.sfg"\n' + GAUGE)


def heads(capsys: pytest.CaptureFixture[str]) -> list[str]:
    """The first words of the lines that are not indented: one for each diagram."""
    return [line.split(":")[0] for line in capsys.readouterr().out.splitlines() if line and line[0] != " "]


def test_a_file_stands_for_its_own_diagrams_that_no_other_uses(capsys: pytest.CaptureFixture[str]) -> None:
    """What it includes is a part, not a thing to work on; verify alone proves the parts as well."""
    assert main(["analyse", "gauge.sfg"]) == 0
    assert heads(capsys) == ["gauge"]
    assert main(["schedule", "gauge.sfg"]) == 0
    capsys.readouterr()
    assert main(["verify", "gauge.sfg"]) == 0
    assert heads(capsys) == ["one_pole", "spare", "gauge"]


def test_a_file_that_only_includes_stands_for_what_it_includes(capsys: pytest.CaptureFixture[str]) -> None:
    """Otherwise there would be nothing to work on."""
    Path("all.sfg").write_text('include "parts.sfg"\n')
    assert main(["analyse", "all.sfg"]) == 0
    assert heads(capsys) == ["one_pole", "spare"]


def test_one_diagram_of_a_file(capsys: pytest.CaptureFixture[str]) -> None:
    """FILE:NAME, also for an included one; an unknown name is told with those there are."""
    assert main(["analyse", "gauge.sfg:one_pole", "parts.sfg:spare"]) == 0
    assert heads(capsys) == ["one_pole", "spare"]
    assert main(["analyse", "gauge.sfg:gouge"]) == 2
    assert capsys.readouterr() == (
        "",
        "error: gauge.sfg: there is no diagram gouge here (there are: one_pole, spare, gauge)\n",
    )


def test_a_colon_in_the_name_of_a_file_is_left_alone(capsys: pytest.CaptureFixture[str]) -> None:
    """A file that is there is that file."""
    Path("a:b").write_text(ONE_POLE)
    assert main(["check", "a:b"]) == 0
    assert capsys.readouterr().out == "a:b: one_pole is well formed (3 elements, 1 cell, 2 claims)\n"


def test_commands_on_one_diagram_ask_for_a_name(capsys: pytest.CaptureFixture[str]) -> None:
    """They do not pick one of several."""
    assert main(["schedule", "parts.sfg"]) == 2
    assert capsys.readouterr() == (
        "",
        "error: there are 2 diagrams here, name one as FILE:NAME (one_pole, spare)\n",
    )


def test_several_files_and_standard_input(monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]) -> None:
    """In the order of the call; `-` reads what another program writes."""
    monkeypatch.setattr("sys.stdin", io.TextIOWrapper(io.BytesIO(SPARE.encode())))
    assert main(["analyse", "gauge.sfg", "-"]) == 0
    assert heads(capsys) == ["gauge", "spare"]


def test_nothing_is_judged_when_one_of_several_files_cannot_be_read(capsys: pytest.CaptureFixture[str]) -> None:
    """Half an answer looks like a whole one."""
    assert main(["verify", "gauge.sfg", "missing.sfg"]) == 2
    assert capsys.readouterr() == ("", "error: missing.sfg: No such file or directory\n")


def test_includes_from_a_library(capsys: pytest.CaptureFixture[str]) -> None:
    """Not below the folder of the file, but below --library."""
    Path("library").mkdir()
    Path("parts.sfg").rename("library/parts.sfg")
    assert main(["check", "gauge.sfg"]) == 1
    assert "gauge.sfg:1:9: error: parts.sfg cannot be read" in capsys.readouterr().out
    assert main(["verify", "gauge.sfg", "--library", "library"]) == 0
    assert heads(capsys) == ["one_pole", "spare", "gauge"]


def test_a_value_is_tried_without_editing(capsys: pytest.CaptureFixture[str]) -> None:
    """--with goes to every diagram that has the coefficient, entries of arrays included; requirements see it."""
    assert main(["verify", "gauge.sfg"]) == 0
    assert "the gain there is 20.8278537 dB" in capsys.readouterr().out
    assert main(["verify", "gauge.sfg", "--with", "r=1/4"]) == 1
    assert "the gain there is 22.7" in capsys.readouterr().out
    assert main(["analyse", "gauge.sfg", "--with", "h[0]=0", "--with", " r = 50 % "]) == 0
    assert "in numbers   3\n" in capsys.readouterr().out


def test_an_open_coefficient_takes_a_value_from_with(capsys: pytest.CaptureFixture[str]) -> None:
    """What was undecided without a value is judged now."""
    assert main(["verify", "parts.sfg:one_pole"]) == 3
    assert "the coefficient a is open" in capsys.readouterr().out
    assert main(["verify", "parts.sfg:one_pole", "--with", "a=2"]) == 1
    assert "unstable: largest pole radius 2 at z = 2" in capsys.readouterr().out


@pytest.mark.parametrize(
    ("given", "told"),
    [
        ("q=1", "--with q: there is no coefficient q here (there are: a, r, h[0], h[1])"),
        ("h[2]=1", "--with h[2]: there is no coefficient h[2] here (there are: a, r, h[0], h[1])"),
        ("h=1", "--with h: there is no coefficient h here (there are: a, r, h[0], h[1])"),
        ("r", "--with r: write NAME=VALUE"),
        ("r=", "--with r=: a value is a number or an expression of numbers"),
        ("r=1 }", "--with r=1 }: a value is a number or an expression of numbers"),
        ("r=1/0", "--with r=1/0: this divides by zero"),
        ("r=10^10^10", "--with r=10^10^10: an exponent beyond 4096"),
    ],
)
def test_a_value_that_cannot_be_used_is_told(given: str, told: str, capsys: pytest.CaptureFixture[str]) -> None:
    """Exit code 2, the option as it was given, nothing judged."""
    assert main(["verify", "gauge.sfg", "--with", given]) == 2
    assert capsys.readouterr() == ("", f"error: {told}\n")


@pytest.mark.parametrize("command", ["run", "emit"])
def test_a_value_that_divides_by_zero_computes_nothing(command: str, capsys: pytest.CaptureFixture[str]) -> None:
    """h[0]/r has no value at r = 0."""
    Path("in.csv").write_text("level\n1\n")
    more = {"run": ["in.csv", "out.csv"], "emit": ["--to", "python"]}[command]
    assert main([command, "gauge.sfg", *more, "--with", "r=0"]) == 1
    told = capsys.readouterr()
    assert told.out == ""
    assert "this coefficient cannot be a double" in told.err
    assert not Path("out.csv").exists()


def test_analyse_of_a_value_that_divides_by_zero_says_so(capsys: pytest.CaptureFixture[str]) -> None:
    """What can be told without the value is told."""
    assert main(["analyse", "gauge.sfg", "--with", "r=0"]) == 0
    told = capsys.readouterr()
    assert "divides by zero" in " ".join(told.out.split())
    assert told.err == ""


def test_a_requirement_without_a_value_is_undecided(capsys: pytest.CaptureFixture[str]) -> None:
    """Division by zero refutes nothing and proves nothing."""
    assert main(["verify", "gauge.sfg:gauge", "--with", "r=0"]) == 3
    assert "undecided  require gain out / level" in capsys.readouterr().out
