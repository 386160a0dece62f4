"""`flowgraph reduce`: the same behaviour with fewer cells and operations, every step proved."""

from __future__ import annotations

import argparse
import json
import sys
from typing import TYPE_CHECKING

from flowgraph.cli.files import add_file_argument, one_diagram, refuse_overwriting
from flowgraph.cli.stop import Stop

if TYPE_CHECKING:
    from flowgraph.diagram.diagram import Counts, Diagram
    from flowgraph.passes.reduce import BrokenPassError, Reduction, Step

HELP = "rewrite passes, each step proved; the reduced diagram as text again"


def configure(parser: argparse.ArgumentParser) -> None:
    """The options of this command."""
    add_file_argument(parser)
    parser.add_argument("-o", dest="output", metavar="OUT.sfg", help="write the reduced diagram there instead")
    parser.add_argument("--steps", action="store_true", help="print the diagram after each step")


def execute(options: argparse.Namespace) -> int:
    """Reduces one diagram and tells each step; refuses a diagram with findings."""
    from flowgraph.algebra.rational_functions import Undefined
    from flowgraph.passes.reduce import BrokenPassError, reduce_diagram
    from flowgraph.source.whole_file import whole_file
    from flowgraph.text.printer import print_file

    diagram = one_diagram(options)
    if options.output is not None:
        refuse_overwriting([*options.files, *_files_of(diagram)], options.output)
    try:
        reduction = reduce_diagram(diagram)
    except Undefined as undefined:
        print(f"error: {diagram.name}: {undefined}", file=sys.stderr)
        raise Stop(1) from undefined
    except BrokenPassError as broken:
        _tell_broken(broken)
        raise Stop(2) from broken
    text = print_file(reduction.after)
    if options.output is not None:
        with whole_file(options.output) as place:
            place.write_text(text, encoding="utf-8", newline="\n")
    if options.json:
        print(json.dumps(_as_json(reduction, text), indent=2, ensure_ascii=False))
        return 0
    print("\n".join(_told(reduction, steps=options.steps)))
    if options.output is None:
        print()
        print(text, end="")
    return 0


def _files_of(diagram: Diagram) -> list[str]:
    """The files that the diagram and all it uses come from."""
    files: dict[str, None] = {}
    seen: set[str] = set()
    waiting = [diagram]
    while waiting:
        drawn = waiting.pop()
        if drawn.name not in seen:
            seen.add(drawn.name)
            files[drawn.span.file] = None
            waiting.extend(use.diagram for use in drawn.uses)
    return list(files)


def _told(reduction: Reduction, *, steps: bool) -> list[str]:
    """Counts, steps and merged cells, a line each."""
    before, after = (_counts(counts) for counts in reduction.counts())
    name = reduction.before.name
    width = max(len(name), 16)  # names have at most 64 letters, so that this stays within 80 columns
    lines = [f"{name:<{width}}{'before':>8}{'after':>8}"]
    lines += [f"{f'  {what}':<{width}}{before[what]:>8}{after[what]:>8}" for what in before]
    if not reduction.steps:
        return [*lines, "", "nothing to save"]
    for number, step in enumerate(reduction.steps, start=1):
        lines += ["", *_step_lines(number, step, with_diagram=steps)]
    merged = [
        line
        for into, cells in _merged_cells(reduction).items()
        for line in _wrapped(f"  {', '.join(cells)} -> {into}", "      ")
    ]
    return [*lines, "", "cells that became one", *merged] if merged else lines


def _step_lines(number: int, step: Step, *, with_diagram: bool) -> list[str]:
    from textwrap import indent, wrap

    from flowgraph.passes.reduce import tidied
    from flowgraph.text.printer import print_diagram

    lines = _wrapped(f"{number}. {step.name}: {step.message}", "   ")
    lines += wrap(step.law, 77, initial_indent="   law    ", subsequent_indent="          ")
    lines.append(f"   proof  {step.proof}")
    if with_diagram:
        lines += ["", indent(print_diagram(tidied(step.after)), "   ").rstrip("\n")]
    return lines


def _wrapped(text: str, indent: str) -> list[str]:
    """The text in lines of at most 80 letters; `line[1 .. 8]` is never torn apart."""
    from textwrap import wrap

    whole = text.replace(" .. ", "\0..\0")
    lines = wrap(whole, 80, subsequent_indent=indent, break_long_words=False, break_on_hyphens=False)
    return [line.replace("\0..\0", " .. ") for line in lines]


def _merged_cells(reduction: Reduction) -> dict[str, list[str]]:
    """For each cell, or run of neighbouring cells, that two or more became: those, in the order of the file."""
    from flowgraph.passes.carried import shared
    from flowgraph.passes.wording import signal_text

    return {
        signal_text(found.image, reduction.after, found.cells): [
            signal_text(source, reduction.before, found.cells) for source in found.sources
        ]
        for found in shared(reduction.carried())
    }


def _as_json(reduction: Reduction, text: str) -> dict[str, object]:
    before, after = reduction.counts()
    steps = [
        {
            "pass": step.name,
            "law": step.law,
            "message": step.message,
            "proof": step.proof.method,
            "error_below": step.proof.error_below,
            "keeps_rounding": step.proof.keeps_rounding,
        }
        for step in reduction.steps
    ]
    merged = [{"cells": cells, "into": into} for into, cells in _merged_cells(reduction).items()]
    return {
        "name": reduction.before.name,
        "before": _counts(before),
        "after": _counts(after),
        "steps": steps,
        "merged": merged,
        "text": text,
    }


def _counts(counts: Counts) -> dict[str, int]:
    return {"cells": counts.cells, "multiplies": counts.multiplies, "adds": counts.adds}


def _tell_broken(broken: BrokenPassError) -> None:
    """Names the pass and shows both diagrams: a fault of this program, never of the diagram."""
    print(f"error: internal fault, nothing was written: {broken}", file=sys.stderr)
    print("please report it together with these two diagrams", file=sys.stderr)
    for when, diagram in (("before", broken.before), ("after", broken.after)):
        print(f"\n# {when} {broken.name}\n{_even_if_broken(diagram)}", file=sys.stderr)


def _even_if_broken(diagram: Diagram) -> str:
    """The text of a diagram; one that reads what is not there has none, and is shown element by element."""
    from flowgraph.text.printer import print_diagram

    try:
        return print_diagram(diagram)
    except LookupError:
        return "\n".join(repr(element) for element in diagram.elements.values())
