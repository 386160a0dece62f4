"""Lanes: the rows in which links from rail to rail run, and the rows of single inputs; bands stacked with them."""

from __future__ import annotations

from flowgraph.draw.rows import Rows


def stack_bands(rows: Rows) -> None:
    """Lanes for links that lead from rail to rail, then band below band, each as high as it needs."""
    _assign_lanes(rows)
    rows.rung = [_has_rungs(rows, band) for band in range(len(rows.rails) or 1)]
    _stack(rows)


def _span(rows: Rows, part: int) -> tuple[float, float]:
    """The stretch of the rail above an off-rail part, in rail numbers; taps stand half a number on."""
    begin, end = rows.begin[part], rows.end[part]
    first = begin + 0.5 if begin is not None else (end if end is not None else 0.0)
    last = float(end) if end is not None else first
    return min(first, last), max(first, last)


def _assign_lanes(rows: Rows) -> None:
    """Links from rail to rail, and single inputs, get the first free row below, or above if that port is taken."""
    sketch = rows.sketch
    taken: dict[tuple[int, int], list[tuple[float, float]]] = {}
    for part, shape in enumerate(sketch.parts):
        if not rows.on_rail(part) and shape.kind not in ("output", "input"):
            taken.setdefault((rows.band[part], rows.row[part]), []).append(_span(rows, part))
    above: set[int] = set()
    for part, shape in enumerate(sketch.parts):
        if shape.kind == "input" and not rows.on_rail(part):
            end = rows.end[part]
            span = (-1.0, 0.0 if end is None else float(end))
            rows.row[part] = _free_row(taken, rows.band[part], span, 1)
    for number, link in enumerate(sketch.links):
        if not rows.off_rail_link(number):
            continue
        source, target = rows.place[link.source], rows.place[link.target]
        if source is None or target is None or source[0] != target[0]:
            continue
        ends = (source[1] + 0.5, float(target[1]))
        others = [other for other in sketch.into[link.target] if other != number and rows.off_rail_link(other)]
        below = [other for other in others if other in rows.lanes or not _is_lane(rows, other)]
        step = -1 if below and link.target not in above and sketch.parts[link.target].kind == "adder" else 1
        if step < 0:
            above.add(link.target)
        rows.lanes[number] = _free_row(taken, source[0], (min(ends), max(ends)), step)


def _is_lane(rows: Rows, link: int) -> bool:
    source, target = rows.place[rows.sketch.links[link].source], rows.place[rows.sketch.links[link].target]
    return source is not None and target is not None and source[0] == target[0]


def _free_row(
    taken: dict[tuple[int, int], list[tuple[float, float]]], band: int, span: tuple[float, float], step: int
) -> int:
    row = step
    while any(max(low, span[0]) < min(high, span[1]) for low, high in taken.get((band, row), [])):
        row += step
    taken.setdefault((band, row), []).append(span)
    return row


def _has_rungs(rows: Rows, band: int) -> bool:
    """Whether a row of lying delays hangs below the rail, so that gains stand upright between the two."""
    return any(
        shape.kind == "delay"
        and rows.band[part] == band
        and not rows.on_rail(part)
        and rows.row[part] == 1
        and rows.facing[part] in ("E", "W")
        for part, shape in enumerate(rows.sketch.parts)
    )


def _stack(rows: Rows) -> None:
    """Band below band, each as high as its rows and lanes need."""
    bands = len(rows.rung)
    lowest, highest = [0] * bands, [0] * bands
    for part in range(len(rows.sketch.parts)):
        if rows.sketch.parts[part].kind != "output" or rows.on_rail(part):
            lowest[rows.band[part]] = max(lowest[rows.band[part]], rows.row[part])
    for link, row in rows.lanes.items():
        band = rows.band[rows.sketch.links[link].source]
        lowest[band] = max(lowest[band], row)
        highest[band] = min(highest[band], row)
    line = 0
    for band in range(bands):
        line -= 2 * highest[band]
        rows.base.append(line)
        line += 2 * lowest[band] + 2 + rows.rung[band]
