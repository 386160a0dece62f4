"""The named diagrams meet the whole quality bar, measured on the geometry of their pictures."""

from __future__ import annotations

from itertools import pairwise

import pytest
from named import (
    ALL_POLE_LATTICE,
    BAR,
    CIC,
    DF1,
    DF1_ONE_ADDER,
    DF2,
    FIR_LATTICE,
    LEAKY,
    LEGIBLE,
    OSCILLATOR,
    RECURSIVE_MEAN,
    TDF2,
    TWO_BY_TWO,
    TWO_LINES,
    cascade,
    cascade_df1,
    fir,
    moving_average,
    transposed_fir,
)
from quality import BAR as RULES
from quality import CORRECT, bends, crossings, faults

from flowgraph.diagram.diagram import Diagram
from flowgraph.draw.draw import draw_picture
from flowgraph.draw.picture import Picture, Shape


def name(diagram: Diagram) -> str:
    return diagram.name


def shapes(picture: Picture, kind: str) -> list[Shape]:
    return [shape for shape in picture.shapes if shape.kind == kind]


@pytest.mark.parametrize("diagram", BAR, ids=name)
def test_named_diagram_meets_the_whole_bar(diagram: Diagram) -> None:
    """Every rule of the bar holds for every named diagram."""
    assert faults(draw_picture(diagram), diagram, RULES) == []


@pytest.mark.parametrize("diagram", LEGIBLE, ids=name)
def test_difficult_diagram_is_drawn_correctly(diagram: Diagram) -> None:
    """What has no textbook picture is still read back as what it is."""
    assert faults(draw_picture(diagram), diagram, CORRECT) == []


@pytest.mark.parametrize(
    ("diagram", "most"),
    [
        (LEAKY, 2), (DF1, 4), (DF1_ONE_ADDER, 2), (DF2, 2), (TWO_LINES, 4), (TDF2, 2), (fir(8), 2),
        (transposed_fir(8), 2), (moving_average(8), 2), (RECURSIVE_MEAN, 4), (cascade(2), 4), (OSCILLATOR, 4),
    ],
    ids=lambda value: value.name if isinstance(value, Diagram) else str(value),
)  # fmt: skip
def test_no_bend_that_a_straight_line_could_avoid(diagram: Diagram, most: int) -> None:
    """The textbook structures have the corners they must have and no more."""
    assert bends(draw_picture(diagram)) <= most


@pytest.mark.parametrize(
    ("diagram", "number"),
    [
        (DF1, 0), (DF2, 0), (TWO_LINES, 0), (TDF2, 0), (fir(8), 0), (transposed_fir(8), 0), (moving_average(8), 0),
        (RECURSIVE_MEAN, 0), (cascade(2), 0), (cascade_df1(2), 0), (CIC, 0), (ALL_POLE_LATTICE, 3), (FIR_LATTICE, 3),
        (TWO_BY_TWO, 2),
    ],
    ids=lambda value: value.name if isinstance(value, Diagram) else str(value),
)  # fmt: skip
def test_wires_cross_only_where_they_must(diagram: Diagram, number: int) -> None:
    """No crossing in the direct forms, one for each stage of a lattice, two in the coupled section."""
    assert len(crossings(draw_picture(diagram))) == number


def test_direct_form_two_has_one_column_of_delays_with_a_dot_at_each_tap() -> None:
    """Both delays stand in a column, one under the other, a dot above, between and below them."""
    picture = draw_picture(DF2)
    first, second = shapes(picture, "delay")
    assert first.x == second.x
    assert first.facing == second.facing == "S"
    dots = sorted(dot.y for dot in picture.dots if dot.x == first.x)
    assert len(dots) == 3
    assert dots[0] < first.y < dots[1] < second.y < dots[2]


def test_two_lines_stand_as_two_equal_columns() -> None:
    """Before merging, the lines of direct form II are two columns at the same heights."""
    columns: dict[float, list[float]] = {}
    for delay in shapes(draw_picture(TWO_LINES), "delay"):
        columns.setdefault(delay.x, []).append(delay.y)
    assert len(columns) == 2
    assert len({tuple(heights) for heights in columns.values()}) == 1


def test_transposed_form_has_delays_pointing_up_between_its_adders() -> None:
    """Adder, delay, adder, delay, adder in one column, samples rising."""
    picture = draw_picture(TDF2)
    column = sorted(shapes(picture, "delay") + shapes(picture, "adder"), key=lambda shape: shape.y)
    assert [shape.kind for shape in column] == ["adder", "delay", "adder", "delay", "adder"]
    assert len({shape.x for shape in column}) == 1
    assert {shape.facing for shape in column if shape.kind == "delay"} == {"N"}


@pytest.mark.parametrize("diagram", [fir(8), moving_average(8)], ids=name)
def test_fir_has_a_level_line_with_each_adder_under_its_tap(diagram: Diagram) -> None:
    """The delays lie on one line, every adder stands below a branch of it, gains stand in one row."""
    picture = draw_picture(diagram)
    delays, adders = shapes(picture, "delay"), shapes(picture, "adder")
    assert len({delay.y for delay in delays}) == 1
    assert len({adder.y for adder in adders}) == 1
    line = delays[0].y
    branches = {dot.x for dot in picture.dots if dot.y == line} | {
        x for wire in picture.wires for x, y in wire.points if y == line
    }
    assert {adder.x for adder in adders} <= branches
    assert len({gain.y for gain in shapes(picture, "triangle") if gain.facing == "S"}) <= 1


def test_gains_of_a_section_stand_in_columns() -> None:
    """The forward gains of direct form II stand exactly above one another, and so do the feedback gains."""
    gains = shapes(draw_picture(DF2), "triangle")
    assert len({gain.x for gain in gains if gain.facing == "E"}) == 1
    assert len({gain.x for gain in gains if gain.facing == "W"}) == 1


def test_long_cascade_keeps_the_shape_of_its_sections() -> None:
    """Twenty sections are twenty times the same picture, side by side, without a crossing."""
    picture = draw_picture(cascade(20))
    delays = shapes(picture, "delay")
    xs = sorted({delay.x for delay in delays})
    assert len(xs) == 20
    assert len({after - before for before, after in pairwise(xs)}) == 1
    assert crossings(picture) == []
    assert picture.connectors == ()
