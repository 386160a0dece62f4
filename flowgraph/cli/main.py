"""`flowgraph`: finds the command, runs it, and turns what goes wrong into an exit code.

Exit codes: 0 all holds, 1 something refuted or an error found, 2 a file or option that cannot be
read or used, 3 undecided and nothing refuted.
"""

from __future__ import annotations

import argparse
import gc
import importlib
import os
import sys
from collections.abc import Sequence
from io import TextIOWrapper

from flowgraph.cli.stop import Stop

COMMANDS = {
    "check": "findings as file:line:column with the mend; delay-free loops with their path",
    "verify": "each claim proved, refuted or undecided",
    "analyse": "difference equation, transfer function, poles, zeros, stability, hidden modes",
    "reduce": "rewrite passes, each step proved; the reduced diagram as text again",
    "schedule": "ordered operations of one sample, cells and operation counts",
    "draw": "SVG or PNG; --reduced shows before and after on one page",
    "run": "a recording (CSV or WAV) through the diagram",
    "emit": "the diagram as a program",
}


def main(arguments: Sequence[str] | None = None) -> int:
    """Runs one command; `arguments` are those of the shell when None."""
    given = list(sys.argv[1:] if arguments is None else arguments)
    # A command makes large trees without cycles and ends; the collector would only walk them again.
    gc.disable()
    _set_up_streams()
    try:
        return _run(given)
    except Stop as stop:
        return stop.code
    except KeyboardInterrupt:
        print("stopped", file=sys.stderr)
        return 130
    except BrokenPipeError:
        # Whoever read our output has left; nothing more can be said there, not even at exit.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return 0
    except MemoryError:
        print("error: this needs more memory than there is", file=sys.stderr)
        return 2
    except OSError as error:
        place = "" if error.filename is None else f"{error.filename or 'an empty name'}: "
        print(f"error: {place}{error.strerror or error}", file=sys.stderr)
        return 2


def _set_up_streams() -> None:
    """The same bytes whatever the locale, and names of files that are no UTF-8 written with escapes.

    Where the shell closed a stream, what would go there goes nowhere.
    """
    sys.stdout = sys.stdout or open(os.devnull, "w")  # noqa: SIM115  # open to the end of the process
    sys.stderr = sys.stderr or open(os.devnull, "w")  # noqa: SIM115
    for stream in (sys.stdout, sys.stderr):
        if isinstance(stream, TextIOWrapper):
            stream.reconfigure(encoding="utf-8", errors="backslashreplace")


def _run(given: list[str]) -> int:
    parser = argparse.ArgumentParser(
        prog="flowgraph",
        description="Checks, proves, reduces, schedules, draws and runs block diagrams of signal chains.",
        epilog="An aid for a qualified engineer, no certified tool. `flowgraph COMMAND --help` tells more.",
    )
    commands = parser.add_subparsers(dest="command", metavar="COMMAND", required=True)
    # Only the command that is asked for is imported, so that --help and check answer at once.
    asked = next((word for word in given if word in COMMANDS), None)
    for name, tells in COMMANDS.items():
        describes = tells[0].upper() + tells[1:] + "."
        command = commands.add_parser(name, help=tells, description=describes, allow_abbrev=False)
        if name == asked:
            module = importlib.import_module(f"flowgraph.cli.{name}")
            module.configure(command)
            command.set_defaults(execute=module.execute)
    options = parser.parse_args(given)
    code = options.execute(options)
    sys.stdout.flush()
    return int(code)


if __name__ == "__main__":
    sys.exit(main())
