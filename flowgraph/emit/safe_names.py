"""Names that are safe in program text: the user's own wherever that is possible."""

from __future__ import annotations

import re
from collections.abc import Collection, Iterable


def safe_names(wanted: Iterable[str], reserved: Collection[str]) -> dict[str, str]:
    """A different identifier for each wanted name: `low.w1` becomes low_w1, `f[3]` becomes f_3.

    Names begin with a letter. One that is reserved or taken is numbered: gain_2. The first in
    `wanted` has the first choice, so the result depends on nothing but the arguments.
    """
    names: dict[str, str] = {}
    taken = set(reserved)
    last_number: dict[str, int] = {}
    for name in wanted:
        plain = re.sub(r"[^A-Za-z0-9]+", "_", name).rstrip("_")
        plain = plain if plain[:1].isalpha() else f"signal{plain}"
        chosen, number = plain, last_number.get(plain, 1)
        while chosen in taken:
            number += 1
            chosen = f"{plain}_{number}"
        last_number[plain] = number
        taken.add(chosen)
        names[name] = chosen
    return names


def class_name(diagram_name: str, reserved: Collection[str]) -> str:
    """`leaky_integrator` becomes LeakyIntegrator."""
    joined = "".join(part[:1].upper() + part[1:] for part in diagram_name.split("_"))
    return safe_names([joined if joined[:1].isalpha() else f"Diagram{joined}"], reserved).popitem()[1]
