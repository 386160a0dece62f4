"""Columns: difference constraints between groups of spots, solved by longest paths.

A group is what shares a column: a tap with its column of delays, an adder with the circles below
it. Constraints come one at a time, the forward path first; one that would close a cycle is dropped.
"""

from __future__ import annotations

from collections import deque


class Columns:
    """Groups, and constraints `column(right) >= column(left) + width` between them."""

    def __init__(self) -> None:
        self._leader: list[int] = []
        self._after: dict[int, dict[int, int]] = {}

    def new_group(self) -> int:
        self._leader.append(len(self._leader))
        return len(self._leader) - 1

    def group(self, member: int) -> int:
        """The group that a group has become part of."""
        while self._leader[member] != member:
            self._leader[member] = self._leader[self._leader[member]]
            member = self._leader[member]
        return member

    def join(self, one: int, other: int) -> None:
        """Make two groups one; only before the first constraint."""
        one, other = self.group(one), self.group(other)
        if one != other:
            self._leader[max(one, other)] = min(one, other)

    def require(self, left: int, right: int, width: int) -> bool:
        """Add a constraint unless it contradicts the earlier ones; says whether it holds now."""
        left, right = self.group(left), self.group(right)
        if left == right or self._leads(right, left):
            return False
        known = self._after.setdefault(left, {})
        known[right] = max(width, known.get(right, 0))
        return True

    def _leads(self, start: int, goal: int) -> bool:
        waiting, seen = [start], {start}
        while waiting:
            for following in self._after.get(waiting.pop(), ()):
                if following == goal:
                    return True
                if following not in seen:
                    seen.add(following)
                    waiting.append(following)
        return False

    def solve(self) -> list[int]:
        """A column for every group: the mean of the leftmost and the rightmost solution, from 0 on."""
        groups = sorted({self.group(member) for member in range(len(self._leader))})
        count = dict.fromkeys(groups, 0)
        for after in self._after.values():
            for right in after:
                count[right] += 1
        ready = deque(group for group in groups if not count[group])
        order: list[int] = []
        leftmost = dict.fromkeys(groups, 0)
        while ready:
            group = ready.popleft()
            order.append(group)
            for right, width in self._after.get(group, {}).items():
                leftmost[right] = max(leftmost[right], leftmost[group] + width)
                count[right] -= 1
                if not count[right]:
                    ready.append(right)
        last = max(leftmost.values(), default=0)
        rightmost = dict.fromkeys(groups, last)
        for group in reversed(order):
            for right, width in self._after.get(group, {}).items():
                rightmost[group] = min(rightmost[group], rightmost[right] - width)
        middle = {group: (leftmost[group] + rightmost[group]) // 2 for group in groups}
        return [middle[self.group(member)] for member in range(len(self._leader))]
