"""schedule, emit and run from the command line: what is printed, written and returned."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from flowgraph.cli.main import main
from flowgraph.cli.progress import progress_bar

LEAKY = """\
diagram leaky_level {
    rate   10 Hz
    coef   r = 0.75
    input  level
    output mean
    delay  mean1 = mean
    adder  mean  = (1 - r)*level + r*mean1
    intent mean[n] = (1 - r)*level[n] + r*mean[n-1]
}
"""

OPEN = LEAKY.replace("r = 0.75", "r")


@pytest.fixture
def leaky(tmp_path: Path) -> Path:
    """A file with one diagram."""
    file = tmp_path / "leaky.sfg"
    file.write_text(LEAKY)
    return file


def test_schedule_prints_the_table(leaky: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Operations in order, then the cell, then the counts."""
    assert main(["schedule", str(leaky)]) == 0
    assert capsys.readouterr().out.splitlines() == [
        "leaky_level: the operations of one sample",
        "  1  input   level",
        "  2  adder   mean = (1 - r)*level + r*mean1",
        "  3  output  mean",
        "then the cells, none read after it was overwritten",
        "  4  update  mean1 = mean",
        "2 multiplies, 1 add, 1 cell",
    ]


def test_schedule_as_json(leaky: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Counts and operations under the documented names."""
    assert main(["schedule", str(leaky), "--json"]) == 0
    assert json.loads(capsys.readouterr().out) == {
        "name": "leaky_level",
        "counts": {"multiplies": 2, "adds": 1, "cells": 1},
        "operations": [
            {"name": "level", "kind": "input", "reads": []},
            {"name": "mean", "kind": "adder", "reads": ["level", "mean1"]},
            {"name": "mean", "kind": "output", "reads": ["mean"]},
            {"name": "mean1", "kind": "update", "reads": ["mean"]},
        ],
    }


def test_emit_writes_the_program_it_prints(leaky: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """To standard output or, whole, to a file."""
    assert main(["emit", str(leaky), "--to", "python"]) == 0
    printed = capsys.readouterr().out
    assert "        mean = 0.25 * level + 0.75 * self.mean1\n" in printed
    program = leaky.with_name("leaky.py")
    assert main(["emit", str(leaky), "--to", "python", "-o", str(program)]) == 0
    assert capsys.readouterr().out == ""
    assert program.read_text() == printed
    assert main(["emit", str(leaky), "--to", "python", "--json"]) == 0
    assert json.loads(capsys.readouterr().out) == {
        "name": "leaky_level",
        "language": "python",
        "class": "LeakyLevel",
        "text": printed,
    }


def test_emit_into_a_missing_folder_is_an_error_of_the_call(leaky: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Exit code 2, and the path as the user wrote it."""
    path = str(leaky.parent / "nowhere" / "leaky.py")
    assert main(["emit", str(leaky), "--to", "python", "-o", path]) == 2
    assert capsys.readouterr().err == f"error: {path}: No such file or directory\n"


def test_an_open_coefficient_takes_a_value_from_the_call(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Without one nothing is printed but the finding with its mend."""
    file = tmp_path / "open.sfg"
    file.write_text(OPEN)
    assert main(["emit", str(file), "--to", "python"]) == 1
    told = capsys.readouterr()
    assert told.out == ""
    assert "the coefficient r is open, so nothing can be computed with it" in told.err
    assert main(["emit", str(file), "--to", "python", "--with", "r=0.5"]) == 0
    assert "mean = 0.5 * level + 0.5 * self.mean1" in capsys.readouterr().out


def test_run_writes_the_outputs_and_says_so(leaky: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """A step of 1 through the leaky integrator: 1/4, 7/16, 37/64."""
    source, target = leaky.with_name("in.csv"), leaky.with_name("out.csv")
    source.write_text("level\n1\n1\n1\n")
    assert main(["run", str(leaky), str(source), str(target)]) == 0
    assert capsys.readouterr().out == f"{target}: 3 samples (0.3 s) of mean\n"
    assert target.read_text() == "mean\n0.25\n0.4375\n0.578125\n"
    assert main(["run", str(leaky), str(source), str(target), "--json"]) == 0
    assert json.loads(capsys.readouterr().out) == {
        "samples": 3,
        "inputs": ["level"],
        "outputs": ["mean"],
        "rate": 10,
        "file": str(target),
        "not_finite": [],
    }


def test_run_refuses_a_bad_recording_and_writes_nothing(leaky: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Exit code 2, the row of the bad value, no output file."""
    source, target = leaky.with_name("in.csv"), leaky.with_name("out.csv")
    source.write_text("level\n1\nnan\n")
    assert main(["run", str(leaky), str(source), str(target)]) == 2
    assert capsys.readouterr().err == f"error: {source}:3: nan is no finite number (column level)\n"
    assert main(["run", str(leaky), "missing.csv", str(target)]) == 2
    assert capsys.readouterr().err == "error: missing.csv: No such file or directory\n"
    assert not target.exists()


def test_run_warns_of_an_output_that_leaves_the_doubles(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """The signal and its first sample are named; a warning is no error."""
    file, source = tmp_path / "growing.sfg", tmp_path / "in.csv"
    file.write_text(LEAKY.replace("0.75", "1000"))
    source.write_text("level\n" + "1e300\n" * 5)
    assert main(["run", str(file), str(source), str(tmp_path / "out.csv")]) == 0
    assert capsys.readouterr().err == "warning: mean is NaN or infinite, first at sample 2\n"


def test_progress_is_shown_on_a_terminal_after_a_second_only(
    monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    """Short work and pipes see nothing; the bar is wiped away at the end."""
    clock = iter([0.0, 0.5, 1.5, 2.0])
    monkeypatch.setattr("flowgraph.cli.progress.monotonic", lambda: next(clock))
    show = progress_bar("in.csv")
    show(0.1)
    monkeypatch.setattr("sys.stderr.isatty", lambda: True)
    show(0.2)
    assert capsys.readouterr().err == ""
    show(0.5)
    assert capsys.readouterr().err == "\rin.csv [####################                    ]  50%"
    show(1.0)
    assert capsys.readouterr().err == "\r" + " " * 80 + "\r"
