"""Which side of a symbol each wire enters or leaves.

Boxes and triangles are passed straight through. For a circle every way of giving its wires to its
four sides is tried, and the one that points best towards where they come from and go to is taken.
"""

from __future__ import annotations

from itertools import permutations

from flowgraph.draw.plan import Plan, Spot, Wire
from flowgraph.draw.rows import OPPOSITE, Side

STEP: dict[Side, tuple[int, int]] = {"E": (1, 0), "S": (0, 1), "W": (-1, 0), "N": (0, -1)}
SIDES: tuple[Side, ...] = ("W", "S", "N", "E")


def assign_ports(plan: Plan) -> None:
    """Fill `ports` (wire number -> side it enters by) and `exit` of every spot."""
    incoming: dict[int, list[int]] = {}
    outgoing: dict[int, list[int]] = {}
    for number, wire in enumerate(plan.wires):
        incoming.setdefault(wire.target, []).append(number)
        outgoing.setdefault(wire.source, []).append(number)
    on_rail = {end for wire in plan.wires if wire.rail for end in (wire.source, wire.target)} | set(plan.forward)
    for number, spot in enumerate(plan.spots):
        entering, leaving = incoming.get(number, []), outgoing.get(number, [])
        if spot.kind == "adder":
            _assign_circle(plan, number, entering, leaving, number in on_rail)
        elif spot.kind == "output":
            spot.ports = dict.fromkeys(entering, spot.facing)
        else:
            spot.exit = spot.facing
            spot.ports = dict.fromkeys(entering, OPPOSITE[spot.facing])


def _assign_circle(plan: Plan, number: int, entering: list[int], leaving: list[int], on_rail: bool) -> None:
    spot = plan.spots[number]
    wires = [plan.wires[wire] for wire in entering]
    costs = [_costs(*_from(plan, spot, wire), _weight(wire), wire.tap is not None) for wire in wires]
    if not spot.top:
        leave = dict.fromkeys(SIDES, 50.0) | {"N": 0.0}
    elif on_rail:
        leave = dict.fromkeys(SIDES, 50.0) | {"E": 0.0}
    else:
        leave = dict.fromkeys(SIDES, 0.0)
        for wire in leaving:
            towards = plan.spots[plan.wires[wire].target]
            weight = 4.0 if towards.kind == "delay" else 1.0
            for side, cost in _costs(towards.column - spot.column, towards.line - spot.line, weight).items():
                leave[side] += cost
    best: tuple[float, tuple[Side, ...]] | None = None
    for sides in permutations(SIDES, min(4, len(entering) + 1)):
        cost = leave[sides[-1]] + sum(table[side] for table, side in zip(costs, sides[:-1], strict=False))
        if best is None or cost < best[0]:
            best = (cost, sides)
    assert best is not None
    spot.exit = best[1][-1]
    spot.ports = dict(zip(entering, best[1][:-1], strict=False))


def _weight(wire: Wire) -> float:
    return 10.0 if wire.rail or wire.link is None else 1.0


def _from(plan: Plan, spot: Spot, wire: Wire) -> tuple[int, int]:
    """Where a wire comes from, seen from the circle: columns to the right, half rows down."""
    source = plan.spots[wire.source]
    column = source.column if wire.tap is None else wire.tap
    line = plan.tap_line.get(wire.source, source.line)
    if wire.lane is not None:
        return 0, wire.lane - spot.line
    return column - spot.column, line - spot.line


def _costs(right: int, down: int, weight: float, along_row: bool = False) -> dict[Side, float]:
    """What each side costs for a partner that lies `right` columns and `down` half rows away.

    A wire that comes down a tap column and then along the row (`along_row`) rather enters sideways.
    """
    table: dict[Side, float] = {}
    for side in SIDES:
        across, along = STEP[side]
        ahead = across * right + along * down
        aside = abs(along * right) + abs(across * down)
        if ahead > 0 and aside == 0:
            cost = min(1.0, 0.01 * ahead)  # of two in line the nearer one keeps the straight way
        elif ahead > 0:
            favoured = bool(across) if along_row else ahead >= aside if across else ahead > aside
            cost = 1.2 if favoured else 1.6
        elif ahead == 0:
            cost = 4.0
        else:
            cost = 9.0 - 0.5 * min(aside, 4)  # what comes from further away wraps around on the outside
        table[side] = cost * weight
    return table
