"""Hostile and broken files: each is told in a sentence, and nothing hangs, grows or raises."""

from __future__ import annotations

from pathlib import Path

import pytest

from flowgraph.source.render import render
from flowgraph.text.load import load, load_text


def level(line: str) -> str:
    """A whole diagram with one more line in it."""
    return (
        "diagram level {\n    input x\n    output y\n    delay x1 = x\n    adder y = x + x1\n"
        f"    intent y[n] = x[n] + x[n-1]\n{line}\n}}\n"
    )


def chain(length: int) -> str:
    """Diagrams that use each other in a row; the first in the file is the innermost."""
    first = "diagram d0 {\n input x\n output y\n delay y = x\n intent y / x = z^-1\n}\n"
    return first + "".join(
        f"diagram d{k + 1} {{\n input x\n output y\n use y = d{k}(x)\n intent y / x = z^-1\n}}\n" for k in range(length)
    )


def doubling(levels: int) -> str:
    """Diagrams that each use the one before twice."""
    first = "diagram d0 {\n input x\n output y\n delay y = x\n intent y / x = z^-1\n}\n"
    return first + "".join(
        f"diagram d{k + 1} {{\n input x\n output y\n use a = d{k}(x)\n use y = d{k}(a)\n intent y / x = z^-2\n}}\n"
        for k in range(levels)
    )


HOSTILE = {
    "an empty file": ("", "there is no diagram in this file"),
    "a range of 10^12": (
        level("repeat k = 0 .. 10^12 { adder f[k] = x + y }"),
        "this repeat stands for more than 2000000 lines",
    ),
    "ranges that multiply": (
        level("repeat k = 0 .. 10^5 { repeat m = 0 .. 10^5 { adder f[k][m] = x + y } }"),
        "this repeat stands for more than 2000000 lines",
    ),
    "empty repeats that multiply": (
        level("repeat k = 0 .. 10^5 { repeat m = 0 .. 10^5 { } }"),
        "this repeat stands for more than 2000000 lines",
    ),
    "a tower of powers": (level("const M = 10^10^10"), "an exponent beyond 4096"),
    "a tower of powers in a coefficient": (level("coef c = 10^10^10"), "an exponent beyond 4096"),
    "powers on powers": (level("coef c = " + "2^" * 9999 + "2"), "more than 64 powers on top of each other"),
    "powers in brackets on powers": (
        level("gain g = 2^" + ("1^" * 60 + "(") * 60 + "1" + ")" * 60 + "*x"),
        "more than 64 powers on top of each other",
    ),
    "five thousand digits": (level("coef c = " + "9" * 5000), "a number in this line needs more than 4096 bits"),
    "a huge exponent": (level("coef c = 1e999999999"), "a number in this line needs more than 4096 bits"),
    "ten thousand brackets": (
        level("gain g = " + "(" * 10_000 + "2" + ")" * 10_000 + "*x"),
        "brackets more than 64 deep",
    ),
    "ten thousand indices": (level("adder w = x" + "[" * 10_000 + "1"), "brackets more than 64 deep"),
    "ten thousand signs": (level("coef c = " + "-" * 10_000 + "2"), "a second sign"),
    "blocks in blocks": (level("repeat k = 0 .. 1 {\n" * 100 + "}" * 100), "blocks more than 64 deep"),
    "a line of 10 MB": (level("adder w = x" + " + x" * 2_500_000), "this line is longer than 262144 characters"),
    "a word of 10 MB": ("a" * 10_000_000, "this line is longer than 262144 characters"),
    "a line of 10^9 cells": (
        level("delay l = x by 10^9"),
        "the diagram grows beyond 2000000 elements and cells here",
    ),
    "a total of 10^9 terms": (
        level("gain g = total(k = 0 .. 10^9, k)*x"),
        "this total makes more than 200000 terms of its line",
    ),
    "totals that multiply": (
        level("gain g = total(k = 0 .. 10^5, total(m = 0 .. 10^5, k*m))*x"),
        "this total makes more than 200000 terms of its line",
    ),
    "diagrams used 100 deep": (chain(100), "diagrams used more than 64 deep"),
    "diagrams that double 40 times": (doubling(40), "the diagram grows beyond 2000000 elements and cells here"),
    "blanks without end": (level("gain g = 2" + " " * 200_000 + "x"), "x follows a number without an operator"),
    "a zero byte": ("diagram a\0 {", "this is no text file in UTF-8"),
}


@pytest.mark.parametrize(("text", "message"), HOSTILE.values(), ids=HOSTILE.keys())
def test_hostile_text_is_told(text: str, message: str) -> None:
    """The one thing that is wrong is said, in a few characters."""
    findings = load_text(text).findings
    assert message in [found.message for found in findings]
    assert len("".join(render(found) for found in findings)) < 4000


def test_what_cannot_be_built_is_not_begun() -> None:
    """The size of a used diagram is known before its copies are made; the small ones are built all the same."""
    loaded = load_text(doubling(40))
    [found] = loaded.findings
    assert found.code == "too-large"
    assert [diagram.name for diagram in loaded.diagrams] == [f"d{k}" for k in range(len(loaded.diagrams))]
    assert sum(len(diagram.elements) for diagram in loaded.diagrams) < 100_000


def test_long_chains_of_names_are_no_trouble() -> None:
    """Wires and coefficients that follow each other 2000 times are followed without recursion."""
    wires = "".join(f"wire w{k + 1} = w{k}\n" for k in range(2000))
    coefs = "".join(f"coef c{k + 1} = c{k} + 1\n" for k in range(2000))
    text = f"wire w0 = x\n{wires}coef c0 = 1\n{coefs}gain g = c2000*w2000\nunused g"
    assert load_text(level(text)).findings == ()


def test_a_binary_file_is_told(tmp_path: Path) -> None:
    """Bytes that are no text are refused as such."""
    path = tmp_path / "level.sfg"
    path.write_bytes(bytes(range(256)))
    assert [found.message for found in load(str(path)).findings] == ["this is no text file in UTF-8"]


def test_a_missing_file_raises() -> None:
    """A file that cannot be read is the caller's to report."""
    with pytest.raises(OSError, match="No such file"):
        load("nowhere/level.sfg")


def test_an_include_of_itself_is_told(tmp_path: Path) -> None:
    """A file that leads back to itself ends there."""
    path = tmp_path / "level.sfg"
    path.write_text('include "level.sfg"\n' + level(""))
    assert [found.message for found in load(str(path)).findings] == ["level.sfg leads back to itself"]


@pytest.mark.parametrize("outside", ["../other.sfg", "/etc/hostname", "inside/../../other.sfg", "link.sfg"])
def test_an_include_never_leaves_its_folder(tmp_path: Path, outside: str) -> None:
    """Neither dots, nor a full path, nor a link lead out of the folder of the file."""
    folder = tmp_path / "station"
    folder.mkdir()
    (tmp_path / "other.sfg").write_text(level(""))
    (folder / "link.sfg").symlink_to(tmp_path / "other.sfg")
    (folder / "level.sfg").write_text(f'include "{outside}"\n' + level(""))
    [found] = load(str(folder / "level.sfg")).findings
    assert found.message == f"{outside} does not stand below the folder of this file"


NUMBER_FILES = {
    "0.5, 1/3; -2e-1 # three\n4": [],
    "0.5, half": ["half is no number"],
    "": ["h.csv holds no number"],
    "1/0": ["this divides by zero"],
    "1,5.": ["5. is no number"],
    "9" * 5000: ["this number needs more than 4096 bits"],
}


@pytest.mark.parametrize(("numbers", "messages"), NUMBER_FILES.items(), ids=[text[:10] for text in NUMBER_FILES])
def test_files_of_coefficients(tmp_path: Path, numbers: str, messages: list[str]) -> None:
    """Decimals and fractions are taken as they are; a word among them is named at its place."""
    (tmp_path / "h.csv").write_text(numbers)
    path = tmp_path / "level.sfg"
    path.write_text(
        'diagram level {\n coef h = read "h.csv"\n input x\n output y\n delay l = x by 4\n'
        " adder y = total(k = 0 .. count(h) - 1, h[k]*l[k])\n"
        " intent y / x = total(k = 0 .. count(h) - 1, h[k]*z^-k)\n}\n"
    )
    assert [found.message for found in load(str(path)).findings] == messages


def test_a_missing_file_of_coefficients_is_told() -> None:
    """The line that names it is the place."""
    [found] = load_text(level('coef h = read "nowhere.csv"')).findings
    assert (found.message, found.span.line) == ("nowhere.csv cannot be read: no such file or directory", 7)
