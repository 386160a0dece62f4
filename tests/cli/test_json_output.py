"""--json of every command: one object under the documented names, the same bytes from run to run."""

from __future__ import annotations

import json
import os
import subprocess
import sys
from pathlib import Path

import pytest

from flowgraph.cli.main import main

BAND = """\
diagram section {
    coef   b0, b1, a1
    input  x
    output y
    delay  x1 = x
    delay  y1 = y
    adder  y = b0*x + b1*x1 - a1*y1
    intent y / x = (b0 + b1*z^-1) / (1 + a1*z^-1)
    require stable
}
diagram band {
    title  "Band – größer"
    rate   500 Hz
    coef   b = [1/2, 1/4]
    coef   r = 0.9
    input  shake, rain
    output low, both
    use    s = section(shake) with b0 = b[0], b1 = b[1], a1 = -r
    gain   low = 1/2*s
    adder  both = s + rain
    intent low / shake = 1/2*(b[0] + b[1]*z^-1) / (1 - r*z^-1)
    intent both / shake = (b[0] + b[1]*z^-1) / (1 - r*z^-2)
    intent both / rain = 1
    require "GAUGE-7" gain low / shake at 0 Hz >= 0 dB
}
"""
CALLS = {
    "check": ["check", "band.sfg"],
    "verify": ["verify", "band.sfg"],
    "analyse": ["analyse", "band.sfg"],
    "reduce": ["reduce", "band.sfg"],
    "schedule": ["schedule", "band.sfg"],
    "draw": ["draw", "band.sfg", "-o", "band.svg"],
    "run": ["run", "band.sfg", "in.csv", "out.csv"],
    "emit": ["emit", "band.sfg", "--to", "python"],
}
NUMBER = {"cells": int, "multiplies": int, "adds": int}


@pytest.fixture(autouse=True)
def _in_an_empty_folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    Path("band.sfg").write_text(BAND)
    Path("in.csv").write_text("shake,rain\n1,0\n0,1\n")


def said(command: str, capsys: pytest.CaptureFixture[str], code: int = 0, file: str = "band.sfg") -> dict[str, object]:
    """The one object a command prints, and nothing on standard error."""
    name, _, *more = CALLS[command]
    assert main([name, file, *more, "--json"]) == code
    told = capsys.readouterr()
    assert told.err == ""
    found = json.loads(told.out)
    assert told.out == json.dumps(found, indent=2, ensure_ascii=False) + "\n"
    assert isinstance(found, dict)
    return found


def test_check(capsys: pytest.CaptureFixture[str]) -> None:
    """findings with code, severity, message, file, line, column, mend and notes."""
    Path("band.sfg").write_text(BAND.replace("+ rain", "+ rein"))
    found = said("check", capsys, 1)
    assert list(found) == ["findings"]
    told = {finding["code"]: finding for finding in found["findings"]}
    assert told["undefined"] == {
        "code": "undefined",
        "severity": "error",
        "message": "rein is not defined",
        "file": "band.sfg",
        "line": 20,
        "column": 23,
        "mend": "did you mean rain?",
        "notes": [],
    }


def test_verify(capsys: pytest.CaptureFixture[str]) -> None:
    """Each verdict with its place, road, conditions and counterexample."""
    found = said("verify", capsys, 1)
    section, band = found["diagrams"]
    assert (section["name"], band["name"]) == ("section", "band")
    keys = ("line", "column", "verdict", "method", "error_below", "number")
    assert [tuple(verdict[key] for key in keys) for verdict in band["verdicts"]] == [
        (21, 5, "proved", "exact", 0, ""),
        (22, 5, "refuted", "exact", 0, ""),
        (23, 5, "proved", "exact", 0, ""),
        (24, 5, "proved", "certified", 0, "GAUGE-7"),
        (9, 5, "proved", "exact", 0, ""),
    ]
    refuted = band["verdicts"][1]
    assert refuted["claim"] == "intent both / shake = (b[0] + b[1]*z^-1) / (1 - r*z^-2)"
    assert (refuted["file"], refuted["set"], refuted["explained_by"]) == ("band.sfg", "base", None)
    assert refuted["conditions"] == []
    assert refuted["counterexample"] == {
        "output": "both",
        "input": "shake",
        "sample": 1,
        "diagram": "7/10",
        "claim": "1/4",
        "coefficients": {},
    }
    assert band["verdicts"][4]["use"] == {"name": "s", "place": "band.sfg:18:5"}


def test_analyse(capsys: pytest.CaptureFixture[str]) -> None:
    """Exact polynomials in rising powers of z^-1 as strings, poles and hidden modes as numbers."""
    found = said("analyse", capsys)
    [band] = found["diagrams"]
    assert (band["name"], band["cells"], band["order"], band["stability"], band["exact"]) == (
        "band", 2, 1, "stable", True,
    )  # fmt: skip
    assert [(one["output"], one["input"]) for one in band["transfer"]] == [
        ("low", "shake"),
        ("low", "rain"),
        ("both", "shake"),
        ("both", "rain"),
    ]
    low, nothing, _, through = band["transfer"]
    assert (low["numerator_values"], low["denominator_values"]) == (["1/4", "1/8"], ["1", "-9/10"])
    assert all(isinstance(text, str) for text in [*low["numerator"], *low["denominator"]])
    assert (nothing["numerator"], nothing["denominator"]) == (["0"], ["1"])
    assert (through["numerator"], through["denominator"]) == (["1"], ["1"])
    assert low["zeros"] == [[-0.5, 0.0]]
    assert band["poles"] == [[0.9, 0.0], [0.0, 0.0]]
    assert band["hidden_modes"] == [
        {"pole": [0.0, 0.0], "radius": 0.0, "multiplicity": 1, "why": "no output shows it", "cells": ["s.x1", "s.y1"]}
    ]
    assert band["remarks"] == []


def test_analyse_without_values(capsys: pytest.CaptureFixture[str]) -> None:
    """What an open coefficient leaves unknown is null, and a remark says why."""
    [section] = said("analyse", capsys, file="band.sfg:section")["diagrams"]
    assert (section["stability"], section["poles"], section["transfer"][0]["zeros"]) == (None, None, None)
    assert section["transfer"][0]["numerator"] == ["b0", "b1"]
    assert section["transfer"][0]["denominator"] == ["1", "a1"]
    assert "open" in section["remarks"][0]


def test_reduce(capsys: pytest.CaptureFixture[str]) -> None:
    """Counts before and after, each step with its proof, what merged, and the text."""
    found = said("reduce", capsys)
    assert found["before"] == {"cells": 2, "multiplies": 3, "adds": 3}
    assert {key: type(value) for key, value in found["after"].items()} == NUMBER
    assert found["after"]["cells"] == 1
    for step in found["steps"]:
        assert step["proof"] in ("exact", "identity test")
        assert all(isinstance(step[key], str) and step[key] for key in ("pass", "message", "law"))
    assert found["text"].startswith("diagram band {\n")


def test_schedule(capsys: pytest.CaptureFixture[str]) -> None:
    """Counts, and operations with what they read."""
    found = said("schedule", capsys)
    assert {key: type(value) for key, value in found["counts"].items()} == NUMBER
    assert found["operations"][0] == {"name": "shake", "kind": "input", "reads": []}
    assert found["operations"][-1]["kind"] == "update"


def test_draw_run_and_emit_name_what_they_made(capsys: pytest.CaptureFixture[str]) -> None:
    """The files, or the text of the program."""
    [drawing] = said("draw", capsys)["drawings"]
    assert (drawing["name"], drawing["file"], drawing["format"]) == ("band", "band.svg", "svg")
    ran = said("run", capsys)
    assert (ran["samples"], ran["inputs"], ran["outputs"]) == (2, ["shake", "rain"], ["low", "both"])
    emitted = said("emit", capsys)
    assert (emitted["language"], emitted["class"]) == ("python", "Band")


def test_the_same_input_gives_the_same_bytes() -> None:
    """Text, JSON and files of every command, whatever the order of hashing and the locale: not a byte differs."""
    script = "import sys; from flowgraph.cli.main import main\n" + "".join(
        f"main({words!r}); main({[*words, '--json']!r})\n" for words in CALLS.values()
    )
    told = []
    for seed, utf8 in (("1", "1"), ("4242", "0")):
        ended = subprocess.run(
            [sys.executable, "-c", script],
            env={**os.environ, "PYTHONHASHSEED": seed, "PYTHONUTF8": utf8, "PYTHONIOENCODING": "ascii"},
            capture_output=True,
            check=True,
            timeout=60,
        )
        told.append((ended.stdout, ended.stderr, Path("band.svg").read_bytes(), Path("out.csv").read_bytes()))
    assert told[0] == told[1]
    assert len(told[0][0]) > 5000
