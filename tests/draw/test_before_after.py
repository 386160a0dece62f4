"""Before and after merging on one page: marks that colour, frame and badge all carry."""

from __future__ import annotations

import pytest
from board import board
from named import TWO_LINES, cascade_df1
from quality import (
    Rule,
    arrows_only_at_entries,
    dots_at_branches,
    every_coefficient_once,
    gains_in_line,
    labels_are_clear,
    legible,
    level_and_upright,
    nets_keep_apart,
    no_wire_through_symbols,
    symbols_keep_apart,
)

from flowgraph.draw.labels import text_width
from flowgraph.draw.page import draw_before_after, merge_marks
from flowgraph.draw.picture import Picture, Shape

MERGED = board(
    "two_lines",
    "input x; output y; adder w = x - a1*p1 - a2*p2; delay p1 = w; delay p2 = p1",
    "adder y = b0*w + b1*p1 + b2*p2",
)
PAGE_RULES: tuple[Rule, ...] = (
    arrows_only_at_entries,
    dots_at_branches,
    every_coefficient_once,
    gains_in_line,
    labels_are_clear,
    legible,
    level_and_upright,
    nets_keep_apart,
    no_wire_through_symbols,
    symbols_keep_apart,
)
BECAME = {("q1", 1): ("p1", 1), ("q2", 1): ("p2", 1)}


def badges(picture: Picture) -> list[str]:
    return sorted(shape.badge for shape in picture.shapes if shape.badge)


def marked(picture: Picture) -> list[Shape]:
    return [shape for shape in picture.shapes if shape.badge]


def test_headings_carry_the_counts() -> None:
    """Before above after, each with its number of cells, and the legend below."""
    picture = draw_before_after(TWO_LINES, MERGED, BECAME)
    texts = [
        label.text for label in sorted(picture.labels, key=lambda label: label.y) if label.role in ("heading", "note")
    ]
    assert texts == [
        "Before: 4 delay cells",
        "After merging: 2 delay cells",
        "Same letter and fill = cells that become one.",
        "Double frame = the one cell kept, ×2 = it stands for two.",
    ]


def test_same_badge_twice_before_and_once_after() -> None:
    """Each merged cell carries a letter for its line and its number along it."""
    picture = draw_before_after(TWO_LINES, MERGED, BECAME)
    assert badges(picture) == ["A1", "A1", "A1 ×2", "A2", "A2", "A2 ×2"]
    assert badges(picture) == sorted(label.text for label in picture.labels if label.role == "badge")


def test_marks_survive_grey_print() -> None:
    """Badge, thick line and, on the kept cell, a double frame say the same as the fill."""
    for shape in marked(draw_before_after(TWO_LINES, MERGED, BECAME)):
        assert shape.thick
        assert shape.fill == "#F0E442"
        assert shape.frames == (2 if "×" in shape.badge else 1)


def test_cells_not_concerned_stay_white() -> None:
    """In a cascade only the two neighbouring lines that became one are marked."""
    before = cascade_df1(2)
    after = board(
        "after",
        "input x; output y; delay x1[1] = x; delay x2[1] = x1[1]; delay y1[1] = v[1]; delay y2[1] = y1[1]",
        "adder v[1] = b01*x + b11*x1[1] + b21*x2[1] - a11*y1[1] - a21*y2[1]; delay y1[2] = y; delay y2[2] = y1[2]",
        "adder y = b02*v[1] + b12*y1[1] + b22*y2[1] - a12*y1[2] - a22*y2[2]",
    )
    merged = {("x1[2]", 1): ("y1[1]", 1), ("x2[2]", 1): ("y2[1]", 1)}
    picture = draw_before_after(before, after, merged)
    delays = [shape for shape in picture.shapes if shape.kind == "delay"]
    assert len(delays) == 8 + 6
    assert {shape.name for shape in delays if shape.badge} == {"x1[2]", "x2[2]", "y1[1]", "y2[1]"}
    assert {shape.fill for shape in delays if not shape.badge} == {""}


def test_collapsed_run_of_merged_cells_reads_as_a_run() -> None:
    """A long line that merged is one box with the first and the last badge."""
    before = board("lines", "input x; output y; delay u = x by 20; delay v = x by 12; adder y = x + u + v")
    after = board("lines", "input x; output y; delay u = x by 20; adder y = x + u + u[12]")
    picture = draw_before_after(before, after, {("v", tap): ("u", tap) for tap in range(1, 13)})
    assert badges(picture) == ["A1–A12", "A1–A12", "A1–A12 ×2"]
    assert sorted(shape.text for shape in picture.shapes if shape.kind == "delay") == ["z⁻¹²"] * 3 + ["z⁻⁸"] * 2


def test_each_line_has_its_own_letter_and_fill() -> None:
    """Two lines that merged by themselves are A and B, in different fills."""
    before = board(
        "b",
        "input u; input v; output y; delay p = u; delay q = u; delay r = v; delay s = v; adder y = p + a*q + r + b*s",
    )
    after = board("b", "input u; input v; output y; delay p = u; delay r = v; adder y = c*p + d*r")
    old, new = merge_marks(before, after, {("q", 1): ("p", 1), ("s", 1): ("r", 1)})
    assert {cell: (mark.letter, mark.number) for cell, mark in old.items()} == {
        ("p", 1): (0, 1), ("q", 1): (0, 1), ("r", 1): (1, 1), ("s", 1): (1, 1),
    }  # fmt: skip
    assert [mark.kept for mark in new.values()] == [2, 2]
    picture = draw_before_after(before, after, {("q", 1): ("p", 1), ("s", 1): ("r", 1)})
    assert len({shape.fill for shape in marked(picture)}) == 2


def test_nothing_merged_needs_no_legend() -> None:
    """Without a merge the page shows both diagrams and no marks."""
    picture = draw_before_after(MERGED, MERGED, {})
    assert badges(picture) == []
    assert not any("Double frame" in label.text for label in picture.labels)


def test_both_pictures_start_at_the_same_left_edge() -> None:
    """Left-aligned and at one scale, so that the eye compares."""
    picture = draw_before_after(TWO_LINES, MERGED, BECAME)
    starts = {label.x - text_width(label.text, label.size) for label in picture.labels if label.text == "x[n]"}
    assert len(starts) == 1


@pytest.mark.parametrize("rule", PAGE_RULES, ids=lambda rule: rule.__name__)
def test_marks_do_not_disturb_the_drawing(rule: Rule) -> None:
    """Badges, frames and headings touch nothing, and both pictures keep every rule of drawing."""
    picture = draw_before_after(TWO_LINES, MERGED, BECAME)
    assert rule(picture, TWO_LINES) == []
