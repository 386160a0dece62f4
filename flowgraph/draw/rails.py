"""Rails: the straight lines of a picture, each from an input (or a loop of its own) to an output.

The first rail is the forward path; every further input, and every loop that no rail has touched,
gets a rail in a band below.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from flowgraph.diagram.index import strong_components
from flowgraph.draw.model import Sketch


@dataclass(frozen=True, slots=True)
class Rail:
    """Parts from left to right and the links between them (one fewer than parts)."""

    parts: tuple[int, ...]
    links: tuple[int, ...]


def find_rails(sketch: Sketch) -> list[Rail]:
    """The rails, the forward path first. A part is on one rail at most."""
    return _RailFinder(sketch).rails


class _RailFinder:
    def __init__(self, sketch: Sketch) -> None:
        self.sketch = sketch
        self.inputs = [number for number, part in enumerate(sketch.parts) if part.kind == "input"]
        self.components = strong_components([sketch.readers(part) for part in range(len(sketch.parts))])
        self.back, self.order = self._walk()
        self.placed: set[int] = set()
        self.rails: list[Rail] = []
        for part in self.inputs:
            self._lay(part)
        for component in sorted(self.components):
            if len(component) > 1 and not self.placed.intersection(component):
                self._lay(self._entry(component))
        if not self.rails:
            starts = [part for part in range(len(sketch.parts)) if not sketch.into[part]]
            for part in starts[:1]:
                self._lay(part)

    def _entry(self, component: list[int]) -> int:
        """Where a loop begins: at an adder that reads from outside, else at its first adder, else anywhere."""
        inside = set(component)
        adders = [part for part in component if self.sketch.parts[part].kind == "adder"]
        fed = [part for part in adders if not inside.issuperset(self.sketch.sources(part))]
        return (fed or adders or component)[0]

    def _walk(self) -> tuple[set[int], list[int]]:
        """Back links found depth first, delay-free links first; and the parts, sources before readers."""
        sketch = self.sketch
        adders = [number for number, part in enumerate(sketch.parts) if part.kind == "adder"]
        back: set[int] = set()
        finished: list[int] = []
        state = [0] * len(sketch.parts)
        for root in [*self.inputs, *adders, *range(len(sketch.parts))]:
            if state[root]:
                continue
            state[root] = 1
            walk = [(root, iter(self._delay_free_first(root)))]
            while walk:
                part, rest = walk[-1]
                for link in rest:
                    reader = sketch.links[link].target
                    if state[reader] == 1:
                        back.add(link)
                    elif state[reader] == 0:
                        state[reader] = 1
                        walk.append((reader, iter(self._delay_free_first(reader))))
                        break
                else:
                    walk.pop()
                    state[part] = 2
                    finished.append(part)
        return back, finished[::-1]

    def _delay_free_first(self, part: int) -> list[int]:
        sketch = self.sketch
        return sorted(sketch.out[part], key=lambda link: sketch.is_delay(sketch.links[link].target))

    def _lay(self, start: int) -> None:
        """Lay the rail that begins at `start`, unless its first step already meets another rail."""
        path = self._best_path(start)
        sketch = self.sketch
        parts = [start]
        for link in path:
            target = sketch.links[link].target
            if target in self.placed:
                path = path[: len(parts) - 1]
                break
            parts.append(target)
        if len(parts) == 1 and sketch.parts[start].kind == "input" and sketch.out[start] and self.rails:
            return
        self.placed.update(parts)
        self.rails.append(Rail(tuple(parts), tuple(path)))

    def _best_path(self, start: int) -> list[int]:
        """Links of the path with fewest delays, then fewest gains, then most adders, to an output or a rail."""
        sketch = self.sketch
        costs: dict[int, tuple[int, int, int]] = {start: (0, 0, 0)}
        came: dict[int, int] = {}
        for part in self.order:
            if part not in costs or (part in self.placed and part != start):
                continue
            for link in sketch.out[part]:
                target = sketch.links[link].target
                if link in self.back and target not in self.placed:
                    continue
                cost = self._step(costs[part], link)
                better = target not in costs or (cost, link) < (costs[target], came[target])
                if target != start and better:
                    costs[target] = cost
                    came[target] = link
        ends = [part for part in costs if sketch.parts[part].kind == "output" and part not in self.placed]
        if not ends:
            ends = [part for part in sorted(costs) if part in self.placed]
            if not ends:
                ends = sorted(costs)
            end = min(ends, key=lambda part: (costs[part], part)) if self.placed else ends[-1]
        else:
            end = min(sorted(ends), key=self._worth(costs))
        path: list[int] = []
        while end != start:
            path.append(came[end])
            end = sketch.links[came[end]].source
        return path[::-1]

    def _worth(self, costs: dict[int, tuple[int, int, int]]) -> Callable[[int], tuple[float, ...]]:
        """One input: the output behind most adders, few delays; several: the nearest output for each."""
        if len(self.inputs) < 2:
            return lambda part: (0.5 * costs[part][0] + costs[part][2],)
        return lambda part: costs[part]

    def _step(self, cost: tuple[int, int, int], link: int) -> tuple[int, int, int]:
        sketch = self.sketch
        part = sketch.parts[sketch.links[link].target]
        delays, gains, adders = cost
        scaled = sketch.links[link].coefficient is not None or part.kind == "gain"
        return delays + (part.kind == "delay"), gains + scaled, adders - (part.kind == "adder")
