"""The diagrams a command works on: FILE, FILE:NAME or -, with values tried by --with."""

from __future__ import annotations

import argparse
import json
import os
import sys
from collections.abc import Iterable
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Literal, NoReturn

from flowgraph.cli.findings import finding_told
from flowgraph.cli.stop import Stop
from flowgraph.diagram.claim import DiagramIntent
from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.expression import Expression
from flowgraph.source.diagnostic import Diagnostic
from flowgraph.source.render import render
from flowgraph.text.load import Loaded, load
from flowgraph.text.read_value import read_value

FILE_HELP = "a diagram file, FILE:NAME for one diagram of it, - for standard input"

Tolerance = Literal["nothing", "claims", "loops"]
"""Which findings a command goes on after: none, those on claims alone, or delay-free loops as well."""


def add_file_arguments(parser: argparse.ArgumentParser) -> None:
    """Several FILEs, and the options that every command on diagrams has."""
    parser.add_argument("files", metavar="FILE", nargs="+", help=FILE_HELP)
    _add_options(parser)


def add_file_argument(parser: argparse.ArgumentParser) -> None:
    """One FILE, for commands that work on one diagram."""
    parser.add_argument("files", metavar="FILE", nargs=1, help=FILE_HELP)
    _add_options(parser)


def _add_options(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("--library", metavar="DIR", help="a folder that includes may also come from")
    parser.add_argument(
        "--with", dest="values", metavar="NAME=VALUE", action="append", default=[], help="try a value without editing"
    )
    parser.add_argument("--json", action="store_true", help="one JSON object instead of text")


@dataclass(frozen=True, slots=True)
class Chosen:
    """The diagrams a command works on.

    `included` names those that stand in an included file; `errors` says that an error was told which
    the command tolerates.
    """

    diagrams: list[Diagram]
    included: set[str]
    errors: bool


def choose(options: argparse.Namespace, tolerance: Tolerance = "nothing", *, every: bool = False) -> Chosen:
    """The diagrams named on the command line, at the values of --with.

    Of a FILE these are its diagrams that no other uses (with `every`, all of them and all those it
    includes). Findings are told; those not tolerated end the command with code 1, an unreadable file
    or an unknown name with code 2.
    """
    diagrams: list[Diagram] = []
    errors = False
    for argument in options.files:
        path, name = split_name(argument)
        loaded = load(path, library=options.library)
        tell(loaded.findings)
        errors = errors or any(found.severity == "error" for found in loaded.findings)
        if any(_stops(found, tolerance) for found in loaded.findings):
            if options.json:
                told = {"findings": [finding_told(found) for found in loaded.findings]}
                print(json.dumps(told, indent=2, ensure_ascii=False))
            raise Stop(1)
        if name is not None:
            diagrams.append(_named(loaded, name, path))
        else:
            diagrams.extend(loaded.diagrams if every else _used_by_none(loaded, path))
    if not diagrams:
        refuse(f"{', '.join(options.files)}: there is no diagram here")
    paths = {split_name(argument)[0] for argument in options.files}
    included = {diagram.name for diagram in diagrams if diagram.span.file not in paths}
    return Chosen(_with_values(diagrams, options.values), included, errors)


def chosen_diagrams(options: argparse.Namespace, tolerance: Tolerance = "nothing") -> list[Diagram]:
    """The diagrams that choose() finds."""
    return choose(options, tolerance).diagrams


def one_diagram(options: argparse.Namespace, tolerance: Tolerance = "nothing") -> Diagram:
    """The one diagram a command works on; if there are several, they are named and the command ends."""
    chosen = chosen_diagrams(options, tolerance)
    if len(chosen) != 1:
        names = ", ".join(diagram.name for diagram in chosen)
        refuse(f"there are {len(chosen)} diagrams here, name one as FILE:NAME ({names})")
    return chosen[0]


def split_name(argument: str) -> tuple[str, str | None]:
    """FILE:NAME as a path and a name; a path alone has no name. A colon inside the path is left alone."""
    path, colon, name = argument.rpartition(":")
    if colon and path and name.isidentifier() and not Path(argument).exists():
        return path, name
    return argument, None


def tell(findings: Iterable[Diagnostic]) -> None:
    """Prints findings to standard error."""
    for found in findings:
        print(render(found), file=sys.stderr)


def refuse(message: str) -> NoReturn:
    """Says what cannot be used and ends the command with code 2."""
    print(f"error: {message}", file=sys.stderr)
    raise Stop(2)


def refuse_overwriting(files: list[str], output: str) -> None:
    """Ends the command with code 2 where an output would replace a file that is being read."""
    for argument in files:
        path, _ = split_name(argument)
        if os.path.exists(path) and os.path.exists(output) and os.path.samefile(path, output):
            refuse(f"{output}: this file is being read, name another output")


def _stops(found: Diagnostic, tolerance: Tolerance) -> bool:
    """Whether a finding ends a command: warnings never do."""
    if found.severity == "warning":
        return False
    if tolerance == "nothing":
        return True
    return not (found.code.startswith("claim-") or (tolerance == "loops" and found.code == "delay-free-loop"))


def _named(loaded: Loaded, name: str, path: str) -> Diagram:
    for diagram in loaded.diagrams:
        if diagram.name == name:
            return diagram
    known = ", ".join(diagram.name for diagram in loaded.diagrams) or "none"
    refuse(f"{path}: there is no diagram {name} here (there are: {known})")


def _used_by_none(loaded: Loaded, path: str) -> list[Diagram]:
    """The diagrams of the file itself that no other uses, in elements or in a claim.

    A file that only includes others stands for theirs.
    """
    used: set[str] = set()
    for diagram in loaded.diagrams:
        used.update(use.diagram.name for use in diagram.uses)
        used.update(claim.other.name for claim in diagram.claims if isinstance(claim, DiagramIntent))
    free = [diagram for diagram in loaded.diagrams if diagram.name not in used]
    return [diagram for diagram in free if diagram.span.file == path] or free


def _with_values(diagrams: list[Diagram], given: list[str]) -> list[Diagram]:
    """The diagrams with the values of --with NAME=VALUE, each in every diagram that has this coefficient."""
    values = dict(_name_and_value(text) for text in given)
    for name in values:
        if not any(name in diagram.coefficients for diagram in diagrams):
            known = dict.fromkeys(known for diagram in diagrams for known in diagram.coefficients if "." not in known)
            refuse(f"--with {name}: there is no coefficient {name} here (there are: {', '.join(known) or 'none'})")
    return [_with_those_it_has(diagram, values) for diagram in diagrams]


def _name_and_value(given: str) -> tuple[str, Expression]:
    name, equals, text = given.partition("=")
    if not equals:
        refuse(f"--with {given}: write NAME=VALUE")
    try:
        return name.strip(), read_value(text)
    except ValueError as error:
        refuse(f"--with {given}: {error}")


def _with_those_it_has(diagram: Diagram, values: dict[str, Expression]) -> Diagram:
    coefficients = {
        name: replace(coefficient, value=values[name]) if name in values else coefficient
        for name, coefficient in diagram.coefficients.items()
    }
    return replace(diagram, coefficients=coefficients) if values else diagram
