"""What comes from the pen: accessible SVG, PNG, and the same bytes for the same diagram."""

from __future__ import annotations

import os
import subprocess
import sys
import xml.etree.ElementTree as ElementTree
from dataclasses import replace
from pathlib import Path

import pytest
from board import board
from named import ALL_POLE_LATTICE, DELAY_FREE_LOOP, DF2, LEAKY

from flowgraph.draw import dot
from flowgraph.draw.dot import PenMissing, as_dot, ink
from flowgraph.draw.page import draw_page
from flowgraph.draw.svg import as_svg

SVG = "{http://www.w3.org/2000/svg}"
HERE = Path(__file__).parent


def parsed(document: bytes) -> ElementTree.Element:
    return ElementTree.fromstring(document)


def classes(root: ElementTree.Element) -> list[str]:
    return [part.get("class", "") for part in root.iter(f"{SVG}g")]


def test_svg_parses_and_has_no_doctype() -> None:
    """The document can stand inside a page of HTML."""
    document = as_svg(draw_page(DF2))
    assert b"<!DOCTYPE" not in document
    assert b"<!--" not in document
    assert b"xlink" not in document
    assert parsed(document).tag == f"{SVG}svg"


def test_root_is_an_image_with_a_name_and_a_description() -> None:
    """role img, labelled by a title (the name) and a desc (counts and a sentence for each element)."""
    root = parsed(as_svg(draw_page(LEAKY)))
    title, description = root.find(f"{SVG}title"), root.find(f"{SVG}desc")
    assert title is not None
    assert description is not None
    assert root.get("role") == "img"
    assert root.get("aria-labelledby") == f"{title.get('id')} {description.get('id')}"
    assert title.text == "Leaky integrator"
    assert description.text == (
        "Block diagram with 1 delay cell, 1 multiply and 1 add; inputs: x; outputs: y. "
        "y = x plus a times y1; y1 = y delayed by 1."
    )


def test_parts_are_titled_in_words_and_classed() -> None:
    """Symbols say what they are; wires, dots and labels have a class and no title."""
    root = parsed(as_svg(draw_page(LEAKY)))
    titles = {part.get("class"): part.findtext(f"{SVG}title") for part in root.iter(f"{SVG}g")}
    assert titles["adder"] == "adder y"
    assert titles["delay"] == "delay y1, 1 sample"
    assert titles["gain"] == "gain y1 to y = a"
    assert titles["wire"] is None
    assert titles["branch"] is None
    assert titles["label coefficient"] is None


def test_every_symbol_wire_and_dot_of_the_picture_is_inked() -> None:
    """The pen leaves nothing out."""
    picture = draw_page(DF2)
    found = classes(parsed(as_svg(picture)))
    assert found.count("adder") == sum(shape.kind == "adder" for shape in picture.shapes)
    assert found.count("gain") == sum(shape.kind == "triangle" for shape in picture.shapes)
    assert found.count("wire") == len(picture.wires)
    assert found.count("branch") == len(picture.dots)


def test_wires_are_inked_where_the_picture_has_them() -> None:
    """Each path begins and ends at the points of its wire (an arrowhead is drawn by itself)."""
    picture = draw_page(ALL_POLE_LATTICE)
    root = parsed(as_svg(picture))
    drawn = []
    for part in root.iter(f"{SVG}g"):
        path = part.find(f"{SVG}path")
        if part.get("class") == "wire" and path is not None:
            numbers = path.get("d", "").replace("M", "").replace("C", " ").replace(",", " ").split()
            drawn.append((float(numbers[0]), float(numbers[1])))
    _, _, _, bottom = picture.bounds()
    meant = [(wire.points[0][0], round(wire.points[0][1] - bottom, 2)) for wire in picture.wires]
    assert sorted((round(x, 1), round(y, 1)) for x, y in drawn) == sorted((round(x, 1), round(y, 1)) for x, y in meant)


def test_png_is_a_png() -> None:
    """The signature and the size of the first chunk are those of the format (ISO/IEC 15948)."""
    drawing = ink(draw_page(LEAKY), "png")
    assert drawing.startswith(b"\x89PNG\r\n\x1a\n\x00\x00\x00\rIHDR")


def test_titles_of_the_user_are_safe() -> None:
    """Quotes, brackets, ampersands, backslashes and control characters stay text."""
    title = 'a <b> & "c" \\n \\ x\x07{|} é'
    root = parsed(as_svg(draw_page(replace(LEAKY, title=title))))
    headings = [part.findtext(f"{SVG}text") for part in root.iter(f"{SVG}g") if part.get("class") == "label heading"]
    assert headings == [title.replace("\x07", " ")]


def test_same_bytes_in_every_run() -> None:
    """Neither SVG nor PNG depends on how Python happens to order its sets."""
    program = (
        "import sys, hashlib; sys.path[:0] = sys.argv[1:]\n"
        "from named import BAR; from random_boards import random_board\n"
        "from flowgraph.draw.page import draw_page; from flowgraph.draw.dot import as_dot, ink\n"
        "from flowgraph.draw.svg import as_svg\n"
        "drawn = [draw_page(diagram) for diagram in (BAR[3], BAR[12], BAR[15], random_board(6, 3))]\n"
        "print([hashlib.sha256(as_dot(picture).encode()).hexdigest() for picture in drawn])\n"
        "print(hashlib.sha256(as_svg(drawn[1])).hexdigest(), hashlib.sha256(ink(drawn[1], 'png')).hexdigest())\n"
    )
    printed = {
        subprocess.run(
            [sys.executable, "-c", program, str(HERE), str(HERE.parent.parent)],
            env={**os.environ, "PYTHONHASHSEED": seed},
            capture_output=True,
            text=True,
            check=True,
        ).stdout
        for seed in ("0", "1", "4711")
    }
    assert len(printed) == 1


def test_png_needs_no_font_of_the_machine() -> None:
    """The pen brings its fonts: with a home, and font folders, that do not exist the PNG is the same."""
    picture = draw_page(DF2)
    plain = ink(picture, "png")
    bare = subprocess.run(
        [dot.find_pen(), "-Kneato", "-n2", "-Tpng", "-Gdpi=144"],
        input=as_dot(picture).encode(),
        capture_output=True,
        check=True,
        env={"FONTCONFIG_PATH": "/nowhere", "HOME": "/nowhere"},
    ).stdout
    assert plain == bare


def test_missing_pen_is_said_in_words(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> None:
    """Without the drawing program the error says what to install."""
    monkeypatch.setattr(sys, "executable", str(tmp_path / "python"))
    monkeypatch.setenv("PATH", str(tmp_path))
    with pytest.raises(PenMissing, match="pip install graphviz-pure"):
        ink(draw_page(LEAKY), "svg")


def test_delay_free_loop_is_marked() -> None:
    """Its circles, triangles and wires are vermilion and thick, its path and the cure stand below."""
    picture = draw_page(DELAY_FREE_LOOP)
    marked = {(shape.kind, shape.name) for shape in picture.shapes if shape.loop}
    assert marked == {("adder", "s"), ("adder", "u"), ("triangle", "s to u"), ("triangle", "u to s")}
    captions = [label.text for label in picture.labels if label.role == "caption"]
    assert captions == ["Delay-free loop: s → u → s (put a unit delay in it)"]
    loop = [part for part in classes(parsed(as_svg(picture))) if "loop" in part.split()]
    assert len(loop) == 4 + sum(wire.loop for wire in picture.wires)
    assert '"#D55E00", penwidth=2.4' in as_dot(picture)


def test_marked_loop_is_closed() -> None:
    """The vermilion wires lead from the adder all the way round, also where a stretch is shared with other wires."""
    picture = draw_page(board("loop", "input x; output y; adder y = x - 0.5*y"))
    loop = [wire for wire in picture.wires if wire.loop]
    assert {wire.target for wire in loop} == {"y"}
    circle = next(shape for shape in picture.shapes if shape.kind == "adder")
    assert any(wire.points[0] == (circle.x + 10, circle.y) for wire in loop)
    assert [wire.points[-1] for wire in loop if wire.arrow] == [(circle.x, circle.y + 10)]
