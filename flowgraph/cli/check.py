"""`flowgraph check`: every finding with its place and its mend, or a line that says all is well."""

from __future__ import annotations

import argparse
import json

from flowgraph.cli.files import add_file_arguments, refuse, split_name
from flowgraph.cli.findings import finding_told
from flowgraph.diagram.diagram import Diagram, count
from flowgraph.source.diagnostic import Diagnostic
from flowgraph.source.render import render
from flowgraph.text.load import load

HELP = "findings as file:line:column with the mend; delay-free loops with their path"


def configure(parser: argparse.ArgumentParser) -> None:
    """The options of this command."""
    add_file_arguments(parser)


def execute(options: argparse.Namespace) -> int:
    """Prints the findings of every file; 1 if one of them is an error, else 0."""
    if options.values:
        refuse("check looks at the structure, which no value changes: --with goes with verify, analyse and the others")
    findings: list[Diagnostic] = []
    diagrams: list[tuple[str, Diagram]] = []
    for path, names in _by_file(options.files).items():
        loaded = load(path, library=options.library)
        findings.extend(loaded.findings)
        known = [diagram.name for diagram in loaded.diagrams]
        missing = [name for name in names if name not in known]
        if missing and not loaded.findings:
            refuse(f"{path}: there is no diagram {missing[0]} here (there are: {', '.join(known) or 'none'})")
        diagrams.extend((path, diagram) for diagram in loaded.diagrams if not names or diagram.name in names)
    if options.json:
        print(json.dumps({"findings": [finding_told(found) for found in findings]}, indent=2, ensure_ascii=False))
    else:
        _print(findings, diagrams)
    return 1 if any(found.severity == "error" for found in findings) else 0


def _by_file(arguments: list[str]) -> dict[str, list[str]]:
    """The files in the order given, each with the diagrams named in it; none stands for all."""
    files: dict[str, list[str]] = {}
    for argument in arguments:
        path, name = split_name(argument)
        names = files.setdefault(path, [])
        if name is not None:
            names.append(name)
    return files


def _print(findings: list[Diagnostic], diagrams: list[tuple[str, Diagram]]) -> None:
    """Findings first, then one line that counts them, or one for each diagram that is well."""
    for found in findings:
        print(render(found), end="\n\n")
    errors = sum(found.severity == "error" for found in findings)
    warnings = len(findings) - errors
    if findings:
        told = [_counted(errors, "error")] * bool(errors) + [_counted(warnings, "warning")] * bool(warnings)
        print(", ".join(told))
    if not errors:
        for path, diagram in diagrams:
            counts = count(diagram)
            size = f"{_counted(len(diagram.elements), 'element')}, {_counted(counts.cells, 'cell')}"
            print(f"{path}: {diagram.name} is well formed ({size}, {_counted(len(diagram.claims), 'claim')})")


def _counted(number: int, what: str) -> str:
    return f"{number} {what}" if number == 1 else f"{number} {what}s"
