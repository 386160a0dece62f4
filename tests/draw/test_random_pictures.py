"""Diagrams nobody drew before: always correct, and mostly as good as the named ones."""

from __future__ import annotations

import pytest
from quality import CORRECT, faults
from random_boards import random_board

from flowgraph.draw.draw import draw_picture


@pytest.mark.parametrize(
    ("size", "seed"), [(6, seed) for seed in range(8)] + [(9, 0), (9, 1), (9, 2), (9, 4), (12, 0), (12, 1)]
)
def test_random_diagram_reads_back_as_itself(size: int, seed: int) -> None:
    """Every wire is drawn (or named at both ends), none through a symbol, no two nets share a segment."""
    diagram = random_board(size, seed)
    assert faults(draw_picture(diagram), diagram, CORRECT) == []


def test_small_random_diagrams_meet_the_whole_bar() -> None:
    """Of six elements wired at random, the pictures are as good as those of textbooks."""
    fallen = {seed: faults(draw_picture(random_board(6, seed)), random_board(6, seed)) for seed in range(12)}
    assert sum(not found for found in fallen.values()) >= 11
