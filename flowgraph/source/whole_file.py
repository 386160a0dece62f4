"""Output files that appear whole or not at all."""

from __future__ import annotations

import errno
import os
from collections.abc import Iterator
from contextlib import contextmanager, suppress
from pathlib import Path


@contextmanager
def whole_file(path: str) -> Iterator[Path]:
    """A place beside `path` to write to, moved onto `path` at the end and removed if anything goes wrong.

    The place ends in the same letters as `path`, for writers that look at them. Links are followed;
    what is no plain file, such as a terminal or a pipe, is written directly. Raises OSError at once
    where the folder is missing or closed.
    """
    if not os.path.basename(path):
        raise IsADirectoryError(errno.EISDIR, "Is a directory", path)
    target = Path(os.path.realpath(path))
    if target.is_dir():
        raise IsADirectoryError(errno.EISDIR, "Is a directory", path)
    if target.exists() and not target.is_file():
        yield target
        return
    beside = target.with_name(f".{target.stem[:100]}.{os.getpid()}{target.suffix}")
    try:
        try:
            beside.touch()
        except OSError as error:
            raise type(error)(error.errno, error.strerror, path) from error
        yield beside
        beside.replace(target)
    finally:
        with suppress(OSError):
            beside.unlink(missing_ok=True)
