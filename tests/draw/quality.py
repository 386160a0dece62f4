"""The quality bar, measured on the geometry of a picture. Each rule returns what breaks it, in words."""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable
from itertools import combinations

from reading import coefficient_of, end_at, intended, label_values, nearest_arrow, on_segment, read, response, segments

from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.elements import Adder
from flowgraph.draw.picture import ARROW_LENGTH, Box, Picture, Point

SAMPLES = 12
CLEAR = 0.4


def overlap(one: Box, other: Box, clearance: float = 0.0) -> bool:
    """Whether two boxes overlap, or come closer than the clearance."""
    return (
        one[0] - clearance < other[2]
        and other[0] < one[2] + clearance
        and one[1] - clearance < other[3]
        and other[1] < one[3] + clearance
    )


def line_box(start: Point, end: Point) -> Box:
    return min(start[0], end[0]), min(start[1], end[1]), max(start[0], end[0]), max(start[1], end[1])


def arms(picture: Picture) -> dict[tuple[str, Point], set[tuple[int, int]]]:
    """For every end and bend of a wire, in which directions wires of the same net go on from there."""
    found: dict[tuple[str, Point], set[tuple[int, int]]] = {}
    points = {(wire.net, point) for wire in picture.wires for point in wire.points}
    for net, point in sorted(points):
        for wire in picture.wires:
            if wire.net != net:
                continue
            for start, end in segments(wire):
                if on_segment(point, start, end, 0.1):
                    right, down = (end[0] > start[0]) - (end[0] < start[0]), (end[1] > start[1]) - (end[1] < start[1])
                    if abs(point[0] - end[0]) + abs(point[1] - end[1]) > 0.1:
                        found.setdefault((net, point), set()).add((right, down))
                    if abs(point[0] - start[0]) + abs(point[1] - start[1]) > 0.1:
                        found.setdefault((net, point), set()).add((-right, -down))
    return found


def crossings(picture: Picture) -> list[Point]:
    """Where wires of two nets cross."""
    found: list[Point] = []
    for one, other in combinations(picture.wires, 2):
        if one.net != other.net:
            for first in segments(one):
                for second in segments(other):
                    for level, upright in ((first, second), (second, first)):
                        if level[0][1] == level[1][1] and upright[0][0] == upright[1][0]:
                            point = (upright[0][0], level[0][1])
                            if on_segment(point, *level, 0.0) and on_segment(point, *upright, 0.0):
                                found.append(point)
    return sorted(set(found))


def bends(picture: Picture) -> int:
    """How many corners the eye sees: bends that are no branches, each counted once."""
    places = arms(picture)
    return sum(1 for sides in places.values() if len(sides) == 2 and sum(x for x, _ in sides) ** 2 == 1)


def means_the_same(picture: Picture, diagram: Diagram) -> list[str]:
    """Every wire drawn, every reader reached, every sign and coefficient where it belongs."""
    seen = read(picture)
    if seen.complaints:
        return seen.complaints
    values = label_values(diagram)
    drawn, meant = response(picture, values, SAMPLES), intended(diagram, values, SAMPLES)
    zero = [0] * SAMPLES
    return [
        f"{source} to {output} reads otherwise"
        for source, output in sorted({*drawn, *meant})
        if drawn.get((source, output), zero) != meant.get((source, output), zero)
    ]


def ports_at_margins(picture: Picture, diagram: Diagram) -> list[str]:
    """Inputs at the left margin, outputs at the right (one that ends a leftward line, at the left)."""
    inputs = {element.name for element in diagram.inputs()}
    left = {label.x for label in picture.labels if label.role == "port" and label.anchor == "right"}
    right = {label.x for label in picture.labels if label.role == "port" and label.anchor == "left"}
    wrong = [
        f"port {label.of} is at the wrong side"
        for label in picture.labels
        if label.role == "port" and label.anchor == "left" and label.of in inputs - set(diagram.outputs)
    ]
    middle = [shape.x for shape in picture.shapes]
    if len(left) > 2 or len(right) > 1:
        wrong.append("the ports of a side do not stand in line")
    if any(x > max(left, default=x) + 1e9 for x in middle) or any(min(right, default=x) < x for x in middle):
        wrong.append("a symbol stands beyond the ports")
    return wrong


def straight_forward_path(picture: Picture, diagram: Diagram) -> list[str]:
    """From the first input a level line leads left to right to an output (in a ladder, through all its delays)."""
    if not diagram.inputs():
        return []
    first = diagram.inputs()[0].name
    start = next(label for label in picture.labels if label.role == "port" and label.of == first)
    outputs = [label.y for label in picture.labels if label.role == "port" and label.of in diagram.outputs]
    line = [wire for wire in picture.wires for a, b in segments(wire) if a[1] == b[1] == start.y]
    if any(a[0] > b[0] for wire in line for a, b in segments(wire) if a[1] == b[1] == start.y):
        return ["the forward path runs back"]
    ladder = len({shape.y for shape in picture.shapes if shape.kind == "adder"}) == 1 and start.y not in {
        shape.y for shape in picture.shapes if shape.kind == "adder"
    }
    if start.y not in outputs and not ladder:
        return ["no output is on the line of the first input"]
    return []


def feedback_below(picture: Picture, diagram: Diagram) -> list[str]:
    """What runs right to left runs below the forward path; above only where the port below is taken."""
    if not diagram.inputs():
        return []
    first = diagram.inputs()[0].name
    line = next(label.y for label in picture.labels if label.role == "port" and label.of == first)
    below = {wire.target for wire in picture.wires if wire.arrow and wire.points[-2][1] > wire.points[-1][1] > line - 1}
    return [
        f"the way from {wire.source} to {wire.target} runs back above the forward path"
        for wire in picture.wires
        for start, end in segments(wire)
        if end[0] < start[0] and start[1] == end[1] < line and wire.target not in below
    ]


def level_and_upright(picture: Picture, diagram: Diagram) -> list[str]:
    """Only level and upright segments, none of no length."""
    return [
        f"a wire of {wire.source} has a segment {start} {end}"
        for wire in picture.wires
        for start, end in segments(wire)
        if (start[0] != end[0]) == (start[1] != end[1])
    ]


def no_wire_through_symbols(picture: Picture, diagram: Diagram) -> list[str]:
    """No wire inside a symbol, and none along its border."""
    found = []
    for wire in picture.wires:
        for start, end in segments(wire):
            for shape in picture.shapes:
                left, top, right, bottom = shape.box()
                inner = (left + CLEAR, top + CLEAR, right - CLEAR, bottom - CLEAR)
                if overlap(line_box(start, end), inner):
                    found.append(f"the wire from {wire.source} to {wire.target} runs through {shape.name}")
    return found


def nets_keep_apart(picture: Picture, diagram: Diagram) -> list[str]:
    """No two nets on one segment; crossings are plain: not at a bend, a dot, an end or an arrowhead."""
    found = []
    for one, other in combinations(picture.wires, 2):
        if one.net == other.net:
            continue
        for first in segments(one):
            for second in segments(other):
                a, b = line_box(*first), line_box(*second)
                parallel = (first[0][1] == first[1][1]) == (second[0][1] == second[1][1])
                if parallel and overlap(a, b, 0.5):
                    found.append(f"wires of {one.source} and {other.source} run together")
    heads = [line_box(arrow_base(wire.points), wire.points[-1]) for wire in picture.wires if wire.arrow]
    knots = {point for wire in picture.wires for point in wire.points} | {(dot.x, dot.y) for dot in picture.dots}
    for x, y in crossings(picture):
        if any(abs(x - at_x) < 0.5 and abs(y - at_y) < 0.5 for at_x, at_y in knots):
            found.append(f"a crossing at a bend, dot or end: {x}, {y}")
        if any(overlap((x, y, x, y), head, 2.8) for head in heads):
            found.append(f"a crossing at an arrowhead: {x}, {y}")
    return found


def arrow_base(points: tuple[Point, ...]) -> Point:
    (x, y), (tip_x, tip_y) = points[-2], points[-1]
    right, down = (tip_x > x) - (tip_x < x), (tip_y > y) - (tip_y < y)
    return tip_x - right * ARROW_LENGTH, tip_y - down * ARROW_LENGTH


def dots_at_branches(picture: Picture, diagram: Diagram) -> list[str]:
    """A dot at every branch and nowhere else, clear of symbols and arrowheads."""
    branches = {(net, point) for (net, point), sides in arms(picture).items() if len(sides) > 2}
    dots = {(dot.net, (dot.x, dot.y)) for dot in picture.dots}
    found = [f"no dot at the branch {point}" for net, point in sorted(branches - dots)]
    found += [f"a dot where nothing branches {point}" for net, point in sorted(dots - branches)]
    for dot in picture.dots:
        box = (dot.x - 3, dot.y - 3, dot.x + 3, dot.y + 3)
        found += [f"a dot touches {shape.name}" for shape in picture.shapes if overlap(box, shape.box())]
        for wire in picture.wires:
            if wire.arrow and overlap(box, line_box(arrow_base(wire.points), wire.points[-1])):
                found.append(f"a dot touches an arrowhead at {wire.target}")
    return found


def arrows_only_at_entries(picture: Picture, diagram: Diagram) -> list[str]:
    """An arrowhead wherever a wire enters a circle, a box or a port; none at a triangle; room for each."""
    found = []
    for wire in picture.wires:
        end = end_at(picture, wire.points[-1], False)
        at_triangle = end.shape is not None and picture.shapes[end.shape].kind == "triangle"
        if wire.arrow and at_triangle:
            found.append(f"an arrowhead at the triangle {picture.shapes[end.shape or 0].name}")
        if not wire.arrow and (end.port or end.shape is not None) and not at_triangle:
            found.append(f"no arrowhead where {wire.source} enters {wire.target}")
        (x, y), (tip_x, tip_y) = wire.points[-2], wire.points[-1]
        if wire.arrow and abs(tip_x - x) + abs(tip_y - y) < ARROW_LENGTH + 1:
            found.append(f"no room for the arrowhead from {wire.source} to {wire.target}")
    return found


def gains_in_line(picture: Picture, diagram: Diagram) -> list[str]:
    """Triangles between the same two columns stand exactly above one another."""
    lying = [shape for shape in picture.shapes if shape.kind == "triangle" and shape.facing in "EW"]
    return [
        f"the triangles {one.name} and {other.name} are nearly in line, and not"
        for one, other in combinations(lying, 2)
        if one.facing == other.facing and 0 < abs(one.x - other.x) < 6
    ]


def signs_and_circles(picture: Picture, diagram: Diagram) -> list[str]:
    """A minus for every subtracted term, at an arrowhead of its own; every circle has two inputs or more."""
    meant = sum(
        term.negative for element in diagram.elements.values() if isinstance(element, Adder) for term in element.terms
    )
    signs = [label for label in picture.labels if label.role == "sign"]
    found = [] if len(signs) == meant else [f"{len(signs)} minus signs for {meant} subtracted terms"]
    arrows = [id(nearest_arrow(picture, sign)) for sign in signs]
    if len(set(arrows)) < len(arrows):
        found.append("two minus signs at one arrowhead")
    entered = Counter(end.shape for _, end, _, _ in read(picture).enters if end.shape is not None)
    for number, shape in enumerate(picture.shapes):
        if shape.kind == "adder" and entered[number] < 2:
            found.append(f"a circle of {shape.name} has {entered[number]} inputs")
    return found


def labels_are_clear(picture: Picture, diagram: Diagram) -> list[str]:
    """No label over a label, a wire, a dot or a symbol, in the widest font."""
    found = []
    for one, other in combinations(picture.labels, 2):
        if overlap(one.box(), other.box()):
            found.append(f"the labels {one.text} and {other.text} overlap")
    for label in picture.labels:
        found += [f"{label.text} touches {shape.name}" for shape in picture.shapes if overlap(label.box(), shape.box())]
        for wire in picture.wires:
            if any(overlap(label.box(), line_box(*segment)) for segment in segments(wire)):
                found.append(f"{label.text} lies on the wire from {wire.source} to {wire.target}")
        for dot in picture.dots:
            if overlap(label.box(), (dot.x - 3, dot.y - 3, dot.x + 3, dot.y + 3)):
                found.append(f"{label.text} lies on a dot")
    return found


def symbols_keep_apart(picture: Picture, diagram: Diagram) -> list[str]:
    """Symbols do not overlap or touch."""
    return [
        f"{one.name} and {other.name} touch"
        for one, other in combinations(picture.shapes, 2)
        if overlap(one.box(), other.box(), 2.0)
    ]


def legible(picture: Picture, diagram: Diagram) -> list[str]:
    """No text under nine points, nothing at the picture's edge."""
    left, top, right, bottom = picture.bounds()
    found = [f"{label.text} is set in {label.size} points" for label in picture.labels if label.size < 9]
    for label in picture.labels:
        box = label.box()
        if box[0] < left + 8 or box[1] < top + 8 or box[2] > right - 8 or box[3] > bottom - 8:
            found.append(f"{label.text} is cut")
    return found


def every_coefficient_once(picture: Picture, diagram: Diagram) -> list[str]:
    """As many coefficient labels as triangles, each nearest to its own."""
    triangles = [shape for shape in picture.shapes if shape.kind == "triangle"]
    labels = [label for label in picture.labels if label.role == "coefficient"]
    found = [] if len(labels) == len(triangles) else [f"{len(labels)} coefficients for {len(triangles)} triangles"]
    own = Counter(label.text for label in labels)
    if own != Counter(coefficient_of(picture, triangle) for triangle in triangles):
        found.append("a coefficient stands nearer to another triangle")
    return found


def no_connectors(picture: Picture, diagram: Diagram) -> list[str]:
    """Every wire found its way, none is broken into named ends."""
    return [f"{name} is a connector" for name in picture.connectors]


Rule = Callable[[Picture, Diagram], list[str]]

CORRECT: tuple[Rule, ...] = (
    means_the_same,
    level_and_upright,
    no_wire_through_symbols,
    nets_keep_apart,
    dots_at_branches,
)
BAR: tuple[Rule, ...] = (
    *CORRECT,
    no_connectors,
    ports_at_margins,
    straight_forward_path,
    feedback_below,
    arrows_only_at_entries,
    gains_in_line,
    signs_and_circles,
    labels_are_clear,
    symbols_keep_apart,
    legible,
    every_coefficient_once,
)


def faults(picture: Picture, diagram: Diagram, rules: tuple[Rule, ...] = BAR) -> list[str]:
    """Everything in which a picture falls short of the rules."""
    return [f"{rule.__name__}: {fault}" for rule in rules for fault in rule(picture, diagram)]
