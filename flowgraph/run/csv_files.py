"""Recordings as CSV text: a first line that names the columns, then one row a sample."""

from __future__ import annotations

import csv
from array import array
from collections.abc import Iterable, Iterator, Sequence
from math import isfinite

import numpy as np

from flowgraph.run.recording import Column, Recording, RecordingError, shown

ROWS_AT_ONCE = 65536


def read_csv(path: str) -> Recording:
    """The columns of a CSV file, separated by comma, semicolon or tab; each number the nearest double.

    Empty lines and lines that begin with # are left out. Raises RecordingError with the line of the
    first fault, or OSError.
    """
    with open(path, encoding="utf-8-sig", newline="") as file:
        try:
            return _read(path, file)
        except UnicodeDecodeError as error:
            raise RecordingError(f"{path}: this is no text in UTF-8, so no CSV file") from error


def _read(path: str, file: Iterable[str]) -> Recording:
    rows = _rows(path, file)
    first, names = next(rows, (0, []))
    if not names:
        raise RecordingError(f"{path}: the file is empty; its first line should name the columns")
    _check_names(f"{path}:{first}", names)
    columns = [array("d") for _ in names]
    for line, row in rows:
        if len(row) != len(names):
            raise RecordingError(f"{path}:{line}: {len(row)} values, but the first line names {len(names)} columns")
        for name, column, cell in zip(names, columns, row, strict=True):
            column.append(_number(path, line, name, cell))
    if not columns[0]:
        raise RecordingError(f"{path}: the first line names columns, but no row follows")
    return Recording(path, [np.frombuffer(column, dtype=np.float64) for column in columns], tuple(names))


def _rows(path: str, file: Iterable[str]) -> Iterator[tuple[int, list[str]]]:
    """The cells of every line that holds any, with the number of the line; the first decides the separator."""
    separator = ""
    for line, text in enumerate(file, 1):
        if not text.strip() or text.startswith("#"):
            continue
        separator = separator or next((sign for sign in ";,\t" if sign in text), ",")
        try:
            row = next(csv.reader([text], delimiter=separator, skipinitialspace=True))
        except csv.Error as error:
            raise RecordingError(f"{path}:{line}: this line cannot be read as CSV ({error})") from error
        yield line, [cell.strip() for cell in row]


def _check_names(place: str, names: list[str]) -> None:
    """The first line holds names, each once."""
    known: set[str] = set()
    for at, name in enumerate(names, 1):
        if not name:
            raise RecordingError(f"{place}: column {at} has no name")
        if _is_number(name):
            raise RecordingError(f"{place}: {shown(name)} is a number; the first line should name the columns")
        if name in known:
            raise RecordingError(f"{place}: two columns are named {shown(name)}")
        known.add(name)


def _is_number(text: str) -> bool:
    try:
        float(text)
    except ValueError:
        return False
    return True


def _number(path: str, line: int, name: str, cell: str) -> float:
    """The double nearest to a decimal number; neither NaN nor infinite."""
    try:
        value = float(cell)
    except ValueError as error:
        mend = "; write a decimal point" if "," in cell and _is_number(cell.replace(",", ".", 1)) else ""
        fault = f"{shown(cell)} is no number" if cell else "there is no value"
        raise RecordingError(f"{path}:{line}: {fault} (column {shown(name)}){mend}") from error
    if not isfinite(value):
        raise RecordingError(f"{path}:{line}: {shown(cell)} is no finite number (column {shown(name)})")
    return value


def write_csv(path: str, names: Sequence[str], columns: Sequence[Column]) -> None:
    """Writes a line of names and one row a sample; every number reads back as the same double."""
    with open(path, "w", encoding="utf-8", newline="\n") as file:
        file.write(",".join(names) + "\n")
        for start in range(0, len(columns[0]), ROWS_AT_ONCE):
            block = [column[start : start + ROWS_AT_ONCE].tolist() for column in columns]
            file.writelines(",".join(map(repr, row)) + "\n" for row in zip(*block, strict=True))
