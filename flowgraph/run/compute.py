"""A diagram run on columns of samples, through the very class that `emit --to python` prints."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Protocol, cast

import numpy as np

from flowgraph.diagram.diagram import Diagram
from flowgraph.emit.print_python import print_python, python_class_name
from flowgraph.run.recording import Column
from flowgraph.schedule.schedule import schedule

OPERATIONS_AT_ONCE = 2_000_000
"""Work between two reports of progress."""


class Computer(Protocol):
    """An object of a printed class."""

    def process(self, *columns: Column | int) -> list[float] | tuple[list[float], ...]: ...


def computer(diagram: Diagram) -> Computer:
    """A fresh object of the class printed for `diagram`. Raises Refused or DelayFreeLoopError where there is none.

    The text that is carried out here holds no text of the user: names are made safe, the title
    stays in a comment.
    """
    name = python_class_name(diagram)
    space: dict[str, object] = {}
    exec(compile(print_python(diagram, schedule(diagram)), f"<{name}>", "exec"), space)
    return cast(Callable[[], Computer], space[name])()


def compute(
    diagram: Diagram, columns: Sequence[Column], samples: int, progress: Callable[[float], None]
) -> list[Column]:
    """One column of `samples` doubles for each output, from one for each input, both in the order of the file.

    `progress` is told the share that is done, from time to time.
    """
    running = computer(diagram)
    results = [np.empty(samples) for _ in diagram.outputs]
    block = max(1, OPERATIONS_AT_ONCE // len(diagram.elements))
    for start in range(0, samples, block):
        end = min(start + block, samples)
        given: list[Column | int] = [column[start:end] for column in columns]
        made = running.process(*(given or [end - start]))
        for result, part in zip(results, made if isinstance(made, tuple) else (made,), strict=True):
            result[start:end] = part
        progress(end / samples)
    return results


def first_not_finite(column: Column) -> int | None:
    """The first sample that is NaN or infinite, None where all are numbers."""
    wrong = np.flatnonzero(~np.isfinite(column))
    return int(wrong[0]) if wrong.size else None
