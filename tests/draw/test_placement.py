"""Where symbols are placed, as a dump of columns and half rows; and what is folded into one symbol."""

from __future__ import annotations

from board import board
from named import DF1, DF2, fir, moving_average

from flowgraph.diagram.diagram import Diagram
from flowgraph.draw.draw import draw_picture
from flowgraph.draw.model import fold
from flowgraph.draw.place import place
from flowgraph.draw.rails import find_rails


def test_grid_of_direct_form_two() -> None:
    """Adder, tap and adder two columns apart on the rail; delays down the tap column; a lower circle each."""
    assert place(fold(DF2)).dump().splitlines() == [
        "input x: 0,0 E",
        "adder w: 1,0 E @3",
        "adder w': 1,2 N",
        "delay w1: 3,1 S @3",
        "delay w2: 3,3 S @3",
        "adder y: 5,0 E",
        "adder y': 5,2 N",
        "output y: 6,0 W",
    ]


def test_rail_takes_fewest_delays_then_fewest_gains_then_most_adders() -> None:
    """In a lattice-ladder the forward path runs through the plain sums, not through the ladder."""
    sketch = fold(board("r", "input x; output y; adder f = x + k*d; delay d = f; adder g = d + k*f; adder y = f + v*g"))
    parts = [sketch.parts[part].name for part in find_rails(sketch)[0].parts]
    assert parts == ["x", "f", "y", "y"]


def test_gain_with_one_reader_is_part_of_its_wire() -> None:
    """It becomes the wire's coefficient; a gain with two readers stays a symbol."""
    sketch = fold(board("g", "input x; output y; gain g = c*x; gain h = d*x; delay h1 = h; adder y = g + h + h1"))
    assert [part.name for part in sketch.parts if part.kind == "gain"] == ["h"]
    assert [link.gain for link in sketch.links if link.gain] == ["g"]


def test_run_of_cells_that_nobody_taps_is_one_box() -> None:
    """Three cells or more in a row, also over several lines, are one box; two stay two."""
    sketch = fold(board("l", "input x; output y; delay a = x by 5; delay b = a; delay c = b; adder y = x + c + a[3]"))
    assert [part.length for part in sketch.parts if part.kind == "delay"] == [3, 4]
    two = fold(board("l", "input x; output y; delay a = x by 2; adder y = x + a"))
    assert [part.length for part in two.parts if part.kind == "delay"] == [1, 1]


def test_very_long_line_is_one_box_at_once() -> None:
    """A line of a million cells costs no more than one of three."""
    picture = draw_picture(board("l", "input x; output y; delay a = x by 1000000; adder y = x + g*a"))
    assert [shape.text for shape in picture.shapes if shape.kind == "delay"] == ["z⁻¹⁰⁰⁰⁰⁰⁰"]


def test_ring_of_delays_is_drawn() -> None:
    """A loop of delays without an adder has a place to begin."""
    picture = draw_picture(board("ring", "delay a = b starts 1; delay b = a; output y = a"))
    assert sum(shape.kind == "delay" for shape in picture.shapes) == 2
    assert picture.connectors == ()


def test_diagram_without_elements_is_an_empty_picture() -> None:
    """Nothing to draw is no failure."""
    assert draw_picture(Diagram("nothing", {}, {})).shapes == ()


def test_long_fir_shows_its_ends_and_says_what_it_leaves_out() -> None:
    """Of 64 taps the first four and the last three are drawn, three dots stand for the others on both lines."""
    picture = draw_picture(fir(64))
    coefficients = [label.text for label in picture.labels if label.role == "coefficient"]
    assert coefficients == ["h₀", "h₁", "h₂", "h₃", "h₆₁", "h₆₂", "h₆₃"]
    assert sum(shape.kind == "ellipsis" for shape in picture.shapes) == 2
    assert [label.text for label in picture.labels if label.role == "note"] == ["57 taps not drawn"]
    left, _, right, _ = picture.bounds()
    assert right - left < 1000


def test_mean_without_gains_is_a_ladder_too() -> None:
    """A moving average has rungs without triangles, and one gain at its output."""
    picture = draw_picture(moving_average(5))
    assert [shape.facing for shape in picture.shapes if shape.kind == "triangle"] == ["E"]


def test_grid_of_direct_form_one() -> None:
    """Both sums stand side by side on the rail, each with its circle below; the lines hang at the far sides."""
    assert place(fold(DF1)).dump().splitlines() == [
        "input x: 0,0 E @1",
        "delay x1: 1,1 S @1",
        "delay x2: 1,3 S @1",
        "delay y1: 6,1 S @6",
        "delay y2: 6,3 S @6",
        "adder v: 3,0 E",
        "adder v': 3,2 N",
        "adder y: 4,0 E @6",
        "adder y': 4,2 N",
        "output y: 7,0 W",
    ]
