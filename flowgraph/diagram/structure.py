"""Questions about the shape of a diagram: what reaches what, and its loops without a delay."""

from __future__ import annotations

from collections import deque
from collections.abc import Iterable, Iterator, Sequence
from itertools import islice

from flowgraph.diagram.elements import Delay
from flowgraph.diagram.expression import Number
from flowgraph.diagram.index import Index, instant_order, strong_components


def spread(successors: Sequence[Sequence[int]], roots: Iterable[int]) -> list[bool]:
    """Marks every number that can be reached from `roots`, themselves included.

    With `readers` of an Index as successors that is what a signal reaches, with `reads` what it comes from.
    """
    marked = [False] * len(successors)
    waiting = list(roots)
    for root in waiting:
        marked[root] = True
    while waiting:
        for following in successors[waiting.pop()]:
            if not marked[following]:
                marked[following] = True
                waiting.append(following)
    return marked


def unread_ends(view: Index, roots: Iterable[int]) -> list[int]:
    """Where signals end unread: of what `roots` do not come from, that which nothing else unread reads.

    Of a group that only reads itself it is the first in the file. Told about these, the others follow.
    """
    reaches = spread(view.reads, roots)
    unread = [at for at, alive in enumerate(reaches) if not alive]
    place = {at: k for k, at in enumerate(unread)}
    readers = [[place[reader] for reader in view.readers[at] if reader in place] for at in unread]
    ends: list[int] = []
    for group in strong_components(readers):
        inside = set(group)
        if all(reader in inside for member in group for reader in readers[member]):
            ends.append(unread[group[0]])
    return sorted(ends)


def holds_something(delay: Delay) -> bool:
    """Whether a delay starts with contents that are not plainly 0."""
    return any(not (isinstance(start, Number) and start.value == 0) for start in delay.starts)


MOST_LOOPS = 1000
"""The most loops that are listed of one group."""
SMALL_GROUP = 200
"""Groups up to this size have their loops listed one by one."""


def delay_free_loops(view: Index) -> Iterator[list[int]]:
    """The elementary loops of delay-free wires, each from its first element in the file, along the signal.

    All of them in groups of up to SMALL_GROUP elements, as far as MOST_LOOPS; of a larger group the
    shortest loop through each element that lies on none before it. Johnson 1975, through networkx.
    """
    _, groups = instant_order(view)
    for group in sorted(groups):
        if len(group) == 1:
            yield group
        elif len(group) <= SMALL_GROUP:
            yield from _elementary(view, group)
        else:
            yield from _shortest(view, group)


def _elementary(view: Index, group: list[int]) -> Iterator[list[int]]:
    """The elementary loops inside one strongly connected group, the first in the file first."""
    import networkx

    inside = set(group)
    graph = networkx.DiGraph()
    graph.add_nodes_from(group)
    graph.add_edges_from((source, at) for at in group for source in view.instant[at] if source in inside)
    found = [_from_first(cycle) for cycle in islice(networkx.simple_cycles(graph), MOST_LOOPS)]
    yield from sorted(found)


def _shortest(view: Index, group: list[int]) -> Iterator[list[int]]:
    """A shortest loop through each element that lies on none told before: breadth first along what each reads."""
    inside = set(group)
    told: set[int] = set()
    for root in group:
        if root in told:
            continue
        after: dict[int, int] = {}
        waiting = deque([root])
        while root not in after:
            reader = waiting.popleft()
            for source in view.instant[reader]:
                if source in inside and source not in after:
                    after[source] = reader
                    waiting.append(source)
        loop = [root]
        while after[loop[-1]] != root:
            loop.append(after[loop[-1]])
        told.update(loop)
        yield _from_first(loop)


def _from_first(cycle: list[int]) -> list[int]:
    turn = cycle.index(min(cycle))
    return cycle[turn:] + cycle[:turn]
