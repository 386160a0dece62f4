"""The coarsest partition against its definition."""

from collections import Counter

from hypothesis import given
from hypothesis import strategies as st

from flowgraph.passes.partition import MODULUS, coarsest_partition


@st.composite
def weighted_graphs(draw: st.DrawFn) -> tuple[list[int], list[tuple[int, int, int]]]:
    """Labels of up to a dozen nodes, and readings (source, reader, weight)."""
    labels = draw(st.lists(st.integers(0, 1), min_size=1, max_size=12))
    node = st.integers(0, len(labels) - 1)
    return labels, draw(st.lists(st.tuples(node, node, st.sampled_from([1, -1, 2])), max_size=30))


def by_rounds(labels: list[int], wires: list[tuple[int, int, int]]) -> list[list[int]]:
    """Classes split by what they read of every class, round by round, until none splits."""
    classes = list(labels)
    while True:
        read: list[Counter[int]] = [Counter() for _ in labels]
        for source, reader, weight in wires:
            read[reader][classes[source]] += weight
        marks = [
            (classes[node], frozenset((at, total % MODULUS) for at, total in read[node].items() if total % MODULUS))
            for node in range(len(labels))
        ]
        numbers = {mark: number for number, mark in enumerate(dict.fromkeys(marks))}
        if len(numbers) == len(set(classes)):
            groups: dict[int, list[int]] = {}
            for node, at in enumerate(classes):
                groups.setdefault(at, []).append(node)
            return sorted(groups.values())
        classes = [numbers[mark] for mark in marks]


@given(weighted_graphs())
def test_is_the_coarsest_stable_partition(graph: tuple[list[int], list[tuple[int, int, int]]]) -> None:
    """The worklist, which puts all parts but the largest back, ends where plain rounds end."""
    labels, wires = graph
    readers: list[list[tuple[int, int]]] = [[] for _ in labels]
    for source, reader, weight in wires:
        readers[source].append((reader, weight))
    assert coarsest_partition(labels, readers) == by_rounds(labels, wires)
