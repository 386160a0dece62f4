"""Delay-free loops in a picture: which wires they run over, and what is said below about each."""

from __future__ import annotations

from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.index import Index, index, instant_order
from flowgraph.draw.labels import name_label
from flowgraph.draw.picture import Label, Picture

CAPTION_SIZE = 12.0
LONGEST_PATH = 12


def delay_free_pairs(diagram: Diagram) -> frozenset[tuple[str, str]]:
    """(source, reader) names of all wires that lie on a loop without a delay; both ends of folded gains too."""
    view = index(diagram)
    _, groups = instant_order(view)
    pairs: set[tuple[str, str]] = set()
    for group in groups:
        inside = set(group)
        for reader in group:
            for source in view.instant[reader]:
                if source in inside:
                    pairs.add((view.names[source], view.names[reader]))
    return frozenset(pairs)


def shortest_loops(diagram: Diagram) -> list[list[str]]:
    """For each group of loops the shortest loop through its first element, in the order of flow."""
    view = index(diagram)
    _, groups = instant_order(view)
    return [[view.names[at] for at in _shortest(view, group)] for group in groups]


def _shortest(view: Index, group: list[int]) -> list[int]:
    inside = set(group)
    first = group[0]
    came: dict[int, int] = {}
    waiting = [first]
    for element in waiting:
        for source in view.instant[element]:
            if source == first:
                path = [first]
                while element != first:
                    path.append(element)
                    element = came[element]
                return path
            if source in inside and source not in came:
                came[source] = element
                waiting.append(source)
    return group


def loop_captions(picture: Picture, diagram: Diagram) -> Picture:
    """The picture with a line below for every delay-free loop: its path and the cure."""
    loops = shortest_loops(diagram)
    if not loops:
        return picture
    left, _, _, bottom = picture.bounds()
    captions = []
    for number, path in enumerate(loops):
        names = [name_label(name) for name in path]
        if len(names) > LONGEST_PATH:
            names = [*names[:LONGEST_PATH], "…"]
        text = f"Delay-free loop: {' → '.join([*names, names[0]])} (put a unit delay in it)"
        captions.append(Label(text, left + picture.margin, bottom + 6 + 18 * number, CAPTION_SIZE, "caption", "left"))
    return picture.with_labels(*captions)
