"""The nearest node that every path to a node passes (Lengauer and Tarjan 1979)."""

from __future__ import annotations

from collections.abc import Collection, Iterable, Mapping
from typing import Protocol


class Reading(Protocol):
    """Whatever names the node it reads."""

    @property
    def node(self) -> str: ...


def immediate_dominators(reads: Mapping[str, Iterable[Reading]], also_sources: Collection[str]) -> dict[str, str]:
    """For each node its immediate dominator, seen from all nodes that read nothing and the other sources.

    A node that paths from several sources reach without a common node has none.
    """
    import networkx

    top = ""
    graph = networkx.DiGraph()
    graph.add_node(top)
    for name, wires in reads.items():
        found = [wire.node for wire in wires]
        if not found or name in also_sources:
            graph.add_edge(top, name)
        graph.add_edges_from((node, name) for node in found)
    dominators = networkx.immediate_dominators(graph, top)
    return {name: above for name, above in dominators.items() if name != top and above not in (top, None)}
