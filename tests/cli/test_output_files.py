"""Outputs appear whole or not at all, in every way a command can end: refusals, pipes, Ctrl-C."""

from __future__ import annotations

import os
import signal
import subprocess
import sys
import time
from collections.abc import Callable
from pathlib import Path

import pytest

from flowgraph.cli.main import main

MEAN = """\
diagram mean {
    rate   10 Hz
    coef   r = 0.75
    input  level
    output y
    adder  y = (1 - r)*level + r*y1
    delay  y1 = y
    intent y[n] = (1 - r)*level[n] + r*y[n-1]
}
"""
TONE = """\
diagram tone {
    output y
    adder  y = y1 - y2
    delay  y1, y2 = y starts 1, 0
    intent y[n] = y[n-1] - y[n-2], y[-1] = 1
}
"""
WRITING = {
    "reduce": (["reduce", "mean.sfg", "-o"], "out.sfg"),
    "draw": (["draw", "mean.sfg", "-o"], "out.svg"),
    "draw a PNG": (["draw", "mean.sfg", "-o"], "out.png"),
    "draw --reduced": (["draw", "mean.sfg", "--reduced", "-o"], "out.svg"),
    "emit": (["emit", "mean.sfg", "--to", "python", "-o"], "out.py"),
    "run": (["run", "mean.sfg", "in.csv"], "out.csv"),
    "run to WAV": (["run", "mean.sfg", "in.csv"], "out.wav"),
}
writing = pytest.mark.parametrize(("words", "name"), WRITING.values(), ids=WRITING)


@pytest.fixture(autouse=True)
def _in_a_folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    Path("mean.sfg").write_text(MEAN)
    Path("in.csv").write_text("level\n1\n0\n")


def process(*words: str) -> subprocess.Popen[bytes]:
    """The command in a process of its own, as the shell starts it."""
    return subprocess.Popen([sys.executable, "-m", "flowgraph", *words], stdout=subprocess.PIPE, stderr=subprocess.PIPE)


def all_files() -> list[str]:
    return sorted(os.listdir())


@writing
def test_an_output_is_written_whole_over_an_older_one(words: list[str], name: str) -> None:
    """Nothing else is left beside it."""
    before = all_files()
    Path(name).write_text("older and much longer " * 1000)
    assert main([*words, name]) == 0
    assert b"older and much longer" not in Path(name).read_bytes()
    assert all_files() == sorted([*before, name])


@writing
def test_a_missing_folder_is_told_as_the_user_wrote_it(
    words: list[str], name: str, capsys: pytest.CaptureFixture[str]
) -> None:
    """Exit code 2, nothing on standard output, no folder made."""
    before = all_files()
    assert main([*words, f"nowhere/{name}"]) == 2
    assert capsys.readouterr() == ("", f"error: nowhere/{name}: No such file or directory\n")
    assert all_files() == before


@writing
def test_a_folder_or_a_file_in_the_way_is_told(words: list[str], name: str, capsys: pytest.CaptureFixture[str]) -> None:
    """A folder cannot be written to, nor can a place below a file."""
    folder = f"folder{Path(name).suffix}"
    Path(folder).mkdir()
    before = all_files()
    assert main([*words, folder]) == 2
    told = capsys.readouterr()
    assert told.out == ""
    assert told.err.endswith(f"{folder}: Is a directory\n")
    assert main([*words, f"in.csv/{name}"]) == 2
    assert capsys.readouterr() == ("", f"error: in.csv/{name}: Not a directory\n")
    assert all_files() == before


@writing
def test_a_closed_folder_is_told(
    words: list[str], name: str, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    """A place where the user may not write: the older output stays."""
    Path(name).write_text("older")

    def closed(place: Path, *_: object) -> None:
        raise PermissionError(13, "Permission denied", str(place))

    monkeypatch.setattr(Path, "touch", closed)
    assert main([*words, name]) == 2
    assert capsys.readouterr() == ("", f"error: {name}: Permission denied\n")
    assert Path(name).read_text() == "older"


@writing
def test_a_full_disk_leaves_the_older_output(
    words: list[str], name: str, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    """The new one is removed when it cannot be finished."""
    Path(name).write_text("older")
    before = all_files()

    def full(_: Path, target: Path) -> None:
        raise OSError(28, "No space left on device", str(target))

    monkeypatch.setattr(Path, "replace", full)
    assert main([*words, name]) == 2
    told = capsys.readouterr()
    assert told.out == ""
    assert told.err.endswith("No space left on device\n")
    assert Path(name).read_text() == "older"
    assert all_files() == before


def test_a_drawing_and_a_recording_need_a_known_ending(capsys: pytest.CaptureFixture[str]) -> None:
    """The format follows the name, and the known ones are told."""
    assert main(["draw", "mean.sfg", "-o", "out.gif"]) == 2
    assert capsys.readouterr().err == (
        "error: out.gif: drawings are written as .svg and .png, and the name ends in .gif\n"
    )
    assert main(["run", "mean.sfg", "in.csv", "out.txt"]) == 2
    assert capsys.readouterr().err == (
        "error: out.txt: recordings are .csv or .wav files, and this name ends in neither\n"
    )


def test_a_reader_that_leaves_early_is_no_error() -> None:
    """`flowgraph .. | head -1`: no traceback, no complaint at exit."""
    texts = [MEAN.replace("mean", f"mean{k}") for k in range(400)]
    Path("many.sfg").write_text("".join(texts))
    with process("verify", "many.sfg") as started:
        assert started.stdout is not None
        assert started.stderr is not None
        assert started.stdout.readline() == b"mean0: 1 proved\n"
        started.stdout.close()
        assert started.stderr.read() == b""
    assert started.returncode == 0


def test_closed_streams_change_nothing_but_the_output() -> None:
    """A shell that closed standard output (`>&-`) still gets the exit code, without a traceback."""
    for command, code in (("verify mean.sfg", 0), ("analyse mean.sfg --json", 0), ("verify missing.sfg", 2)):
        ended = subprocess.run(
            f"{sys.executable} -m flowgraph {command} >&-", shell=True, stderr=subprocess.PIPE, timeout=20
        )
        assert ended.returncode == code
        assert ended.stderr == (b"error: missing.sfg: No such file or directory\n" if code else b"")


def test_a_name_that_is_no_utf_8_is_told_with_escapes() -> None:
    """Any name of a file can be told, in text and in JSON."""
    Path("bad\udcff.sfg").write_text(MEAN)
    with process("verify", "bad\udcff.sfg", "--json") as started:
        told = started.communicate(timeout=20)[0]
    assert started.returncode == 0
    assert rb'"file": "bad\udcff.sfg"' in told


def test_ctrl_c_leaves_nothing_behind() -> None:
    """A long run is interrupted while it computes: one word, code 130, the older output as it was."""
    Path("tone.sfg").write_text(TONE)
    Path("out.csv").write_text("older")
    before = all_files()
    with process("run", "tone.sfg", "100000000", "out.csv") as started:
        _wait_for(lambda: all_files() != before)
        started.send_signal(signal.SIGINT)
        _, told = started.communicate(timeout=20)
    assert (started.returncode, told) == (130, b"stopped\n")
    assert Path("out.csv").read_text() == "older"
    assert all_files() == before


def _wait_for(happened: Callable[[], bool]) -> None:
    end = time.monotonic() + 60
    while not happened():
        assert time.monotonic() < end
        time.sleep(0.01)
