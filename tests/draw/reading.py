"""Reads a picture back from its geometry alone, as an eye does, and computes with what it reads.

Which wires are connected follows from where they touch and from dots; what a wire enters from where
its end lies; signs and coefficients from the labels that stand beside them.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from fractions import Fraction

from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.elements import Adder, Delay, Gain, Input, Signal
from flowgraph.draw.labels import coefficient_label, name_label
from flowgraph.draw.picture import Label, Picture, Point, Shape, WireLine

NEAR = 0.6
SIGN_REACH = 20.0


@dataclass(frozen=True)
class End:
    """What a wire end lies at: a shape, an input or output port, or nothing but wire."""

    shape: int | None = None
    port: str = ""


@dataclass
class Read:
    """`starts[group]` is where a group of wires starts; `enters` are all arrivals: (group, end, is subtracted, factor).

    The factor is the label of a coefficient that stands at an arrow or a connector without a triangle, or nothing.
    """

    picture: Picture
    groups: list[list[int]] = field(default_factory=list)
    starts: list[list[End]] = field(default_factory=list)
    enters: list[tuple[int, End, bool, str]] = field(default_factory=list)
    complaints: list[str] = field(default_factory=list)


def on_segment(point: Point, start: Point, end: Point, near: float = NEAR) -> bool:
    """Whether a point lies on a level or upright segment."""
    return (
        min(start[0], end[0]) - near <= point[0] <= max(start[0], end[0]) + near
        and min(start[1], end[1]) - near <= point[1] <= max(start[1], end[1]) + near
    )


def segments(wire: WireLine) -> list[tuple[Point, Point]]:
    """The straight stretches of a wire, in the direction of flow."""
    return list(zip(wire.points, wire.points[1:], strict=False))


def on_border(shape: Shape, point: Point) -> str:
    """`in` or `out` if the point lies where a wire may enter or leave the shape, else nothing."""
    right, down = {"E": (1, 0), "S": (0, 1), "W": (-1, 0), "N": (0, -1)}[shape.facing]
    half_x, half_y = shape.width / 2, shape.height / 2
    at = (point[0] - shape.x, point[1] - shape.y)
    if shape.kind == "adder":
        radius = (at[0] ** 2 + at[1] ** 2) ** 0.5
        return "rim" if abs(radius - half_x) < NEAR and min(abs(at[0]), abs(at[1])) < NEAR else ""
    if abs(at[0] - right * half_x) < NEAR and abs(at[1] - down * half_y) < NEAR:
        return "out"
    if abs(at[0] + right * half_x) < NEAR and abs(at[1] + down * half_y) < NEAR:
        return "in"
    return ""


def port_ends(picture: Picture) -> dict[tuple[str, bool], Label]:
    """The port labels by their text and whether wires leave them (an input) or end there (an output)."""
    found: dict[tuple[str, bool], Label] = {}
    arrows = [wire.points[-1] for wire in picture.wires if wire.arrow]
    for label in picture.labels:
        if label.role == "port":
            edge = label.x
            is_output = any(abs(x - edge) < 16 and abs(y - label.y) < NEAR for x, y in arrows)
            found[label.of, not is_output] = label
    return found


def end_at(picture: Picture, point: Point, leaving: bool) -> End:
    """What a wire's first (leaving) or last point lies at."""
    for number, shape in enumerate(picture.shapes):
        where = on_border(shape, point)
        if where == "rim" or where == ("out" if leaving else "in"):
            return End(shape=number)
    for (name, is_input), label in port_ends(picture).items():
        if is_input == leaving and abs(point[1] - label.y) < NEAR and abs(point[0] - label.x) < 16:
            return End(port=name)
    return End()


def read(picture: Picture) -> Read:
    """Groups of touching wires, where each starts and what it enters."""
    result = Read(picture)
    wires = picture.wires
    leader = list(range(len(wires)))

    def find(wire: int) -> int:
        while leader[wire] != wire:
            wire = leader[wire]
        return wire

    for one, first in enumerate(wires):
        start = end_at(picture, first.points[0], True)
        if start == End():
            for other, second in enumerate(wires):
                if other != one and any(on_segment(first.points[0], *segment) for segment in segments(second)):
                    leader[find(one)] = find(other)
    numbers = {}
    for wire in range(len(wires)):
        numbers.setdefault(find(wire), len(numbers))
    result.groups = [[] for _ in numbers]
    result.starts = [[] for _ in numbers]
    for number, wire in enumerate(wires):
        group = numbers[find(number)]
        result.groups[group].append(number)
        start = end_at(picture, wire.points[0], True)
        if start != End() and start not in result.starts[group]:
            result.starts[group].append(start)
        end = end_at(picture, wire.points[-1], False)
        if wire.arrow or end != End():
            if end == End():
                result.complaints.append(f"an arrow of {wire.source} ends at nothing at {wire.points[-1]}")
            factor = bare_factor(picture, wire)
            if wire.net.startswith("connector"):
                name, factor = connector(picture, wire)
                result.starts[group].append(named_end(picture, name))
            result.enters.append((group, end, is_subtracted(picture, wire), factor))
    for group, starts in enumerate(result.starts):
        if len(starts) != 1:
            names = {wires[number].source for number in result.groups[group]}
            result.complaints.append(f"wires from {sorted(names)} start at {len(starts)} places")
    return result


def is_subtracted(picture: Picture, wire: WireLine) -> bool:
    """Whether the nearest arrowhead of some minus sign is this one."""
    return wire.arrow and any(nearest_arrow(picture, sign) is wire for sign in picture.labels if sign.role == "sign")


def bare_factor(picture: Picture, wire: WireLine) -> str:
    """The coefficient written at an arrow that has no triangle: a label that begins with a times sign."""
    for label in picture.labels:
        if label.role == "coefficient" and label.text.startswith("×") and nearest_arrow(picture, label, 60) is wire:
            return label.text[1:]
    return ""


def connector(picture: Picture, wire: WireLine) -> tuple[str, str]:
    """The signal named at a connector's stub, and the factor in front of the name."""
    x, y = wire.points[0]
    labels = [label for label in picture.labels if label.role == "connector"]
    text = min(labels, key=lambda label: abs(label.y - y) + abs(label.x - x)).text
    factor, _, name = text.rpartition("·")
    return name, factor


def named_end(picture: Picture, name: str) -> End:
    """The symbol or input whose name a connector carries; of an adder the top circle."""
    shapes = [(shape.y, at) for at, shape in enumerate(picture.shapes) if name_label(shape.name) == name]
    ports = [label.of for label in picture.labels if label.role == "port" and name_label(label.of) == name]
    return End(shape=min(shapes)[1]) if shapes else End(port=ports[0])


def nearest_arrow(picture: Picture, sign: Label, reach: float = SIGN_REACH) -> WireLine | None:
    """The arrowhead a minus sign belongs to: the nearest one within reach."""

    def distance(wire: WireLine) -> float:
        (x, y), (tip_x, tip_y) = wire.points[-2], wire.points[-1]
        right, down = (tip_x > x) - (tip_x < x), (tip_y > y) - (tip_y < y)
        return ((tip_x - right * 4 - sign.x) ** 2 + (tip_y - down * 4 - sign.y) ** 2) ** 0.5

    arrows = [wire for wire in picture.wires if wire.arrow]
    best = min(arrows, key=distance, default=None)
    return best if best is not None and distance(best) < reach else None


def coefficient_of(picture: Picture, shape: Shape) -> str:
    """The coefficient label that stands beside a triangle."""

    def distance(label: Label) -> float:
        left, top, right, bottom = label.box()
        across = max(left - shape.x, shape.x - right, 0.0)
        return across + max(top - shape.y, shape.y - bottom, 0.0)

    labels = [label for label in picture.labels if label.role == "coefficient"]
    return min(labels, key=distance).text


def response(picture: Picture, values: Mapping[str, Fraction], samples: int) -> dict[tuple[str, str], list[Fraction]]:
    """The impulse response from every input port to every output port, as read from the picture."""
    seen = read(picture)
    arrivals: dict[End, list[tuple[End, Fraction]]] = {}
    for group, end, subtracted, factor in seen.enters:
        scale = values[factor] if factor else Fraction(1)
        arrivals.setdefault(end, []).append((seen.starts[group][0], -scale if subtracted else scale))
    shapes = picture.shapes
    inputs = sorted({end.port for starts in seen.starts for end in starts if end.port})
    outputs = sorted({end.port for _, end, _, _ in seen.enters if end.port})
    answers: dict[tuple[str, str], list[Fraction]] = {}
    for source in inputs:
        cells = {at: [Fraction(0)] * delay_length(shape) for at, shape in enumerate(shapes) if shape.kind == "delay"}
        for n in range(samples):
            known: dict[End, Fraction] = {End(port=name): Fraction(int(name == source and n == 0)) for name in inputs}
            known |= {End(shape=at): line[-1] for at, line in cells.items()}

            def value(end: End, known: dict[End, Fraction] = known) -> Fraction:
                if end not in known:
                    total = Fraction(0)
                    for start, scale in arrivals.get(end, []):
                        total += scale * value(start)
                    if end.shape is not None and shapes[end.shape].kind == "triangle":
                        total *= values[coefficient_of(picture, shapes[end.shape])]
                    known[end] = total
                return known[end]

            for name in outputs:
                total = sum((scale * value(start) for start, scale in arrivals[End(port=name)]), Fraction(0))
                answers.setdefault((source, name), []).append(total)
            for at, line in cells.items():
                line.insert(0, value_of_all(arrivals.get(End(shape=at), []), value))
            for line in cells.values():
                line.pop()
    return answers


def value_of_all(arriving: list[tuple[End, Fraction]], value: Callable[[End], Fraction]) -> Fraction:
    """The sum of everything that arrives."""
    return sum((scale * value(start) for start, scale in arriving), Fraction(0))


def delay_length(shape: Shape) -> int:
    """The length in a delay box, from its raised exponent."""
    return int(shape.text[1:].translate(str.maketrans("⁻⁰¹²³⁴⁵⁶⁷⁸⁹", "-0123456789"))) * -1


def intended(diagram: Diagram, values: Mapping[str, Fraction], samples: int) -> dict[tuple[str, str], list[Fraction]]:
    """The same responses computed from the diagram; coefficients take the value of their label."""
    answers: dict[tuple[str, str], list[Fraction]] = {}
    for source in diagram.inputs():
        cells = {delay.name: [Fraction(0)] * delay.length for delay in diagram.delays()}
        for n in range(samples):
            known = {Signal(port.name): Fraction(int(port is source and n == 0)) for port in diagram.inputs()}
            known |= {Signal(name, tap + 1): cell for name, line in cells.items() for tap, cell in enumerate(line)}
            for name, output in diagram.outputs.items():
                answers.setdefault((source.name, name), []).append(sample(diagram, values, known, output.signal))
            incoming = {delay.name: sample(diagram, values, known, delay.signal) for delay in diagram.delays()}
            for name, line in cells.items():
                line.insert(0, incoming[name])
                line.pop()
    return answers


def sample(diagram: Diagram, values: Mapping[str, Fraction], known: dict[Signal, Fraction], signal: Signal) -> Fraction:
    """The value of a signal in this sample, from those of inputs and cells; what is found is remembered."""
    if signal not in known:
        total = Fraction(0)
        match diagram.elements[signal.name]:
            case Gain(_, coefficient, source):
                total = values[coefficient_label(coefficient)] * sample(diagram, values, known, source)
            case Adder(_, terms):
                for term in terms:
                    scale = values[coefficient_label(term.coefficient)] if term.coefficient else Fraction(1)
                    total += (-scale if term.negative else scale) * sample(diagram, values, known, term.signal)
        known[signal] = total
    return known[signal]


def label_values(diagram: Diagram) -> dict[str, Fraction]:
    """A different small number for every coefficient label, in the order of the file."""
    labels: list[str] = []
    for element in diagram.elements.values():
        match element:
            case Gain(_, coefficient):
                labels.append(coefficient_label(coefficient))
            case Adder(_, terms):
                labels += [coefficient_label(term.coefficient) for term in terms if term.coefficient]
            case Delay() | Input():
                pass
    return {label: Fraction(2 * at + 3, 7) for at, label in enumerate(dict.fromkeys(labels))}
