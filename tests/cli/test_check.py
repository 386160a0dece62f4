"""`flowgraph check`: findings for people and for programs, and the exit codes."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from flowgraph.cli.main import main

GOOD = "diagram level {\n    input x\n    output y\n    delay y = x\n    intent y / x = z^-1\n}\n"
LOOP = "diagram level {\n    input x\n    output y\n    adder y = x + 2*y\n    intent y / x = -1\n}\n"


@pytest.fixture
def folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """An empty folder to stand in."""
    monkeypatch.chdir(tmp_path)
    return tmp_path


def test_a_good_file_is_counted(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """One line for each diagram, and code 0."""
    (folder / "level.sfg").write_text(GOOD)
    assert main(["check", "level.sfg"]) == 0
    assert capsys.readouterr().out == "level.sfg: level is well formed (2 elements, 1 cell, 1 claim)\n"


def test_findings_end_with_code_1(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Every finding as it is rendered, then their number."""
    (folder / "level.sfg").write_text(LOOP)
    assert main(["check", "level.sfg"]) == 1
    out = capsys.readouterr().out
    assert out.startswith("level.sfg:4:11: error: a loop without a delay: y -> y [delay-free-loop]\n")
    assert out.endswith("\n1 error\n")


def test_json_has_the_fields_that_others_rely_on(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """code, severity, message, file, line, column and notes."""
    (folder / "level.sfg").write_text(LOOP)
    assert main(["check", "--json", "level.sfg"]) == 1
    [found] = json.loads(capsys.readouterr().out)["findings"]
    assert {key: found[key] for key in ("code", "severity", "file", "line", "column")} == {
        "code": "delay-free-loop",
        "severity": "error",
        "file": "level.sfg",
        "line": 4,
        "column": 11,
    }
    assert found["message"] == "a loop without a delay: y -> y"
    assert found["notes"] == [{"message": "y reads y", "file": "level.sfg", "line": 4, "column": 21}]


def test_json_of_a_good_file_is_empty(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """No findings, code 0."""
    (folder / "level.sfg").write_text(GOOD)
    assert main(["check", "--json", "level.sfg"]) == 0
    assert json.loads(capsys.readouterr().out) == {"findings": []}


def test_a_file_that_cannot_be_read_ends_with_code_2(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """The reason is said on standard error."""
    assert main(["check", "nowhere.sfg"]) == 2
    assert capsys.readouterr().err == "error: nowhere.sfg: No such file or directory\n"


def test_a_name_that_is_not_in_the_file_ends_with_code_2(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """The names that are there are listed."""
    (folder / "level.sfg").write_text(GOOD)
    assert main(["check", "level.sfg:rain"]) == 2
    assert capsys.readouterr().err == "error: level.sfg: there is no diagram rain here (there are: level)\n"


def test_a_value_to_try_is_refused(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """No value changes the structure, so --with is not taken in silence."""
    (folder / "level.sfg").write_text(GOOD)
    assert main(["check", "level.sfg", "--with", "r=1"]) == 2
    assert capsys.readouterr().err.startswith("error: check looks at the structure")
