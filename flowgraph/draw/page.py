"""Pages: one diagram under its heading, or a diagram before and after merging with the merged cells marked."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

from flowgraph.diagram.diagram import Diagram, count
from flowgraph.draw.draw import draw_picture
from flowgraph.draw.model import Cell, Mark
from flowgraph.draw.picture import Label, Picture

HEADING_SIZE, NOTE_SIZE = 13.0, 11.0
HEADING_SPACE, BETWEEN = 34.0, 44.0
LEGEND = ("Same letter and fill = cells that become one.", "Double frame = the one cell kept, ×2 = it stands for two.")


def draw_page(diagram: Diagram) -> Picture:
    """The picture of a diagram under its title. Raises TooLarge."""
    picture = draw_picture(diagram)
    return _under_heading(picture, diagram.title or diagram.name)


def draw_before_after(before: Diagram, after: Diagram, merged: Mapping[Cell, Cell]) -> Picture:
    """Both diagrams on one page, the cells that became one marked in both. Raises TooLarge.

    A cell is (delay name, tap); `merged` maps cells of `before` to the cell of `after` that does
    their work, and a cell it does not name keeps its name. What merged carries one letter and one
    fill along its line; the kept cell has a double frame and says how many it stands for.
    """
    old_marks, new_marks = merge_marks(before, after, merged)
    first = _under_heading(draw_picture(before, old_marks), _heading("Before", before))
    second = _under_heading(draw_picture(after, new_marks), _heading("After merging", after))
    left, _, _, bottom = first.bounds()
    second_left, second_top, _, _ = second.bounds()
    second = second.shifted(left - second_left, bottom - second_top + BETWEEN - 2 * second.margin)
    legend: tuple[Label, ...] = ()
    if new_marks:
        _, _, _, end = second.bounds()
        legend = tuple(
            Label(text, left + first.margin, end + 4 + 16 * number, NOTE_SIZE, "note", "left")
            for number, text in enumerate(LEGEND)
        )
    return Picture(
        f"{before.title or before.name}: before and after merging",
        f"Before: {first.description} After merging: {second.description}",
        first.shapes + second.shapes,
        tuple(replace(wire, net=f"before {wire.net}") for wire in first.wires)
        + tuple(replace(wire, net=f"after {wire.net}") for wire in second.wires),
        tuple(replace(dot, net=f"before {dot.net}") for dot in first.dots)
        + tuple(replace(dot, net=f"after {dot.net}") for dot in second.dots),
        first.labels + second.labels + legend,
        first.connectors + second.connectors,
    )


def merge_marks(
    before: Diagram, after: Diagram, merged: Mapping[Cell, Cell]
) -> tuple[dict[Cell, Mark], dict[Cell, Mark]]:
    """Marks for both diagrams: a letter for every line of kept cells, numbers along it, counts on the kept cells."""
    lines_after = _cells_along_lines(after)
    standing = {cell for cell, _ in lines_after}
    stands_for: dict[Cell, list[Cell]] = {}
    for cell, _ in _cells_along_lines(before):
        image = merged.get(cell, cell)
        if image in standing:
            stands_for.setdefault((image[0], image[1]), []).append(cell)
    old: dict[Cell, Mark] = {}
    new: dict[Cell, Mark] = {}
    letter, number, previous = -1, 0, None
    for cell, behind in lines_after:
        if len(stands_for.get(cell, ())) < 2:
            continue
        if previous is None or behind != previous:
            letter, number = letter + 1, 0
        number += 1
        previous = cell
        new[cell] = Mark(letter, number, len(stands_for[cell]))
        for one in stands_for[cell]:
            old[one] = Mark(letter, number)
    return old, new


def _cells_along_lines(diagram: Diagram) -> list[tuple[Cell, Cell | None]]:
    """Every cell with the cell it reads directly, lines in the order of the file, each from its first cell on."""
    following: dict[Cell, list[Cell]] = {}
    firsts: list[Cell] = []
    lengths = {delay.name: delay.length for delay in diagram.delays()}
    for delay in diagram.delays():
        if delay.signal.name in lengths:
            following.setdefault((delay.signal.name, delay.signal.tap), []).append((delay.name, 1))
        else:
            firsts.append((delay.name, 1))
    ordered: list[tuple[Cell, Cell | None]] = []
    seen: set[Cell] = set()
    for first in [*firsts, *((delay.name, 1) for delay in diagram.delays())]:
        waiting: list[tuple[Cell, Cell | None]] = [(first, None)]
        while waiting:
            cell, behind = waiting.pop()
            if cell in seen:
                continue
            seen.add(cell)
            ordered.append((cell, behind))
            name, tap = cell
            waiting += [(other, cell) for other in reversed(following.get(cell, []))]
            if tap < lengths[name]:
                waiting.append(((name, tap + 1), cell))
    return ordered


def _heading(when: str, diagram: Diagram) -> str:
    cells = count(diagram).cells
    return f"{when}: {cells} delay cell{'' if cells == 1 else 's'}"


def _under_heading(picture: Picture, heading: str) -> Picture:
    left, top, _, _ = picture.bounds()
    at = top + picture.margin - HEADING_SPACE
    return picture.with_labels(Label(heading, left + picture.margin, at, HEADING_SIZE, "heading", "left"))
