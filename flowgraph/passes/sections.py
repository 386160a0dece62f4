"""Cascaded sections: parts of a diagram with one signal in and one out, one behind the other.

A section is found from its exit: all that leads to it behind the nearest node that every path to it
passes (its immediate dominator). For an exit in a loop that is the nearest
such node outside the loop, and once more the nearest inside, for sections within a larger loop.
"""

from __future__ import annotations

from dataclasses import dataclass

from flowgraph.passes.dominators import immediate_dominators
from flowgraph.passes.network import Network

_STEPS_PER_NODE = 64


@dataclass(frozen=True, slots=True)
class Section:
    """What lies between `entry` (outside) and `exit` (inside): only these two signals cross its border.

    `reach` is how late it reads its entry at most, `own` how late it reads its own exit.
    """

    entry: str
    exit: str
    members: frozenset[str]
    reach: int
    own: int


def cascades(network: Network) -> list[list[Section]]:
    """Chains of two or more sections, each read by nothing but the next: longest possible, in a fixed order."""
    around, inside = _sections(network)
    return [*_chains(network, around), *_chains(network, inside)]


def _sections(network: Network) -> tuple[list[Section], list[Section]]:
    """Sections that hold the whole loop of their exit, and sections within a loop."""
    dominator = immediate_dominators(network.wires, network.with_contents)
    steps = _STEPS_PER_NODE * len(network.wires)
    around: list[Section] = []
    inside: list[Section] = []
    for exit_ in network.wires:
        nearest = entry = dominator.get(exit_)
        while entry is not None and network.loop[entry] == network.loop[exit_]:
            entry = dominator.get(entry)
        for found, at in ((around, entry), (inside, nearest if nearest != entry else None)):
            if at is not None and at not in network.with_contents and steps > 0:
                members = _between(network, at, exit_)
                steps -= len(members)
                if _closed(network, members, exit_):
                    found.append(_section(network, at, exit_, members))
    return around, inside


def _between(network: Network, entry: str, exit_: str) -> frozenset[str]:
    """All nodes that lead to the exit without passing the entry."""
    members = {exit_}
    waiting = [exit_]
    while waiting:
        for wire in network.wires[waiting.pop()]:
            if wire.node != entry and wire.node not in members:
                members.add(wire.node)
                waiting.append(wire.node)
    return frozenset(members)


def _closed(network: Network, members: frozenset[str], exit_: str) -> bool:
    """Whether nothing but the exit is read or shown outside, and all contents are 0."""
    return members.isdisjoint(network.with_contents) and all(
        member == exit_
        or (member not in network.shown and all(reader in members for reader, _ in network.readers[member]))
        for member in members
    )


def _section(network: Network, entry: str, exit_: str, members: frozenset[str]) -> Section:
    wires = [wire for member in members for wire in network.wires[member]]
    reach = max((wire.late for wire in wires if wire.node == entry), default=0)
    own = max((wire.late for wire in wires if wire.node == exit_), default=0)
    return Section(entry, exit_, members, reach, own)


def _chains(network: Network, sections: list[Section]) -> list[list[Section]]:
    by_entry: dict[str, list[Section]] = {}
    for section in sections:
        by_entry.setdefault(section.entry, []).append(section)
    following: dict[str, Section] = {}
    followed: set[str] = set()
    for section in sections:
        for candidate in by_entry.get(section.exit, ()):
            if _only_between(network, section, candidate):
                following[section.exit] = candidate
                followed.add(candidate.exit)
                break
    chains: list[list[Section]] = []
    for section in sections:
        if section.exit not in followed and section.exit in following:
            chain = [section]
            while chain[-1].exit in following:
                chain.append(following[chain[-1].exit])
            chains.append(chain)
    return chains


def _only_between(network: Network, first: Section, second: Section) -> bool:
    """Whether the signal between two sections is read by these two alone."""
    return first.exit not in network.shown and all(
        reader in first.members or reader in second.members for reader, _ in network.readers[first.exit]
    )
