"""One recording through one diagram, from file to file."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from fractions import Fraction

from flowgraph.diagram.diagram import Diagram
from flowgraph.run.compute import compute, first_not_finite
from flowgraph.run.csv_files import write_csv
from flowgraph.run.recording import (
    Column,
    RecordingError,
    columns_for,
    kind_of,
    rate_of_run,
    read_recording,
)
from flowgraph.run.wav_files import whole_rate, write_wav
from flowgraph.source.whole_file import whole_file


@dataclass(frozen=True, slots=True)
class Ran:
    """What a run did: samples computed, ports, the rate in hertz, and outputs that stopped being numbers.

    `not_finite` gives each output that became NaN or infinite with the first such sample.
    """

    file: str
    samples: int
    inputs: tuple[str, ...]
    outputs: tuple[str, ...]
    rate: Fraction | None
    not_finite: tuple[tuple[str, int], ...]


def run_recording(diagram: Diagram, source: str, target: str, progress: Callable[[float], None]) -> Ran:
    """Runs `diagram` on the recording `source` and writes its outputs to `target`, whole or not at all.

    A diagram without inputs takes a number of samples for `source`. Raises RecordingError or OSError
    for files that cannot be used, Refused or DelayFreeLoopError for a diagram that cannot be computed.
    """
    kind = kind_of(target)
    inputs = tuple(port.name for port in diagram.inputs())
    columns, samples, rate = _taken(diagram, inputs, source)
    if kind == "wav":
        whole_rate(target, rate)
    with whole_file(target) as place:
        results = compute(diagram, columns, samples, progress)
        if kind == "wav":
            write_wav(str(place), rate, results)
        else:
            write_csv(str(place), list(diagram.outputs), results)
    found = [(name, first_not_finite(column)) for name, column in zip(diagram.outputs, results, strict=True)]
    not_finite = tuple((name, at) for name, at in found if at is not None)
    return Ran(target, samples, inputs, tuple(diagram.outputs), rate, not_finite)


def _taken(diagram: Diagram, inputs: tuple[str, ...], source: str) -> tuple[list[Column], int, Fraction | None]:
    """The input columns, the number of samples and the rate of a run."""
    if inputs:
        recording = read_recording(source)
        columns = columns_for(inputs, diagram.name, recording)
        return columns, len(columns[0]), rate_of_run(diagram.name, diagram.rate, recording)
    if not source.isdecimal() or not 0 < int(source[:12]) <= 10**9:
        raise RecordingError(f"{source}: {diagram.name} has no input; give a number of samples in place of a recording")
    return [], int(source), diagram.rate
