"""`flowgraph schedule`: the order in which one sample is computed."""

from __future__ import annotations

import argparse
import json

from flowgraph.cli.files import add_file_argument, one_diagram

HELP = "ordered operations of one sample, cells and operation counts"


def configure(parser: argparse.ArgumentParser) -> None:
    """The options of this command."""
    add_file_argument(parser)


def execute(options: argparse.Namespace) -> int:
    """Prints the schedule of one diagram."""
    from flowgraph.schedule.schedule import schedule
    from flowgraph.schedule.table import schedule_table, signal_text

    diagram = one_diagram(options, "claims")
    found = schedule(diagram)
    if not options.json:
        print(schedule_table(diagram, found), end="")
        return 0
    counts = {"multiplies": found.counts.multiplies, "adds": found.counts.adds, "cells": found.counts.cells}
    operations = [
        {
            "name": operation.name,
            "kind": operation.kind,
            "reads": [signal_text(diagram, signal) for signal in operation.reads],
        }
        for operation in found.operations
    ]
    told = {"name": diagram.name, "counts": counts, "operations": operations}
    print(json.dumps(told, indent=2, ensure_ascii=False))
    return 0
