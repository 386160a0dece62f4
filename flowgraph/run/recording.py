"""Recorded signals: one column of doubles a port, from CSV or WAV and back."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction

import numpy as np
from numpy.typing import NDArray

Column = NDArray[np.float64]


class RecordingError(Exception):
    """A recording that cannot be used; the message names the file, and the row where there is one."""


@dataclass(frozen=True, slots=True)
class Recording:
    """Columns of equal length, all finite. `names` is None where the file does not name them (WAV)."""

    file: str
    columns: Sequence[Column]
    names: tuple[str, ...] | None = None
    rate: Fraction | None = None


def read_recording(path: str) -> Recording:
    """The recording in a .csv or .wav file. Raises RecordingError, or OSError where it cannot be opened."""
    match kind_of(path):
        case "csv":
            from flowgraph.run.csv_files import read_csv

            return read_csv(path)
        case _:
            from flowgraph.run.wav_files import read_wav

            return read_wav(path)


def kind_of(path: str) -> str:
    """csv or wav, by the end of the name. Raises RecordingError for any other."""
    kind = path.rpartition(".")[2].lower()
    if kind not in ("csv", "wav"):
        raise RecordingError(f"{path}: recordings are .csv or .wav files, and this name ends in neither")
    return kind


def columns_for(inputs: Sequence[str], diagram: str, recording: Recording) -> list[Column]:
    """The columns of a recording in the order of the inputs of a diagram, each used once.

    Named columns go to the input of their name, others in the order of the file. Raises
    RecordingError that names the missing and the further columns.
    """
    wanted = f"{diagram} has {_counted(len(inputs), 'input')}: {_listed(inputs)}"
    if recording.names is None:
        if len(recording.columns) != len(inputs):
            channels = _counted(len(recording.columns), "channel")
            raise RecordingError(f"{recording.file}: the recording has {channels}; {wanted}")
        return list(recording.columns)
    by_name = dict(zip(recording.names, recording.columns, strict=True))
    missing = [name for name in inputs if name not in by_name]
    further = [name for name in recording.names if name not in inputs]
    faults = [f"no column {_listed(missing)}"] if missing else []
    faults += [f"no input for the column {_listed(further)}"] if further else []
    if faults:
        raise RecordingError(f"{recording.file}: {' and '.join(faults)}; {wanted}")
    return [by_name[name] for name in inputs]


def rate_of_run(diagram: str, rate: Fraction | None, recording: Recording) -> Fraction | None:
    """The sample rate that diagram and recording agree on; None where neither has one."""
    if rate is not None and recording.rate is not None and rate != recording.rate:
        raise RecordingError(
            f"{recording.file}: recorded at {_hertz(recording.rate)}, but {diagram} works at {_hertz(rate)}; "
            "resample the recording or change the line `rate`"
        )
    return recording.rate if rate is None else rate


def _hertz(rate: Fraction) -> str:
    return f"{rate.numerator if rate.denominator == 1 else float(rate)} Hz"


def _counted(number: int, word: str) -> str:
    return f"{number} {word}" if number == 1 else f"{number} {word}s"


def _listed(names: Sequence[str]) -> str:
    """The first names of a list, for a message."""
    return ", ".join([shown(name) for name in names[:8]] + [".."] * (len(names) > 8))


def shown(text: str) -> str:
    """A short piece of a file as it can be printed in a message."""
    cut = text[:40] + (".." if len(text) > 40 else "")
    return "".join(letter if letter.isprintable() else "?" for letter in cut)
