"""The end of a command before its work is done; what had to be said has been said."""

from __future__ import annotations


class Stop(Exception):
    """Ends the command with an exit code."""

    def __init__(self, code: int) -> None:
        super().__init__(code)
        self.code = code
