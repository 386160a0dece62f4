"""Bad input through the whole process: a clear answer soon, never a traceback, nothing written."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

import pytest

from flowgraph.cli.main import main

PORTS = "input x\noutput y\n"
HALF = PORTS + "gain y = 1/2*x\nintent y / x = 1/2\n"
MANY = 5_000


def diagram(lines: str, name: str = "d") -> str:
    """A diagram of these lines."""
    return f"diagram {name} {{\n{lines}\n}}\n"


def nested(levels: int) -> str:
    """A diagram that uses one that uses one .. this many levels deep."""
    inner = [diagram(f"{PORTS}use y = d{k}(x)\nintent y / x = 1/2", f"d{k + 1}") for k in range(levels)]
    return diagram(HALF, "d0") + "".join(inner)


REFUSED = {
    "an empty file": ("", "bad.sfg:1:1: error: there is no diagram in this file [empty]"),
    "a binary file": (b"\x7fELF" + bytes(range(256)) * 40, "bad.sfg:1:1: error: this is no text file in UTF-8"),
    "a zero byte": (diagram(HALF).replace("gain", "ga\0in"), "bad.sfg:1:1: error: this is no text file in UTF-8"),
    "a line of 10 MB": (diagram("x" * 10_000_000), "bad.sfg:2:1: error: this line is longer than"),
    "ten thousand brackets": (
        diagram(f"{PORTS}gain y = {'(' * 10_000}1{')' * 10_000}*x"),
        "bad.sfg:4:74: error: brackets more than 64 deep",
    ),
    "ten thousand open brackets": (diagram(f"coef h = {'[' * 10_000}"), "error: brackets more than 64 deep"),
    "a repeat without end": (
        diagram(HALF + "repeat k = 0 .. 10^12 {\ngain g[k] = 2*x\n}"),
        "bad.sfg:6:1: error: this repeat stands for more than 2000000 lines",
    ),
    "a total without end": (
        diagram(PORTS + "delay l = x by 4\nadder y = total(k = 0 .. 10^12, l[k])"),
        "bad.sfg:5:11: error: this total ",
    ),
    "a tower of powers": (diagram(HALF + "coef c = 10^10^10"), "bad.sfg:6:13: error: an exponent beyond 4096"),
    "a number without end": (diagram(HALF + "coef c = 1e1000000000"), "needs more than 4096 bits"),
    "squares of squares": (
        diagram("coef c0 = 3\n" + "".join(f"coef c{k + 1} = c{k}*c{k}\n" for k in range(99)) + HALF),
        "needs more than 4096 bits",
    ),
    "an include of itself": (f'include "bad.sfg"\n{diagram(HALF)}', "bad.sfg:1:9: error: bad.sfg leads back to itself"),
    "an include from outside": (
        f'include "../secret.sfg"\n{diagram(HALF)}',
        "bad.sfg:1:9: error: ../secret.sfg does not stand below the folder of this file",
    ),
    "an include of a folder": (f'include "folder"\n{diagram(HALF)}', "bad.sfg:1:9: error: folder cannot be read"),
    "a diagram that uses itself": (
        diagram(PORTS + "use y = d(x)\nintent y / x = 1"),
        "bad.sfg:4:9: error: the diagram d leads back to itself: d -> d",
    ),
    "uses 100 levels deep": (nested(100), "error: diagrams used more than 64 deep"),
    "coefficients that are words": (
        diagram('coef h = read "words.csv"\n' + PORTS + "gain y = h[0]*x\nintent y / x = h[0]"),
        "words.csv:1:1: error: one is no number",
    ),
    "a name of 65 characters": (
        diagram(HALF.replace("x", "x" * 65)),
        "bad.sfg:2:7: error: a name has at most 64 characters",
    ),
    "a line of 10^9 cells": (
        diagram(PORTS + "delay l = x by 10^9\nwire y = l[10^9]"),
        "bad.sfg:4:1: error: the diagram grows beyond 2000000 elements and cells here",
    ),
    "wires in a circle": (
        diagram(PORTS + "wire a = b\nwire b = a\nadder y = x + a"),
        "bad.sfg:4:1: error: these wires run in a circle: a -> b -> a",
    ),
}
FINE = {
    "many coefficients in a chain": diagram(
        "coef c0 = 1/2\n"
        + "".join(f"coef c{k + 1} = c{k}\n" for k in range(MANY))
        + f"{PORTS}gain y = c{MANY}*x\nintent y / x = c{MANY}"
    ),
    "many wires in a chain": diagram(
        f"{PORTS}wire w0 = x\n"
        + "".join(f"wire w{k + 1} = w{k}\n" for k in range(MANY))
        + f"gain y = 1/2*w{MANY}\nintent y / x = 1/2"
    ),
    "a line of 10^6 cells": diagram(PORTS + "delay l = x by 10^6\nwire y = l[end]\nintent y / x = z^-10^6"),
    "uses 60 levels deep": nested(60),
    "a comment of 10 MB": "#" + "x" * 10_000_000 + "\n" + diagram(HALF),
    "lines ended as on other systems": diagram(HALF).replace("\n", "\r\n"),
    "a byte order mark": b"\xef\xbb\xbf" + diagram(HALF).encode(),
}
RECORDINGS = {
    "a value that is NaN": (b"x\n1\nnan\n", "in.csv:3: nan is no finite number (column x)"),
    "a value that is infinite": (b"x\n1\n1e999\n", "in.csv:3: 1e999 is no finite number (column x)"),
    "a word": (b"x\n1\nhigh\n", "in.csv:3: high is no number (column x)"),
    "a missing value": (b"t;x\n1;2\n1\n", "in.csv:3: 1 values, but the first line names 2 columns"),
    "another column": (b"z\n1\n", "in.csv: no column x and no input for the column z"),
    "no names": (b"1\n2\n", "in.csv:1: 1 is a number; the first line should name the columns"),
    "nothing": (b"", "in.csv: the file is empty"),
    "bytes that are no text": (b"x\n\xff\xfe\n", "in.csv: this is no text in UTF-8"),
}


@pytest.fixture(autouse=True)
def _in_a_folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Beside the bad file: a folder and a file of words. Above it: a file that is none of its business."""
    (tmp_path / "secret.sfg").write_text(diagram(HALF, "secret"))
    (tmp_path / "here" / "folder").mkdir(parents=True)
    monkeypatch.chdir(tmp_path / "here")
    Path("words.csv").write_text("one, two\n")


def ended(*words: str) -> subprocess.CompletedProcess[str]:
    """The command, run to its end in a process of its own; a minute would be a hang."""
    return subprocess.run(
        [sys.executable, "-m", "flowgraph", *words], capture_output=True, encoding="utf-8", timeout=60
    )


def write(content: str | bytes) -> list[str]:
    """Writes bad.sfg and tells which files there are."""
    Path("bad.sfg").write_bytes(content.encode() if isinstance(content, str) else content)
    return sorted(os.listdir())


@pytest.mark.parametrize(("content", "told"), REFUSED.values(), ids=REFUSED)
def test_bad_files_are_refused(content: str | bytes, told: str) -> None:
    """Exit code 1, the place and what is wrong; short, and nothing is written."""
    before = write(content)
    found = ended("reduce", "bad.sfg", "-o", "out.sfg")
    assert found.returncode == 1
    assert found.stdout == ""
    assert told in found.stderr
    assert "Traceback" not in found.stderr
    assert len(found.stderr) < 5000
    assert sorted(os.listdir()) == before


@pytest.mark.parametrize("content", FINE.values(), ids=FINE)
def test_large_and_odd_files_are_fine(content: str | bytes) -> None:
    """What stays inside the bounds is proved, not refused."""
    write(content)
    found = ended("verify", "bad.sfg")
    assert (found.returncode, found.stderr) == (0, "")
    assert "refuted" not in found.stdout


@pytest.mark.parametrize(("content", "told"), RECORDINGS.values(), ids=RECORDINGS)
def test_bad_recordings_are_refused(content: bytes, told: str, capsys: pytest.CaptureFixture[str]) -> None:
    """Exit code 2, the row and the column, no output file."""
    before = [*write(diagram(HALF)), "in.csv"]
    Path("in.csv").write_bytes(content)
    assert main(["run", "bad.sfg", "in.csv", "out.csv"]) == 2
    found = capsys.readouterr()
    assert found.out == ""
    assert found.err.startswith(f"error: {told}")
    assert sorted(os.listdir()) == sorted(before)
