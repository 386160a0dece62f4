"""Names for what a pass adds, taken from a neighbour: `low.y[3]` leads to `low.w[3]`."""

from __future__ import annotations

import re
from collections.abc import Iterable

from flowgraph.diagram.diagram import Diagram

_PARTS = re.compile(r"(?P<path>(?:.*\.)?)(?P<own>[^.\[]*)(?P<index>(?:\[[^\]]*\])*)\Z")


class Names:
    """The names a diagram uses, and fresh ones beside them."""

    def __init__(self, diagram: Diagram) -> None:
        self._taken = {*diagram.elements, *diagram.outputs, *diagram.coefficients}

    def fresh(self, name: str) -> str:
        """The name itself where it is free, else numbered from 2 on; it is taken from now on."""
        return self.fresh_group([name])[0]

    def cells_behind(self, signal: str, cells: int, each: bool) -> list[str]:
        """Fresh names for cells behind a signal: `x1`, `x2`, and `y3_1` behind `y3`; `x_line` for all in one."""
        if each:
            return [self.fresh(with_cell(signal, cell)) for cell in range(1, cells + 1)]
        return [self.fresh(with_cell(signal, "_line"))]

    def fresh_group(self, names: Iterable[str]) -> list[str]:
        """Names that belong together: all as given where all are free, else all numbered alike."""
        wanted = list(names)
        made, number = wanted, 1
        while not self._taken.isdisjoint(made):
            number += 1
            made = [_numbered(name, number) for name in wanted]
        self._taken.update(made)
        return made


def beside(neighbour: str, own: str) -> str:
    """`own` in the place of the neighbour's own name: its path and its index stay."""
    parts = _PARTS.match(neighbour)
    return own if parts is None else f"{parts['path']}{own}{parts['index']}"


def with_cell(name: str, cell: int | str) -> str:
    """The name of a cell behind a signal: `w` and 2 make `w2`; a name that ends in a digit gets `_2`."""
    parts = _PARTS.match(name)
    if parts is None or not parts["own"]:
        return f"{name}_{cell}"
    between = "_" if parts["own"][-1].isdigit() and isinstance(cell, int) else ""
    return f"{parts['path']}{parts['own']}{between}{cell}{parts['index']}"


def _numbered(name: str, number: int) -> str:
    parts = _PARTS.match(name)
    return f"{name}_{number}" if parts is None else f"{parts['path']}{parts['own']}_{number}{parts['index']}"
