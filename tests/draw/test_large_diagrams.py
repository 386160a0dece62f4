"""Diagrams larger than a page: drawn with parts left out, or refused in words, never a hang."""

from __future__ import annotations

import pytest
from board import board
from named import fir

from flowgraph.draw.draw import MOST_PARTS, TooLarge, draw_picture


def test_too_many_symbols_are_refused_with_the_way_out() -> None:
    """The error names both numbers and what to draw instead."""
    lines = [
        f"adder a{at} = {'x' if at == 0 else f'a{at - 1}'} + c{at}*d{at}; delay d{at} = a{at}" for at in range(2000)
    ]
    with pytest.raises(TooLarge) as refused:
        draw_picture(board("long", "input x", *lines, "output y = a1999"))
    assert str(refused.value) == (
        f"diagram long has 4002 symbols; a drawing shows {MOST_PARTS} at most. "
        "Draw the diagrams it uses one by one, as FILE:NAME"
    )


def test_fir_of_any_length_fits_the_page() -> None:
    """Three thousand taps make the same picture as sixty-four, with another number in it."""
    picture = draw_picture(fir(3000))
    assert [label.text for label in picture.labels if label.role == "note"] == ["2993 taps not drawn"]
    assert picture.connectors == ()
