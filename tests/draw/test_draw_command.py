"""`flowgraph draw`: which files it writes, what it prints and returns."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from flowgraph.cli.main import main

TWO_LINES = """\
diagram two_lines {
    coef   b0, b1, b2, a1, a2
    input  level
    output smooth
    adder  w = level - a1*w1 - a2*w2
    delay  w1, w2 = w
    delay  v1, v2 = w
    adder  smooth = b0*w + b1*v1 + b2*v2
    intent smooth / level = (b0 + b1*z^-1 + b2*z^-2) / (1 + a1*z^-1 + a2*z^-2)
}
"""

LEAKY = """\
diagram leaky {
    title  "Slow mean of the water level"
    coef   r = 0.75
    input  level
    output mean
    delay  mean1 = mean
    adder  mean  = (1 - r)*level + r*mean1
    intent mean[n] = (1 - r)*level[n] + r*mean[n-1]
}
"""

LOOP = """\
diagram loop {
    input  level
    output mean
    adder  mean = level - 0.5*mean
    intent mean[n] = level[n]
}
"""


@pytest.fixture
def folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A folder of its own to stand in."""
    monkeypatch.chdir(tmp_path)
    return tmp_path


def written(folder: Path) -> list[str]:
    return sorted(path.name for path in folder.iterdir() if path.suffix != ".sfg")


def test_name_of_the_diagram_names_the_file(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Without -o an SVG of the diagram's name appears where the user stands, and its name is printed."""
    (folder / "leaky.sfg").write_text(LEAKY)
    assert main(["draw", "leaky.sfg"]) == 0
    assert capsys.readouterr().out == "leaky.svg\n"
    assert "Slow mean of the water level" in (folder / "leaky.svg").read_text(encoding="utf-8")


def test_several_diagrams_make_a_file_each(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """One drawing a diagram, and -o is refused because it names one file."""
    (folder / "both.sfg").write_text(LEAKY + TWO_LINES)
    assert main(["draw", "both.sfg"]) == 0
    assert capsys.readouterr().out == "leaky.svg\ntwo_lines.svg\n"
    assert main(["draw", "both.sfg", "-o", "both.png"]) == 2
    assert capsys.readouterr().err == (
        "error: -o takes one diagram and there are 2: name one as FILE:NAME (leaky, two_lines), or leave out -o\n"
    )
    assert written(folder) == ["leaky.svg", "two_lines.svg"]


def test_ending_of_the_name_is_the_format(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """.png makes a PNG; what is not known is refused with what is."""
    (folder / "leaky.sfg").write_text(LEAKY)
    assert main(["draw", "leaky.sfg", "-o", "mean.png"]) == 0
    assert (folder / "mean.png").read_bytes().startswith(b"\x89PNG")
    capsys.readouterr()
    assert main(["draw", "leaky.sfg", "-o", "mean.pdf"]) == 2
    assert capsys.readouterr().err == (
        "error: mean.pdf: drawings are written as .svg and .png, and the name ends in .pdf\n"
    )
    assert main(["draw", "leaky.sfg", "-o", "mean"]) == 2
    assert written(folder) == ["mean.png"]


def test_reduced_shows_before_and_after(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Both diagrams under their counts, each merged cell badged twice before and once after."""
    (folder / "two.sfg").write_text(TWO_LINES)
    assert main(["draw", "two.sfg", "--reduced"]) == 0
    assert capsys.readouterr().out == "two_lines-reduced.svg\n"
    drawing = (folder / "two_lines-reduced.svg").read_text(encoding="utf-8")
    for text, times in (("Before: 4 delay cells", 1), ("After merging: 2 delay cells", 1), (">A1<", 2), (">A2 ×2<", 1)):
        assert drawing.count(text) == times
    assert drawing.count('class="delay merged-A1"') == 3


def test_json_tells_what_was_written(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """File, format, size in points, number of symbols, wires that became connectors, the description."""
    (folder / "leaky.sfg").write_text(LEAKY)
    assert main(["draw", "leaky.sfg", "--json"]) == 0
    (entry,) = json.loads(capsys.readouterr().out)["drawings"]
    assert {key: entry[key] for key in ("name", "file", "format", "symbols", "connectors")} == {
        "name": "leaky", "file": "leaky.svg", "format": "svg", "symbols": 4, "connectors": [],
    }  # fmt: skip
    assert 100 < entry["width"] < 500
    assert entry["description"].startswith("Block diagram with 1 delay cell, 2 multiplies and 1 add;")


def test_missing_claims_do_not_keep_it_from_drawing(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """The finding is told, the drawing is made."""
    (folder / "bare.sfg").write_text("\n".join(line for line in LEAKY.splitlines() if "intent" not in line))
    assert main(["draw", "bare.sfg"]) == 0
    told = capsys.readouterr()
    assert told.out == "leaky.svg\n"
    assert "no intent for mean" in told.err


def test_delay_free_loop_is_drawn_and_marked(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """The loop is told as an error, and the picture shows where it runs and what would cure it."""
    (folder / "loop.sfg").write_text(LOOP)
    assert main(["draw", "loop.sfg"]) == 0
    assert "loop without a delay" in capsys.readouterr().err
    assert "Delay-free loop: mean → mean (put a unit delay in it)" in (folder / "loop.svg").read_text(encoding="utf-8")


def test_nothing_is_written_where_the_diagram_is_wrong(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Another error than a loop ends the command with code 1 and no file."""
    (folder / "wrong.sfg").write_text(LEAKY.replace("r*mean1", "r*mean2"))
    assert main(["draw", "wrong.sfg"]) == 1
    assert "mean2" in capsys.readouterr().err
    assert written(folder) == []


def test_reduced_refuses_a_loop(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """What cannot be computed cannot be reduced."""
    (folder / "loop.sfg").write_text(LOOP)
    assert main(["draw", "loop.sfg", "--reduced"]) == 1
    assert written(folder) == []


def test_closed_folder_is_said(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """A place that cannot be written is named, with the reason."""
    (folder / "leaky.sfg").write_text(LEAKY)
    assert main(["draw", "leaky.sfg", "-o", "no/mean.svg"]) == 2
    assert capsys.readouterr().err == "error: no/mean.svg: No such file or directory\n"


def test_diagram_of_many_elements_is_refused_in_words(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Beyond the stated number of symbols nothing is drawn, and the way out is told."""
    (folder / "long.sfg").write_text(
        "diagram long {\n    coef g = 0.5\n    input x\n    adder a[0] = x + g*b[0]\n    delay b[0] = a[0]\n"
        "    repeat k = 1 .. 1000 {\n        adder a[k] = a[k-1] + g*b[k]\n        delay b[k] = a[k]\n    }\n"
        "    output y = a[1000]\n    intent y / x = 1\n}\n"
    )
    assert main(["draw", "long.sfg"]) == 2
    assert "diagram long has 2004 symbols; a drawing shows 600 at most." in capsys.readouterr().err
    assert written(folder) == []
