"""The examples of README.md, run again: every shown file and every shown output must be what is there.

python tests/readme_examples.py        writes today's output into README.md
"""

from __future__ import annotations

import contextlib
import io
import os
import re
import shlex
import shutil
import tempfile
from pathlib import Path

from flowgraph.cli.main import main

ROOT = Path(__file__).parents[1]
README = ROOT / "README.md"
BLOCK = re.compile(r"^```(\w+)(?: (\S+))?\n(.*?)^```$", re.MULTILINE | re.DOTALL)


def refreshed(text: str) -> str:
    """The README with every example as it comes out today, run in a folder that holds only the samples."""
    with tempfile.TemporaryDirectory() as folder:
        shutil.copytree(ROOT / "samples", Path(folder) / "samples")
        with contextlib.chdir(folder):
            return BLOCK.sub(_block, text)


def _block(found: re.Match[str]) -> str:
    kind, path, body = found.groups()
    if kind == "sfg" and path is not None:
        place = Path(path)
        if place.exists():
            body = place.read_text("utf-8")
        else:
            place.write_text(body, "utf-8")
        return f"```{kind} {path}\n{body}```"
    if kind == "console":
        command = body.splitlines()[0].removeprefix("$ ")
        return f"```{kind}\n$ {command}\n{_output(command)}```"
    return found.group()


def _output(command: str) -> str:
    """What a command prints, errors included, as on a page of 80 columns without colour."""
    words = shlex.split(command)
    assert words[0] == "flowgraph"
    both = io.StringIO()
    os.environ["COLUMNS"] = "80"
    # --help ends in SystemExit, as argparse has it.
    with contextlib.redirect_stdout(both), contextlib.redirect_stderr(both), contextlib.suppress(SystemExit):
        main(words[1:])
    return both.getvalue()


if __name__ == "__main__":
    README.write_text(refreshed(README.read_text("utf-8")), "utf-8")
