"""`flowgraph run`: a recording through a diagram."""

from __future__ import annotations

import argparse
import json
import sys
from typing import TYPE_CHECKING

from flowgraph.cli.files import add_file_argument, one_diagram, refuse, refuse_overwriting, tell
from flowgraph.cli.progress import progress_bar

if TYPE_CHECKING:
    from flowgraph.run.run_recording import Ran

HELP = "a recording (CSV or WAV) through the diagram, in double precision"


def configure(parser: argparse.ArgumentParser) -> None:
    """The options of this command."""
    add_file_argument(parser)
    parser.add_argument("source", metavar="IN", help="recording, .csv or .wav; without inputs the number of samples")
    parser.add_argument("target", metavar="OUT", help="where the outputs go, .csv or .wav")


def execute(options: argparse.Namespace) -> int:
    """Runs one recording, and says what was done."""
    from flowgraph.run.recording import RecordingError
    from flowgraph.run.run_recording import run_recording
    from flowgraph.source.diagnostic import Refused

    diagram = one_diagram(options, "claims")
    refuse_overwriting([*options.files, options.source], options.target)
    try:
        ran = run_recording(diagram, options.source, options.target, progress_bar(options.source))
    except Refused as refused:
        tell(refused.diagnostics)
        return 1
    except RecordingError as error:
        refuse(str(error))
    for name, sample in ran.not_finite:
        print(f"warning: {name} is NaN or infinite, first at sample {sample}", file=sys.stderr)
    if options.json:
        print(json.dumps(_told(ran), indent=2, ensure_ascii=False))
    else:
        print(_sentence(ran))
    return 0


def _sentence(ran: Ran) -> str:
    samples = "1 sample" if ran.samples == 1 else f"{ran.samples} samples"
    lasting = "" if ran.rate is None else f" ({float(ran.samples / ran.rate):.6g} s)"
    return f"{ran.file}: {samples}{lasting} of {', '.join(ran.outputs)}"


def _told(ran: Ran) -> dict[str, object]:
    """The run as JSON: the rate in hertz, or null where nothing states one."""
    rate = ran.rate
    return {
        "samples": ran.samples,
        "inputs": list(ran.inputs),
        "outputs": list(ran.outputs),
        "rate": None if rate is None else rate.numerator if rate.denominator == 1 else float(rate),
        "file": ran.file,
        "not_finite": [{"output": name, "sample": sample} for name, sample in ran.not_finite],
    }
