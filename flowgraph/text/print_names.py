"""The names a printed diagram uses: inner names lose their points, `low.w1` becomes `low_w1`."""

from __future__ import annotations

import re

from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.elements import Input
from flowgraph.text.words import LONGEST_NAME, RESERVED


def printed_names(diagram: Diagram) -> dict[str, str]:
    """How each element and coefficient is called in print; ports keep their names, a taken name is numbered."""
    taken = {first_name(name) for name in [*diagram.outputs, *(port.name for port in diagram.inputs())]}
    for name in [*diagram.elements, *diagram.coefficients]:
        if "." not in name:
            taken.add(first_name(name))
    written: dict[str, str] = {}
    for name, element in diagram.elements.items():
        port = diagram.outputs.get(name)
        shows_other = port is not None and port.signal.name != name and not isinstance(element, Input)
        written[name] = _free(name, taken) if "." in name or shows_other else name
    for name in diagram.coefficients:
        clash = name in diagram.elements or name in diagram.outputs
        written[name] = _free(name, taken) if "." in name or clash else name
    return written


def first_name(name: str) -> str:
    """`f` of `f[2]`."""
    return name.partition("[")[0]


def _free(name: str, taken: set[str]) -> str:
    """A plain name like `name` that nothing else has; it is taken from then on."""
    plain = re.sub(r"[^A-Za-z0-9_]+", "_", name).strip("_")[: LONGEST_NAME - 8] or "s"
    chosen, number = plain, 1
    while chosen in taken or chosen in RESERVED:
        number += 1
        chosen = f"{plain}_{number}"
    taken.add(chosen)
    return chosen


def labels(diagram: Diagram) -> list[str]:
    """The labels that stand as indices in the names of ports and plain names, in the order of the file."""
    names = [*diagram.elements, *diagram.outputs, *diagram.coefficients]
    found = [label for name in names if "." not in name for label in re.findall(r"\[([A-Za-z_]\w*)\]", name)]
    return list(dict.fromkeys(found))
