"""The routing grid: which cells symbols and wires take, and the search for one connection (A*).

A state is a cell and a direction. A step costs 1, a bend 8, a crossing 14; cells near symbols and
next to parallel wires cost more. Wires never run along one another, cross only at right angles and
never at a bend, a dot or an arrowhead. The search is bounded by a number of steps, not by a clock.
"""

from __future__ import annotations

from dataclasses import dataclass
from heapq import heappop, heappush

CELL = 8.0
BEND = 8.0
CROSSING = 14.0
NEAR_SYMBOL = 2.0
OUTSIDE = 1.0
LABEL = 12.0
MOST_STEPS = 15_000
POCKET = 150


@dataclass(frozen=True, slots=True)
class Start:
    """A cell a search may begin at, what that costs, and the direction already run (-1: any, at no bend)."""

    cell: int
    cost: float
    direction: int = -1


class Grid:
    """Cells in rows of `width`; directions are 0 east, 1 south, 2 west, 3 north."""

    def __init__(self, width: int, height: int) -> None:
        self.width = width
        self.height = height
        count = width * height
        self.blocked = bytearray(count)
        self.knot = bytearray(count)
        self.across = [-1] * count
        self.upright = [-1] * count
        self.cost = [0.0] * count
        self.beside_across = [0.0] * count
        self.beside_upright = [0.0] * count
        self.moves = (1, width, -1, -width)
        self.steps = 0
        for x in range(width):
            self.blocked[x] = self.blocked[count - 1 - x] = 1
        for y in range(height):
            self.blocked[y * width] = self.blocked[y * width + width - 1] = 1

    def cell(self, x: int, y: int) -> int:
        return y * self.width + x

    def place(self, cell: int) -> tuple[int, int]:
        return cell % self.width, cell // self.width

    def block(self, left: int, top: int, right: int, bottom: int) -> None:
        """Close a rectangle of cells, ends included."""
        for y in range(top, bottom + 1):
            for x in range(left, right + 1):
                self.blocked[self.cell(x, y)] = 1

    def make_costly(self, left: int, top: int, right: int, bottom: int, cost: float) -> None:
        for y in range(max(0, top), min(self.height, bottom + 1)):
            for x in range(max(0, left), min(self.width, right + 1)):
                self.cost[self.cell(x, y)] += cost

    def draw(self, net: int, path: list[int], solid_end: int) -> None:
        """Take the cells of a path for a net; the last `solid_end` cells (its arrowhead) cannot be crossed."""
        width = self.width
        for at, cell in enumerate(path):
            steps = {abs(cell - other) for other in path[max(0, at - 1) : at + 2] if other != cell}
            if 1 in steps:
                self.across[cell] = net
                for distance, cost in ((1, 4.0), (2, 1.0)):
                    for other in (cell - distance * width, cell + distance * width):
                        if 0 <= other < len(self.cost):
                            self.beside_across[other] += cost
            if width in steps:
                self.upright[cell] = net
                for distance, cost in ((1, 4.0), (2, 1.0)):
                    self.beside_upright[cell - distance] += cost
                    if cell + distance < len(self.cost):
                        self.beside_upright[cell + distance] += cost
            if len(steps) > 1 or at == 0 or at >= len(path) - solid_end:
                self.knot[cell] = 1

    def free_straight(self, path: list[int]) -> bool:
        """Whether a whole path is free of symbols and of all wires."""
        return all(not self.blocked[cell] and self.across[cell] < 0 and self.upright[cell] < 0 for cell in path)

    def search(self, net: int, starts: list[Start], goal: int, arrival: int) -> list[int] | None:
        """The cheapest path from one of `starts` to `goal`, entered in direction `arrival`; None if there is none."""
        width, moves, blocked, knot = self.width, self.moves, self.blocked, self.knot
        across, upright, extra = self.across, self.upright, self.cost
        goal_x, goal_y = goal % width, goal // width
        if self._walled_in(net, {start.cell for start in starts}, goal, arrival):
            return None

        def rest(cell: int, direction: int) -> float:
            right, down = goal_x - cell % width, goal_y - cell // width
            bends = 0
            if direction >= 0:
                ahead = (right, down, -right, -down)[direction]
                aside = down if direction in (0, 2) else right
                if direction == arrival:
                    bends = 0 if not aside and ahead >= 0 else 2
                else:
                    bends = 1 if (direction ^ arrival) & 1 else 2
            return abs(right) + abs(down) + BEND * bends

        best: dict[int, float] = {}
        came: dict[int, int] = {}
        heap: list[tuple[float, int, float, int]] = []
        order = 0
        for start in starts:
            for direction in range(4) if start.direction < 0 else (start.direction,):
                state = start.cell * 4 + direction
                if start.cost < best.get(state, 1e9):
                    best[state] = start.cost
                    came[state] = -1
                    order += 1
                    heappush(heap, (start.cost + rest(start.cell, direction), order, start.cost, state))
        steps = 0
        while heap:
            _, _, spent, state = heappop(heap)
            if spent > best[state]:
                continue
            cell, direction = state >> 2, state & 3
            if cell == goal and direction == arrival:
                return _trace(came, state)
            steps += 1
            self.steps += 1
            if steps > MOST_STEPS:
                return None
            fresh = came[state] == -1
            if not fresh and (across[cell] >= 0 or upright[cell] >= 0):
                turns: tuple[int, ...] = (direction,)
            elif fresh:
                turns = (direction,) if across[cell] >= 0 or upright[cell] >= 0 else (0, 1, 2, 3)
            else:
                turns = (direction, (direction + 1) & 3, (direction + 3) & 3)
            for turn in turns:
                if fresh and (turn ^ direction) == 2:
                    continue
                following = cell + moves[turn]
                if blocked[following] and following != goal:
                    continue
                cost = spent + 1.0 + extra[following]
                if turn & 1:
                    if upright[following] >= 0 or (
                        across[following] >= 0 and (knot[following] or across[following] == net)
                    ):
                        continue
                    cost += self.beside_upright[following]
                    if across[following] >= 0:
                        cost += CROSSING
                else:
                    if across[following] >= 0 or (
                        upright[following] >= 0 and (knot[following] or upright[following] == net)
                    ):
                        continue
                    cost += self.beside_across[following]
                    if upright[following] >= 0:
                        cost += CROSSING
                if turn != direction:
                    distance = abs(goal_x - cell % width) + abs(goal_y - cell // width)
                    cost += BEND + 0.01 * distance
                reached = following * 4 + turn
                if cost < best.get(reached, 1e9) - 1e-9:
                    best[reached] = cost
                    came[reached] = state
                    order += 1
                    heappush(heap, (cost + rest(following, turn), order, cost, reached))
        return None

    def _enterable(self, net: int, cell: int, direction: int) -> bool:
        """Whether a wire of the net may come into a cell in a direction: free, or another net's straight run across."""
        if self.blocked[cell]:
            return False
        along, crossed = (self.upright, self.across) if direction & 1 else (self.across, self.upright)
        return along[cell] < 0 and (crossed[cell] < 0 or not (self.knot[cell] or crossed[cell] == net))

    def _walled_in(self, net: int, starts: set[int], goal: int, arrival: int) -> bool:
        """Whether the few cells around the goal that wires can come from are closed off from all starts."""
        seen = {(goal, arrival)}
        waiting = [(goal, arrival)]
        for cell, direction in waiting:
            before = cell - self.moves[direction]
            if before in starts or len(seen) > POCKET:
                return False
            straight_only = self.across[before] >= 0 or self.upright[before] >= 0
            turns = (direction,) if straight_only else (direction, (direction + 1) & 3, (direction + 3) & 3)
            for turn in turns:
                if (before, turn) not in seen and self._enterable(net, before, turn):
                    seen.add((before, turn))
                    waiting.append((before, turn))
        return goal not in starts


def _trace(came: dict[int, int], state: int) -> list[int]:
    path = []
    while state != -1:
        path.append(state >> 2)
        state = came[state]
    return path[::-1]


def corners(grid: Grid, path: list[int]) -> list[tuple[int, int]]:
    """The ends and bends of a path, in cells."""
    points = [grid.place(cell) for cell in path]
    kept = points[:1]
    for before, here, after in zip(points, points[1:], points[2:], strict=False):
        if (here[0] - before[0], here[1] - before[1]) != (after[0] - here[0], after[1] - here[1]):
            kept.append(here)
    return kept + points[-1:] if len(points) > 1 else kept
