"""Routing as a whole: the order of wires in which everything finds its place."""

from __future__ import annotations

from collections.abc import Iterator
from typing import TypeAlias

from flowgraph.draw.plan import Plan
from flowgraph.draw.routed import Routed, Spacing
from flowgraph.draw.router import Router

TRIES, TRIES_FOR_CROSSINGS = 40, 16
Order: TypeAlias = tuple[tuple[int, ...], tuple[int, ...]]


def route(plan: Plan, spacing: Spacing, most_steps: int) -> Routed:
    """All wires of a plan at one spacing, in the best order found.

    The order is improved step by step: a wire that is missing goes first, one that crosses others or
    hits a label goes last, and the change stays where the whole became better. This ends after about
    `most_steps` steps of search; `steps` of the result says how many all of it took.
    """
    kept: Order = ((), ())
    best = Router(plan, spacing, *kept).routed
    steps = best.steps
    tried = {kept}
    idle = 0
    while steps < most_steps and best.score()[:4] != (0, 0, 0, 0):
        order = next((order for order in _other_orders(best, kept) if order not in tried), None)
        if order is None or idle >= _patience(plan, best):
            break
        tried.add(order)
        routed = Router(plan, spacing, *order).routed
        steps += routed.steps
        idle += 1
        if routed.score() < best.score():
            best, kept, idle = routed, order, 0
    best.steps = steps
    return best


def _patience(plan: Plan, best: Routed) -> int:
    """How many orders to try in vain: fewer where only crossings are left, and in large diagrams."""
    only_crossings = best.score()[:3] == (0, 0, 0)
    return max(2, (TRIES_FOR_CROSSINGS if only_crossings else TRIES) // (1 + len(plan.wires) // 8))


def _other_orders(best: Routed, kept: Order) -> Iterator[Order]:
    """The order kept so far with one troublesome wire moved to its beginning or its end."""
    first, last = kept
    for wire in best.unrouted + best.unset:
        yield (wire, *(other for other in first if other != wire)), last
    for wire in best.hit + best.crossed:
        yield first, (*(other for other in last if other != wire), wire)
    for wire in best.hit + best.crossed:
        yield (wire, *(other for other in first if other != wire)), last
