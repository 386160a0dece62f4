"""A progress bar for work that takes longer than a second, on a terminal only."""

from __future__ import annotations

import sys
from collections.abc import Callable
from time import monotonic


def progress_bar(label: str) -> Callable[[float], None]:
    """A bar on standard error, on a terminal only and for work that takes longer than a second."""
    began = monotonic()
    shown = False

    def show(share: float) -> None:
        nonlocal shown
        if not sys.stderr.isatty() or (monotonic() - began < 1.0 and not shown):
            return
        shown = share < 1.0
        bar = "#" * round(40 * share)
        sys.stderr.write(f"\r{label[:24]} [{bar:<40}] {share:4.0%}" if shown else "\r" + " " * 80 + "\r")
        sys.stderr.flush()

    return show
