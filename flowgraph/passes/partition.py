"""The coarsest partition of signals in which equal signals take in equal weighted sums.

A worklist of splitters, all parts but the largest put back (Hopcroft 1971; for weighted sums, one
functional per splitter, Valmari and Franceschinis 2010): near n log n.
"""

from __future__ import annotations

from collections.abc import Hashable, Sequence

MODULUS = 2**61 - 1


def coarsest_partition(
    first_labels: Sequence[Hashable], readers: Sequence[Sequence[tuple[int, int]]]
) -> list[list[int]]:
    """The coarsest partition that keeps unequal labels apart and is stable under weighted reading.

    `readers[s]` lists (node, weight) for each reading of node s, the weight a residue modulo
    `MODULUS`. Stable: two nodes of a class read every class with the same total weight. Classes
    come in the order of their first members, members in rising order.
    """
    members: list[dict[int, None]] = []
    class_of: list[int] = [0] * len(first_labels)
    by_label: dict[Hashable, int] = {}
    for node, label in enumerate(first_labels):
        at = by_label.setdefault(label, len(members))
        if at == len(members):
            members.append({})
        members[at][node] = None
        class_of[node] = at
    waiting = list(range(len(members)))
    is_waiting = [True] * len(members)
    while waiting:
        splitter = waiting.pop()
        is_waiting[splitter] = False
        weight: dict[int, int] = {}
        for source in members[splitter]:
            for node, factor in readers[source]:
                weight[node] = weight.get(node, 0) + factor
        parts: dict[int, dict[int, list[int]]] = {}
        for node, total in weight.items():
            residue = total % MODULUS
            if residue and len(members[class_of[node]]) > 1:
                parts.setdefault(class_of[node], {}).setdefault(residue, []).append(node)
        for at, by_weight in parts.items():
            _split(at, list(by_weight.values()), members, class_of, waiting, is_waiting)
    return sorted(sorted(group) for group in members)


def _split(
    at: int,
    parts: list[list[int]],
    members: list[dict[int, None]],
    class_of: list[int],
    waiting: list[int],
    is_waiting: list[bool],
) -> None:
    """Takes the parts out of class `at`; what they leave (or the first of them) stays class `at`."""
    moved = sum(len(part) for part in parts)
    if moved == len(members[at]):
        parts = parts[1:]
    made = [at]
    for part in parts:
        new = len(members)
        made.append(new)
        members.append(dict.fromkeys(part))
        is_waiting.append(False)
        for node in part:
            del members[at][node]
            class_of[node] = new
    spared = at if is_waiting[at] else max(made, key=lambda group: len(members[group]))
    for group in made:
        if group != spared and not is_waiting[group]:
            is_waiting[group] = True
            waiting.append(group)
