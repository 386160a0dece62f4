"""`flowgraph emit`: a diagram as program text."""

from __future__ import annotations

import argparse
import json

from flowgraph.cli.files import add_file_argument, one_diagram, refuse_overwriting, tell

HELP = "the diagram as a program: a Python class with initialised cells"


def configure(parser: argparse.ArgumentParser) -> None:
    """The options of this command."""
    add_file_argument(parser)
    parser.add_argument("--to", choices=["python"], required=True, help="the language of the program")
    parser.add_argument("-o", "--output", metavar="PROGRAM", help="write to this file instead of standard output")


def execute(options: argparse.Namespace) -> int:
    """Prints or writes the program of one diagram."""
    from flowgraph.emit.print_python import print_python, python_class_name
    from flowgraph.schedule.schedule import schedule
    from flowgraph.source.diagnostic import Refused
    from flowgraph.source.whole_file import whole_file

    diagram = one_diagram(options)
    try:
        text = print_python(diagram, schedule(diagram))
    except Refused as refused:
        tell(refused.diagnostics)
        return 1
    if options.output is not None:
        refuse_overwriting(options.files, options.output)
        with whole_file(options.output) as place:
            place.write_text(text, encoding="utf-8", newline="\n")
    if options.json:
        told = {"name": diagram.name, "language": options.to, "class": python_class_name(diagram)}
        told |= {"text": text} if options.output is None else {"file": options.output}
        print(json.dumps(told, indent=2, ensure_ascii=False))
    elif options.output is None:
        print(text, end="")
    return 0
