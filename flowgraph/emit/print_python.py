"""A diagram as a Python class that needs nothing but Python.

The class holds the cells with their starting contents, computes one sample (`step`) or a whole
recording (`process`), and can go back to the start (`reset`). Its arithmetic is the float rule of
the language in double precision, bit for bit.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from keyword import kwlist

from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.elements import Delay
from flowgraph.diagram.expression import Expression
from flowgraph.emit.caution import CAUTION
from flowgraph.emit.round_coefficients import round_coefficients
from flowgraph.emit.safe_names import class_name, safe_names
from flowgraph.emit.statements import Places, Statement, line_lengths, shown_at, statements
from flowgraph.schedule.schedule import Schedule
from flowgraph.source.span import Span

RESERVED = (
    *kwlist,
    *("self", "step", "process", "reset", "inputs", "outputs", "rate", "samples", "part"),
    *("float", "list", "map", "range", "zip"),
)

STATEMENTS_AT_ONCE = 1000
"""A diagram with more statements is computed in several methods that share their values in the object."""


@dataclass(frozen=True, slots=True)
class _Pieces:
    """What the methods are put together from."""

    diagram: Diagram
    schedule: Schedule
    names: dict[str, str]
    lengths: dict[str, int]
    double: Callable[[Expression, Span], float]

    def places(self, held: str, passing: str) -> Places:
        return Places(self.names, self.lengths, held, passing)

    def body(self, places: Places) -> list[Statement]:
        """All statements of one sample."""
        return [
            statement
            for operation in self.schedule.operations
            for statement in statements(self.diagram, operation, places, self.double)
        ]

    def ports(self) -> list[str]:
        """The parameters that stand for the inputs."""
        return [self.names[port.name] for port in self.diagram.inputs()]

    def results(self, places: Places) -> list[str]:
        """The texts of the values of the outputs."""
        return [shown_at(name, output.signal, places) for name, output in self.diagram.outputs.items()]


def print_python(diagram: Diagram, schedule: Schedule) -> str:
    """The text of a Python module with one class that computes `diagram` in the order of `schedule`.

    Raises Refused where a coefficient has no value.
    """
    wanted = [
        *diagram.elements,
        *(operation.name for operation in schedule.operations if operation.kind == "keep"),
        *(f"{delay.name} at" for delay in diagram.delays() if delay.length > 1),
        *(f"{name} out" for name in diagram.outputs),
        *(f"{name} samples" for name in diagram.outputs),
    ]
    double = round_coefficients(diagram)
    pieces = _Pieces(diagram, schedule, safe_names(wanted, RESERVED), line_lengths(diagram), double)
    own = pieces.places("self.", "")
    body = pieces.body(own)
    large = len(body) > STATEMENTS_AT_ONCE
    if large:
        own = pieces.places("self.", "self.")
        body = pieces.body(own)
    lines = _head(diagram)
    lines += _reset(pieces, own)
    lines += _step_in_parts(pieces, own, body) if large else _step(pieces, own, body)
    lines += _process_by_steps(pieces) if large else _process(pieces)
    return "\n".join(lines) + "\n"


def python_class_name(diagram: Diagram) -> str:
    """The name of the class that `print_python` prints."""
    return class_name(diagram.name, RESERVED)


def _head(diagram: Diagram) -> list[str]:
    """The comment at the top, and the class up to its constructor."""
    about = [diagram.name + (f": {diagram.title}" if diagram.title else "")]
    about += [f"Version {diagram.version}"] if diagram.version else []
    about += ["", "Double precision; every product and every sum is rounded once, in the order of the diagram.", ""]
    about += CAUTION
    inputs = [port.name for port in diagram.inputs()]
    outputs = list(diagram.outputs)
    return [
        *(f"# {_printable(line)}".rstrip() for line in about),
        "",
        "",
        f"class {python_class_name(diagram)}:",
        f"    inputs = {tuple(inputs)!r}",
        f"    outputs = {tuple(outputs)!r}",
        *([f"    rate = {float(diagram.rate)!r}  # samples a second"] if diagram.rate is not None else []),
        "",
        "    def __init__(self):",
        "        self.reset()",
        "",
    ]


def _printable(text: str) -> str:
    """Text that stays inside one comment line."""
    return "".join(letter if letter.isprintable() else " " for letter in text)


def _reset(pieces: _Pieces, own: Places) -> list[str]:
    """The method that puts the starting contents into the cells."""
    contents: list[Statement] = []
    for delay in pieces.diagram.delays():
        starts = [repr(pieces.double(start, delay.span)) for start in delay.starts]
        if delay.length == 1:
            contents.append([f"{own.cell(delay.name)} = {starts[0] if starts else '0.0'}"])
        else:
            contents.append([f"{own.cell(delay.name)} = {_list_text(delay, starts)}"])
            contents.append([f"{own.newest(delay.name)} = 0"])
    head = ["    def reset(self):", '        """Puts the starting contents into the cells."""']
    if any(length > 1 for length in pieces.lengths.values()):
        head.append("        # In a line of L cells, tap k stands at [newest - (L + 1 - k)]; `_at` is the newest.")
    if len(contents) <= STATEMENTS_AT_ONCE:
        return [*head, *_indented(contents, 8), ""]
    return _in_parts("_reset", head, contents, [])


def _list_text(delay: Delay, starts: list[str]) -> str:
    """The list of a long line's cells, the newest first."""
    if len(set(starts)) <= 1:
        return f"[{starts[0] if starts else '0.0'}] * {delay.length}"
    return f"[{', '.join(starts)}]"


def _step(pieces: _Pieces, own: Places, body: list[Statement]) -> list[str]:
    """The method that computes one sample, in one piece."""
    ports = pieces.ports()
    return [
        *_step_head(pieces),
        *(f"        {port} = float({port})" for port in ports),
        *_indented(body, 8),
        f"        return {', '.join(pieces.results(own))}",
        "",
    ]


def _step_in_parts(pieces: _Pieces, own: Places, body: list[Statement]) -> list[str]:
    """The method that computes one sample in several others; all values are kept in the object."""
    taken = [[f"self.{port} = float({port})"] for port in pieces.ports()]
    head = [*_step_head(pieces), *_indented(taken, 8)]
    return _in_parts("_part", head, body, [f"        return {', '.join(pieces.results(own))}"])


def _step_head(pieces: _Pieces) -> list[str]:
    outputs = ", ".join(pieces.diagram.outputs)
    return [
        f"    def step({', '.join(['self', *pieces.ports()])}):",
        f'        """Computes one sample: {outputs}."""',
    ]


def _in_parts(name: str, head: list[str], body: list[Statement], tail: list[str]) -> list[str]:
    """A method that calls others, and those, each with a bearable number of statements."""
    chunks = [body[start : start + STATEMENTS_AT_ONCE] for start in range(0, len(body), STATEMENTS_AT_ONCE)]
    calls = [f"        self.{name}_{number}()" for number in range(1, len(chunks) + 1)]
    lines = [*head, *calls, *tail, ""]
    for number, chunk in enumerate(chunks, 1):
        lines += [f"    def {name}_{number}(self):", *_indented(chunk, 8), ""]
    return lines


def _process_head(pieces: _Pieces) -> list[str]:
    """How `process` begins: every input as floats, so that a bad value is met before any cell moves."""
    ports = pieces.ports()
    outputs = ", ".join(pieces.diagram.outputs)
    lines = [
        f"    def process({', '.join(['self', *(ports or ['samples'])])}):",
        f'        """Computes a recording, one list a port; goes on where the last call ended: {outputs}."""',
    ]
    if len(ports) == 1:
        lines.append(f"        samples = list(map(float, {ports[0]}))")
    elif ports:
        columns = ", ".join(f"map(float, {port})" for port in ports)
        lines.append(f"        samples = list(zip({columns}, strict=True))")
    return lines


def _loop_head(pieces: _Pieces) -> str:
    ports = pieces.ports()
    return f"        for {', '.join(ports)} in samples:" if ports else "        for _ in range(samples):"


def _process(pieces: _Pieces) -> list[str]:
    """The method that computes a recording with all cells in local variables."""
    local = pieces.places("", "")
    delays = pieces.diagram.delays()
    taken = [name for delay in delays for name in _stored(local, delay)]
    moved = [_stored(local, delay)[-1] for delay in delays]
    lists = [pieces.names[f"{name} samples"] for name in pieces.diagram.outputs]
    gathered = zip(lists, pieces.results(local), strict=True)
    return [
        *_process_head(pieces),
        *(f"        {name} = self.{name}" for name in taken),
        *(f"        {name} = []" for name in lists),
        _loop_head(pieces),
        *_indented(pieces.body(local), 12),
        *(f"            {name}.append({value})" for name, value in gathered),
        *(f"        self.{name} = {name}" for name in moved),
        f"        return {', '.join(lists)}",
    ]


def _stored(places: Places, delay: Delay) -> list[str]:
    """The places of a delay: its cell, or its list of cells and the position in it, which moves."""
    if delay.length == 1:
        return [places.cell(delay.name)]
    return [places.cell(delay.name), places.newest(delay.name)]


def _process_by_steps(pieces: _Pieces) -> list[str]:
    """The method that computes a recording by calling `step`."""
    ports = pieces.ports()
    lists = [pieces.names[f"{name} samples"] for name in pieces.diagram.outputs]
    values = [pieces.names[f"{name} out"] for name in pieces.diagram.outputs]
    return [
        *_process_head(pieces),
        *(f"        {name} = []" for name in lists),
        _loop_head(pieces),
        f"            {', '.join(values)} = self.step({', '.join(ports)})",
        *(f"            {name}.append({value})" for name, value in zip(lists, values, strict=True)),
        f"        return {', '.join(lists)}",
    ]


def _indented(body: list[Statement], by: int) -> list[str]:
    indent = " " * by
    return [indent + line for statement in body for line in statement]
