"""A schedule for people: numbered operations as equations, then the cells, then what it costs."""

from __future__ import annotations

from textwrap import wrap
from typing import assert_never

from flowgraph.diagram.diagram import Counts, Diagram
from flowgraph.diagram.elements import Adder, Delay, Gain, Signal, Term
from flowgraph.diagram.expression import Expression, Negative, Sum
from flowgraph.schedule.schedule import Operation, Schedule
from flowgraph.text.printer import print_expression

WIDTH = 80
JOINED = "\N{NO-BREAK SPACE}"
"""Stands for a space at which no line ends: a sign stays with its term, a bracket stays whole."""


def schedule_table(diagram: Diagram, schedule: Schedule) -> str:
    """The operations in order, one or more lines of at most 80 columns each, and the counts."""
    digits = len(str(len(schedule.operations)))
    lines = [f"{diagram.name}: the operations of one sample"]
    moving = False
    for number, operation in enumerate(schedule.operations, 1):
        if not moving and operation.kind in ("keep", "update"):
            moving = True
            lines.append("then the cells, none read after it was overwritten")
        head = f"  {number:>{digits}}  {operation.kind:<6}  "
        further = " " * len(head) + "    "
        filled = wrap(
            _equation(diagram, operation),
            WIDTH,
            initial_indent=head,
            subsequent_indent=further,
            break_long_words=False,
            break_on_hyphens=False,
        )
        lines += [line.replace(JOINED, " ") for line in filled]
    lines.append(counted(schedule.counts))
    return "\n".join(lines) + "\n"


def counted(counts: Counts) -> str:
    """`2 multiplies, 1 add, 1 cell`."""
    amounts = [
        f"{counts.multiplies} {'multiply' if counts.multiplies == 1 else 'multiplies'}",
        f"{counts.adds} {'add' if counts.adds == 1 else 'adds'}",
        f"{counts.cells} {'cell' if counts.cells == 1 else 'cells'}",
    ]
    return ", ".join(amounts)


def _equation(diagram: Diagram, operation: Operation) -> str:
    """What an operation does, in the language of the diagram."""
    name = operation.name
    match operation.kind:
        case "input":
            return name
        case "adder" | "gain":
            return f"{name} = {_computed(diagram, name)}"
        case "output":
            shown = signal_text(diagram, operation.reads[0])
            return name if shown == name else f"{name} = {shown}"
        case "keep":
            return f"{name} = {signal_text(diagram, operation.reads[0])}"
        case "update":
            source = signal_text(diagram, operation.reads[0])
            element = diagram.elements[name]
            length = element.length if isinstance(element, Delay) else 1
            return f"{name} = {source}" if length == 1 else f"{name}[1] = {source}, {length} cells moved on"
        case _:
            assert_never(operation.kind)


def signal_text(diagram: Diagram, signal: Signal) -> str:
    """A signal as the text of a diagram reads it: a single cell by its name, a long line as line[k]."""
    element = diagram.elements.get(signal.name)
    return f"{signal.name}[{signal.tap}]" if isinstance(element, Delay) and element.length > 1 else signal.name


def _computed(diagram: Diagram, name: str) -> str:
    match diagram.elements[name]:
        case Adder(terms=terms):
            first = ("-" if terms[0].negative else "") + _product(diagram, terms[0])
            rest = [f" {'-' if term.negative else '+'}{JOINED}{_product(diagram, term)}" for term in terms[1:]]
            return first + "".join(rest)
        case Gain(coefficient=coefficient, signal=signal):
            return _product(diagram, Term(signal, False, coefficient))
        case _:
            raise TypeError(f"{name} is computed by no sum")


def _product(diagram: Diagram, term: Term) -> str:
    read = signal_text(diagram, term.signal)
    return read if term.coefficient is None else f"{_factor(term.coefficient)}*{read}"


def _factor(coefficient: Expression) -> str:
    text = print_expression(coefficient).replace(" ", JOINED)
    return f"({text})" if isinstance(coefficient, Sum | Negative) else text
