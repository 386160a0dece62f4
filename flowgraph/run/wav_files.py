"""Recordings as WAV sound: one channel a port. Integers become fractions of full scale."""

from __future__ import annotations

import os
import struct
import warnings
from collections.abc import Sequence
from fractions import Fraction
from typing import TypeAlias

import numpy as np
from numpy.typing import NDArray

from flowgraph.run.recording import Column, Recording, RecordingError

Samples: TypeAlias = (
    NDArray[np.uint8] | NDArray[np.int16] | NDArray[np.int32] | NDArray[np.float32] | NDArray[np.float64]
)


def read_wav(path: str) -> Recording:
    """The channels of a WAV file with 8 to 32 bit integers (scaled to -1 .. 1) or floats, and its rate.

    Raises RecordingError where the header is broken, samples are missing or one is not finite, or OSError.
    """
    from scipy.io import wavfile

    _check_complete(path)
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore", wavfile.WavFileWarning)  # chunks beside the samples
            rate, samples = wavfile.read(path)
    except ValueError as error:
        raise RecordingError(f"{path}: this cannot be read as a WAV file ({error})") from error
    except (ArithmeticError, struct.error, EOFError, UnboundLocalError) as error:
        raise RecordingError(f"{path}: this cannot be read as a WAV file (its header contradicts itself)") from error
    if samples.size == 0 or rate <= 0:
        raise RecordingError(f"{path}: the recording holds no samples")
    table = samples.reshape(len(samples), -1)
    columns = [_scaled(table[:, channel]) for channel in range(table.shape[1])]
    for channel, column in enumerate(columns, 1):
        wrong = np.flatnonzero(~np.isfinite(column))
        if wrong.size:
            raise RecordingError(f"{path}: sample {wrong[0]} of channel {channel} is {column[wrong[0]]}, no number")
    return Recording(path, columns, None, Fraction(int(rate)))


def _check_complete(path: str) -> None:
    """Each chunk must be as long as it says (RIFF: four letters, a length, the contents, padded to even)."""
    size = os.path.getsize(path)
    with open(path, "rb") as file:
        head = file.read(12)
        if not head:
            raise RecordingError(f"{path}: the file is empty")
        if head[:4] != b"RIFF":
            return
        at = 12
        while at + 8 <= size:
            file.seek(at)
            name, length = struct.unpack("<4sI", file.read(8))
            at += 8
            if at + length > size:
                what = "samples" if name == b"data" else "header"
                raise RecordingError(
                    f"{path}: the file is cut off: {what} of {length} bytes announced, {size - at} there"
                )
            at += length + length % 2


def _scaled(channel: Samples) -> Column:
    """Samples as doubles. Unsigned bytes have 128 in the middle; 24 bits come as the upper part of 32."""
    if channel.dtype.kind == "f":
        return channel.astype(np.float64)
    if channel.dtype.kind == "u":
        middle = 2.0 ** (8 * channel.dtype.itemsize - 1)
        return (channel.astype(np.float64) - middle) / middle
    return channel.astype(np.float64) / 2.0 ** (8 * channel.dtype.itemsize - 1)


def write_wav(path: str, rate: Fraction | None, columns: Sequence[Column]) -> None:
    """Writes doubles as 64 bit float samples, one channel a column; `rate` in whole hertz.

    Raises RecordingError where there is no rate that a WAV file could state.
    """
    from scipy.io import wavfile

    wavfile.write(path, whole_rate(path, rate), np.column_stack(columns))


def whole_rate(path: str, rate: Fraction | None) -> int:
    """The rate as WAV files state it: a whole number of hertz."""
    if rate is None:
        raise RecordingError(f"{path}: a WAV file needs a sample rate; add a line such as `rate 48 kHz` to the diagram")
    if rate.denominator != 1 or rate >= 2**32:
        raise RecordingError(f"{path}: a WAV file states its rate in whole hertz, and {float(rate)} Hz is none")
    return rate.numerator
