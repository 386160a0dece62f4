"""Diagram -> text in its canonical form: one element a line, exact numbers, inner names with `_`."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator, Mapping
from itertools import chain

from flowgraph.diagram.claim import DiagramIntent
from flowgraph.diagram.diagram import Coefficient, Diagram
from flowgraph.diagram.elements import Adder, Delay, Element, Gain, Input, Signal, expressions_of, signals_read
from flowgraph.diagram.expression import Expression, Negative, Number, names_in
from flowgraph.diagram.index import index
from flowgraph.diagram.structure import unread_ends
from flowgraph.text.print_claims import by_itself, print_claim
from flowgraph.text.print_expression import print_expression, print_factor, print_frequency, print_number
from flowgraph.text.print_names import labels, printed_names

__all__ = ["print_diagram", "print_expression", "print_file"]

WIDTH = 100


def print_file(diagram: Diagram) -> str:
    """The text of a diagram and, before it, of every diagram its claims refer to."""
    printed: dict[str, str] = {}
    waiting = [diagram]
    while waiting:
        current = waiting.pop()
        if current.name not in printed:
            printed[current.name] = print_diagram(current)
            waiting.extend(by_itself(claim) for claim in current.claims if isinstance(claim, DiagramIntent))
    return "\n".join(reversed(printed.values()))


def print_diagram(diagram: Diagram) -> str:
    """The text of one diagram; it reads back as an equal diagram up to inner names."""
    lines = [*_page(diagram), *_coefficients(diagram), *_ports(diagram), *_elements(diagram), *_unread(diagram)]
    names = printed_names(diagram)
    lines += [f"row {', '.join(names.get(name, name) for name in row)}" for row in diagram.rows]
    lines += [print_claim(claim, names) for claim in diagram.claims]
    return f"diagram {diagram.name} {{\n" + "".join(f"    {line}\n" for line in lines) + "}\n"


def _page(diagram: Diagram) -> Iterator[str]:
    """Title, version, notes, rate, and the labels that names carry."""
    if diagram.title:
        yield f'title "{diagram.title}"'
    if diagram.version:
        yield f'version "{diagram.version}"'
    yield from (f'note "{note}"' for note in diagram.notes)
    if diagram.rate is not None:
        yield f"rate {print_frequency(diagram.rate)}"
    if labels(diagram):
        yield f"repeat {_free_variable(diagram)} in {', '.join(labels(diagram))} {{ }}"


def _free_variable(diagram: Diagram) -> str:
    """A name for the variable of the repeat that only names labels."""
    variable = "label"
    while variable in printed_names(diagram).values() or variable in diagram.outputs:
        variable += "_"
    return variable


def _coefficients(diagram: Diagram) -> Iterator[str]:
    names = printed_names(diagram)
    read = _coefficients_read(diagram)
    kept = [found for name, found in diagram.coefficients.items() if name in read]
    opened: list[str] = []
    at = 0
    while at < len(kept):
        array = _array(kept, at)
        found = kept[at]
        if opened and (found.value is not None or len(array) > 1):
            yield f"coef {', '.join(opened)}"
            opened = []
        if len(array) > 1:
            yield _list(array, names)
            at += len(array)
            continue
        if found.value is None:
            opened.append(names[found.name])
        else:
            word = "const" if found.given and _is_fixed(found.value) else "coef"
            yield f"{word} {names[found.name]} = {print_expression(found.value, names)}"
        at += 1
    if opened:
        yield f"coef {', '.join(opened)}"


def _is_fixed(value: Expression) -> bool:
    """Whether an expression is a number that a const line takes."""
    return isinstance(value, Number) or (isinstance(value, Negative) and _is_fixed(value.inner))


def _array(kept: list[Coefficient], at: int) -> list[Coefficient]:
    """The coefficients from `at` on that are h[0], h[1], .. of one array, all with values."""
    first = kept[at].name.removesuffix("[0]")
    if first == kept[at].name or "." in first or "[" in first:
        return []
    run: list[Coefficient] = []
    for found in kept[at:]:
        if found.name != f"{first}[{len(run)}]" or found.value is None or found.given:
            break
        run.append(found)
    rest = any(found.name.startswith(f"{first}[") for found in kept[at + len(run) :])
    return [] if rest else run


def _list(array: list[Coefficient], names: Mapping[str, str]) -> str:
    """A coefficient array, broken into lines of a readable width."""
    entries = [print_expression(found.value, names) for found in array if found.value is not None]
    lines = [f"coef {array[0].name.removesuffix('[0]')} = [{entries[0]}"]
    for entry in entries[1:]:
        if len(lines[-1]) + len(entry) > WIDTH:
            lines[-1] += ","
            lines.append(f"        {entry}")
        else:
            lines[-1] += f", {entry}"
    return "\n".join(lines) + "]"


def _coefficients_read(diagram: Diagram) -> set[str]:
    """The coefficients that elements read, directly or through others."""
    found: set[str] = set()
    waiting = [
        name for element in diagram.elements.values() for factor in expressions_of(element) for name in names_in(factor)
    ]
    while waiting:
        name = waiting.pop()
        if name in found or name not in diagram.coefficients:
            continue
        found.add(name)
        value = diagram.coefficients[name].value
        waiting.extend(() if value is None else names_in(value))
    return found


def _ports(diagram: Diagram) -> Iterator[str]:
    inputs = [port.name for port in diagram.inputs()]
    if inputs:
        yield f"input {', '.join(inputs)}"
    for name, output in diagram.outputs.items():
        own = output.signal.name == name and isinstance(diagram.elements[name], Adder | Gain | Input)
        cell = output.signal.name == name and _is_cell(diagram.elements[name])
        yield f"output {name}" if own or cell else f"output {name} = {_Signals(diagram).text(output.signal)}"


def _is_cell(element: Element) -> bool:
    return isinstance(element, Delay) and element.length == 1


class _Signals:
    """Writes signals: an element by its name, a line at its tap."""

    def __init__(self, diagram: Diagram) -> None:
        self._elements = diagram.elements
        self.names = printed_names(diagram)

    def text(self, signal: Signal) -> str:
        element = self._elements[signal.name]
        name = self.names[signal.name]
        return f"{name}[{signal.tap}]" if isinstance(element, Delay) and element.length > 1 else name


def _elements(diagram: Diagram) -> Iterator[str]:
    signals = _Signals(diagram)
    elements = list(diagram.elements.values())
    shown = [output.signal.name for output in diagram.outputs.values()]
    reads = Counter(chain(shown, (signal.name for element in elements for signal in signals_read(element))))
    at = 0
    while at < len(elements):
        element = elements[at]
        at += 1
        match element:
            case Input():
                continue
            case Adder():
                yield f"adder {signals.names[element.name]} = {_terms(element, signals)}"
            case Gain(name, coefficient, signal):
                yield f"gain {signals.names[name]} = {_scaled(coefficient, signals.text(signal), signals.names)}"
            case Delay():
                run = _run(elements, at - 1, reads)
                at += len(run) - 1
                yield _delay(run, signals)


def _run(elements: list[Element], at: int, reads: Counter[str]) -> list[Delay]:
    """The single cells from `at` on that stand behind each other and share one line.

    A cell that only the next one reads begins a line of its own: one line would be told as a slip.
    """
    run: list[Delay] = []
    for element in elements[at:]:
        if not isinstance(element, Delay) or (run and not _continues(run[-1], element, reads)):
            break
        run.append(element)
        if element.length > 1:
            break
    return run


def _continues(before: Delay, after: Delay, reads: Counter[str]) -> bool:
    same_form = before.length == after.length == 1 and bool(before.starts) == bool(after.starts)
    return same_form and after.signal.name == before.name and reads[before.name] > 1


def _delay(run: list[Delay], signals: _Signals) -> str:
    first = run[0]
    line = f"delay {', '.join(signals.names[delay.name] for delay in run)} = {signals.text(first.signal)}"
    if first.length > 1:
        line += f" by {first.length}"
    starts = [print_expression(start, signals.names) for delay in run for start in delay.starts]
    if not starts:
        return line
    if first.length == 1:
        return f"{line} starts {', '.join(starts)}"
    if all(start == first.starts[0] for start in first.starts):
        return f"{line} starts {starts[0]}"
    return f"{line} starts [{', '.join(starts)}]"


def _terms(adder: Adder, signals: _Signals) -> str:
    text = ""
    for k, term in enumerate(adder.terms):
        sign = ("-" if k == 0 else " - ") if term.negative else ("" if k == 0 else " + ")
        factor = "" if term.coefficient is None else f"{print_factor(term.coefficient, signals.names)}*"
        text += f"{sign}{factor}{signals.text(term.signal)}"
    return text


def _scaled(coefficient: Expression, signal: str, names: Mapping[str, str]) -> str:
    """A gain's right side; a sign stands in front of it all."""
    match coefficient:
        case Number(value, unit) if value < 0:
            return f"-{print_number(-value, unit)}*{signal}"
        case Negative(inner):
            return f"-{print_factor(inner, names)}*{signal}"
        case _:
            return f"{print_factor(coefficient, names)}*{signal}"


def _unread(diagram: Diagram) -> Iterator[str]:
    """What reaches no output is said to be unused."""
    names = printed_names(diagram)
    view = index(diagram)
    ends = unread_ends(view, [view.number[output.signal.name] for output in diagram.outputs.values()])
    if ends:
        yield f"unused {', '.join(names[view.names[at]] for at in ends)}"
