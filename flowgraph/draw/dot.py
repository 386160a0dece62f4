"""The pen: a picture as a graph description with every position given, drawn by `graphviz-pure`.

Nothing is laid out there. Wires are cut at the symbols and given by all their points; labels are
nodes of their own, so that text starts where it should whatever its width.
"""

from __future__ import annotations

import shutil
import subprocess
import sys
from itertools import pairwise
from pathlib import Path

from flowgraph.draw.labels import text_width
from flowgraph.draw.picture import ARROW_LENGTH, DOT_RADIUS, Label, Picture, Point, Shape, WireLine

PEN = "graphviz-pure"
VERMILION = "#D55E00"
THIN, THICK, LOOP = 1.0, 2.4, 2.4
DELAY_SIZE, SMALLEST_DELAY_SIZE = 14.0, 9.0
FONTS = {"port": "Times-Italic", "heading": "Helvetica-Bold", "badge": "Helvetica-Bold", "note": "Helvetica"}
ROTATION = {"E": 270, "S": 180, "W": 90, "N": 0}


class PenMissing(Exception):
    """The drawing program is not installed."""


def as_dot(picture: Picture) -> str:
    """The description of the whole picture; the same picture gives the same bytes."""
    left, top, right, bottom = picture.bounds()
    writer = _Writer(bottom)
    writer.corner(left, top)
    writer.corner(right, bottom)
    for at, wire in enumerate(picture.wires):
        writer.wire(at, wire)
    for shape in picture.shapes:
        writer.shape(shape)
    for at, dot in enumerate(picture.dots):
        colour = VERMILION if dot.loop else "black"
        writer.node(f"dot{at}", dot.x, dot.y, shape="circle", width=2 * DOT_RADIUS, height=2 * DOT_RADIUS,
                    style="filled", fillcolor=colour, color=colour, **{"class": "branch"})  # fmt: skip
    for at, label in enumerate(picture.labels):
        writer.label(at, label)
    return writer.text()


def ink(picture: Picture, form: str) -> bytes:
    """The picture as `svg` or `png` bytes. Raises PenMissing when the pen is not there."""
    pen = find_pen()
    done = subprocess.run(
        [pen, "-Kneato", "-n2", f"-T{form}", *(["-Gdpi=144"] if form == "png" else [])],
        input=as_dot(picture).encode(),
        capture_output=True,
        check=False,
    )
    if done.returncode:
        raise PenMissing(f"{PEN} failed: {done.stderr.decode(errors='replace').strip()}")
    return done.stdout


def find_pen() -> str:
    """The program beside this Python, else on the PATH. Raises PenMissing."""
    beside = Path(sys.executable).with_name(PEN)
    for candidate in (beside, beside.with_suffix(".exe")):
        if candidate.exists():
            return str(candidate)
    found = shutil.which(PEN)
    if found is None:
        raise PenMissing(f"the program {PEN} was not found: install it with `pip install {PEN}`")
    return found


def delay_size(text: str) -> float:
    """The type size at which the text of a delay fits its box."""
    room = 32.0 / text_width(text, 1.0)
    return max(SMALLEST_DELAY_SIZE, min(DELAY_SIZE, round(room, 1)))


def quoted(text: str) -> str:
    """A string of the description; user text loses its special meaning there."""
    plain = "".join(character if character.isprintable() else " " for character in text)
    return '"' + plain.replace("\\", "\\\\").replace('"', '\\"').replace("&", "&amp;") + '"'


class _Writer:
    def __init__(self, bottom: float) -> None:
        self.bottom = bottom
        self.lines = [
            "digraph picture {",
            "graph [notranslate=true, outputorder=nodesfirst, pad=0, bgcolor=white];",
            'node [label="", fixedsize=true, fontname=Helvetica, penwidth=1, margin=0];',
            "edge [penwidth=1, arrowsize=0.8];",
        ]
        self.edges: list[str] = []

    def text(self) -> str:
        return "\n".join([*self.lines, *self.edges, "}", ""])

    def _at(self, x: float, y: float) -> str:
        return f"{x:.2f},{self.bottom - y:.2f}"

    def node(
        self, key: str, x: float, y: float, *, width: float, height: float, **attributes: str | int | float
    ) -> None:
        written = ", ".join(
            f"{name}={value if isinstance(value, (int, float)) else quoted(value)}"
            for name, value in attributes.items()
        )
        self.lines.append(
            f'"{key}" [pos="{self._at(x, y)}", width={width / 72:.5f}, height={height / 72:.5f}, {written}];'
        )

    def corner(self, x: float, y: float) -> None:
        """An invisible point that holds the picture's edge open."""
        self.node(f"corner{len(self.lines)}", x, y, width=0.01, height=0.01, shape="point", style="invis")

    def shape(self, shape: Shape) -> None:
        colour = VERMILION if shape.loop else "black"
        width = LOOP if shape.loop else THICK if shape.thick else THIN
        key = f"shape{len(self.lines)}"
        look: dict[str, str | float] = {"color": colour, "penwidth": width, "tooltip": shape.title}
        classes = f"{'gain' if shape.kind == 'triangle' else shape.kind}"
        classes += " loop" if shape.loop else ""
        classes += f" merged-{shape.badge.split()[0]}" if shape.badge else ""
        if shape.kind == "adder":
            self.node(key, shape.x, shape.y, width=20, height=20, shape="circle", **look, **{"class": classes})
            self._plus(shape, colour, width)
        elif shape.kind == "delay":
            inner = 8.0 if shape.frames == 2 else 0.0
            filled: dict[str, str | float] = {"style": "filled", "fillcolor": shape.fill} if shape.fill else {}
            self.node(key, shape.x, shape.y, width=shape.width - inner, height=shape.height - inner, shape="box",
                      label=shape.text, fontsize=delay_size(shape.text), peripheries=shape.frames, **look, **filled,
                      **{"class": classes})  # fmt: skip
        elif shape.kind == "triangle":
            self._triangle(key, shape, look, classes)
        else:
            self.node(key, shape.x, shape.y, width=shape.width, height=shape.height, shape="plaintext",
                      label=shape.text, fontsize=16, **{"class": classes})  # fmt: skip

    def _plus(self, shape: Shape, colour: str, width: float) -> None:
        """Two short lines: the glyph of a plus sits off the centre of its circle in many fonts."""
        for right, down in ((4.5, 0.0), (0.0, 4.5)):
            self._edge(
                (shape.x - right, shape.y - down), (shape.x + right, shape.y + down), colour, max(1.2, width * 0.6)
            )

    def _edge(self, start: Point, end: Point, colour: str, width: float) -> None:
        self.line((start, end), False, colour, width, "plus")

    def _triangle(self, key: str, shape: Shape, look: dict[str, str | float], classes: str) -> None:
        """An equilateral frame squeezed to size; the pen's triangle sits off its centre along the flow."""
        upright = shape.facing in "NS"
        along, across = (shape.height, shape.width) if upright else (shape.width, shape.height)
        right, down = {"E": (1, 0), "S": (0, 1), "W": (-1, 0), "N": (0, -1)}[shape.facing]
        size = 4 * along / 3
        shift = size / 8
        self.node(key, shape.x - right * shift, shape.y - down * shift, shape="triangle",
                  orientation=ROTATION[shape.facing],
                  width=across if upright else size, height=size if upright else across,
                  **look, **{"class": classes})  # fmt: skip

    def wire(self, at: int, wire: WireLine) -> None:
        colour, width = (VERMILION, LOOP) if wire.loop else ("black", THIN)
        self.line(wire.points, wire.arrow, colour, width, "wire loop" if wire.loop else "wire")

    def line(self, points: tuple[Point, ...], arrow: bool, colour: str, width: float, classes: str) -> None:
        """An edge by its corners, each repeated, so that the curve the pen draws is straight between them."""
        stop = points
        head = ""
        if arrow:
            (x, y), (tip_x, tip_y) = points[-2], points[-1]
            right, down = (tip_x > x) - (tip_x < x), (tip_y > y) - (tip_y < y)
            stop = (*points[:-1], (tip_x - right * ARROW_LENGTH, tip_y - down * ARROW_LENGTH))
            head = f"e,{self._at(tip_x, tip_y)} "
        run = [stop[0]]
        for before, after in pairwise(stop):
            run += [before, after, after]
        number = len(self.edges)
        for end, (x, y) in (("a", points[0]), ("b", points[-1])):
            self.node(f"{end}{number}", x, y, width=0.01, height=0.01, shape="point", style="invis")
        positions = head + " ".join(self._at(x, y) for x, y in run)
        self.edges.append(
            f'"a{number}" -> "b{number}" [pos="{positions}", arrowhead={"normal" if arrow else "none"}, '
            f'color="{colour}", penwidth={width}, class="{classes}"];'
        )

    def label(self, at: int, label: Label) -> None:
        left, top, right, bottom = label.box()
        key = f"label{at}"
        escaped = quoted(label.text)[1:-1] + {"left": "\\l", "centre": "", "right": "\\r"}[label.anchor]
        colour = VERMILION if label.role == "caption" else "black"
        self.lines.append(
            f'"{key}" [pos="{self._at((left + right) / 2, label.y)}", width={(right - left) / 72:.5f}, '
            f'height={(bottom - top) / 72:.5f}, shape=plaintext, label="{escaped}", fontsize={label.size:g}, '
            f'fontname="{FONTS.get(label.role, "Helvetica")}", fontcolor="{colour}", class="label {label.role}"];'
        )
