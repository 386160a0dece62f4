"""The driver: applies the passes until none finds anything, and proves every single step.

After each step it checks, without trusting the pass, that the diagram is well formed, that the cost
strictly fell, and that behaviour is unchanged, starting contents included.
"""

from __future__ import annotations

import gc
import inspect
from collections.abc import Callable, Mapping
from dataclasses import dataclass, replace
from typing import TypeAlias

from flowgraph.diagram.claim import Claim, DiagramIntent, EquationIntent, RatioIntent
from flowgraph.diagram.diagram import Counts, Diagram, count, given_numbers
from flowgraph.diagram.elements import Signal, expressions_of, with_expressions
from flowgraph.diagram.expression import Expression, names_in, substitute
from flowgraph.passes.carried import Run, carried, whole_lines
from flowgraph.passes.change import Change
from flowgraph.passes.correspondence import prove_correspondence
from flowgraph.passes.cost import cost
from flowgraph.passes.drop_unread import drop_unread
from flowgraph.passes.exchange_sections import exchange_sections
from flowgraph.passes.fold_gains import fold_gains
from flowgraph.passes.merge_equal import merge_equal
from flowgraph.passes.proof import NotProved, Proof
from flowgraph.passes.region import prove_regions
from flowgraph.passes.well_formed import faults_of_rewriting

Pass: TypeAlias = Callable[[Diagram], Change | None]

PASSES: tuple[Pass, ...] = (
    drop_unread,
    fold_gains,
    exchange_sections,  # before merge_equal: neighbours are exchanged while their lines are their own
    merge_equal,
)


class BrokenPassError(Exception):
    """A pass of ours went wrong: its name, what was found, and the diagram before and after."""

    def __init__(self, name: str, reason: str, before: Diagram, after: Diagram) -> None:
        super().__init__(f"the pass {name} is wrong: {reason}")
        self.name, self.reason, self.before, self.after = name, reason, before, after


@dataclass(frozen=True, slots=True)
class Step:
    """One proved step: the pass, the law it rests on, what it did, and the diagram it left."""

    name: str
    law: str
    message: str
    proof: Proof
    after: Diagram
    moved: Mapping[Signal, Signal]


@dataclass(frozen=True, slots=True)
class Reduction:
    """A diagram, the steps taken, and what they led to."""

    before: Diagram
    after: Diagram
    steps: tuple[Step, ...]

    def counts(self) -> tuple[Counts, Counts]:
        """Cells, multiplies and adds before and after."""
        return count(self.before), count(self.after)

    def carried(self) -> list[Run]:
        """The cells of the diagram before that still do work, with the cells of the diagram after that do it."""
        runs = whole_lines(self.before)
        for step in self.steps:
            runs = carried(runs, step.moved, step.after)
        return runs

    def merged(self) -> dict[Signal, Signal]:
        """The same, cell by cell."""
        return {
            Signal(run.cell.name, run.cell.tap + at): Signal(run.image.name, run.image.tap + at)
            for run in self.carried()
            for at in range(run.cells)
        }


def reduce_diagram(diagram: Diagram) -> Reduction:
    """The first pass that finds something, again and again, until none does.

    Raises ValueError for a diagram that is not well formed (a loop without a delay, a signal that is
    not there), and BrokenPassError where a step fails a check: a fault of the pass, never of the user.
    """
    faults = faults_of_rewriting(diagram, diagram)
    if faults:
        raise ValueError("; ".join(faults))
    collecting = gc.isenabled()
    gc.disable()  # nothing made here forms cycles, and the collector would walk large diagrams again and again
    try:
        return _reduced(diagram)
    finally:
        if collecting:
            gc.enable()


def _reduced(diagram: Diagram) -> Reduction:
    steps: list[Step] = []
    now = _with_given_numbers(diagram)
    # After each step the first pass is asked again: what a step left unread goes before anything else is tried.
    while (step := next(filter(None, (take_step(find, now) for find in PASSES)), None)) is not None:
        steps.append(step)
        now = step.after
    return Reduction(diagram, tidied(now) if steps else diagram, tuple(steps))


def _with_given_numbers(diagram: Diagram) -> Diagram:
    """Numbers that uses gave, written where they are used: a coefficient so given is nothing else."""
    numbers = given_numbers(diagram)
    if not numbers:
        return diagram
    elements = {
        name: with_expressions(element, lambda expression: substitute(expression, numbers))
        for name, element in diagram.elements.items()
    }
    return replace(diagram, elements=elements)


def take_step(find: Pass, diagram: Diagram) -> Step | None:
    """The step that a pass finds, proved; None where it finds nothing. Raises BrokenPassError."""
    change = find(diagram)
    if change is None:
        return None
    proof = _checked(find.__name__, diagram, change)
    return Step(find.__name__, law_of(find), change.message, proof, change.after, change.moved)


def law_of(find: Pass) -> str:
    """The sentence a pass rests on: the first paragraph of its docstring."""
    return " ".join((inspect.getdoc(find) or find.__name__).split("\n\n")[0].split())


def _checked(name: str, before: Diagram, change: Change) -> Proof:
    faults = faults_of_rewriting(before, change.after)
    if faults:
        raise BrokenPassError(name, "; ".join(faults), before, change.after)
    if cost(change.after) >= cost(before):
        raise BrokenPassError(
            name, f"the cost did not fall: {cost(before)} to {cost(change.after)}", before, change.after
        )
    try:
        if change.regions:
            return prove_regions(before, change.after, change.regions)
        return prove_correspondence(before, change.after, change.moved)
    except NotProved as reason:
        raise BrokenPassError(name, f"behaviour is not proved unchanged: {reason}", before, change.after) from reason


def tidied(diagram: Diagram) -> Diagram:
    """The diagram without coefficients that nothing reads any more, and with rows of what is still there."""
    read = _names_read(diagram)
    rows = (tuple(name for name in row if name in diagram.elements or name in diagram.outputs) for row in diagram.rows)
    return replace(
        diagram,
        coefficients={name: found for name, found in diagram.coefficients.items() if name in read},
        rows=tuple(row for row in rows if len(row) > 1),
        uses=(),
    )


def _names_read(diagram: Diagram) -> set[str]:
    """Coefficients that elements or claims read, and all that those follow."""
    used = [expression for element in diagram.elements.values() for expression in expressions_of(element)]
    for claim in diagram.claims:
        used.extend(_expressions(claim))
    read: set[str] = set()
    waiting = [name for expression in used for name in names_in(expression)]
    while waiting:
        name = waiting.pop()
        if name in diagram.coefficients and name not in read:
            read.add(name)
            value = diagram.coefficients[name].value
            waiting.extend(names_in(value) if value is not None else ())
    return read


def _expressions(claim: Claim) -> list[Expression]:
    match claim:
        case EquationIntent(right=right, history=history):
            return [right, *(value for _, _, value in history)]
        case RatioIntent(ratio=ratio):
            return [ratio]
        case DiagramIntent(other=other, bindings=bindings):
            made_with = [made for element in other.elements.values() for made in expressions_of(element)]
            followed = [found.value for found in other.coefficients.values() if found.value is not None]
            return [*(value for _, value in bindings), *made_with, *followed]
        case _:
            return []
