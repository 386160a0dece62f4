"""`flowgraph analyse`: difference equation, transfer function, poles, zeros, stability, hidden modes."""

from __future__ import annotations

import argparse
import json

from flint import fmpq_poly

from flowgraph.algebra.modes import HiddenMode
from flowgraph.claims.analysis import Analysis, Root, analyse, zeros
from flowgraph.cli.analyse_page import analysis_page, cell_name, hidden_places, in_order
from flowgraph.cli.files import add_file_arguments, chosen_diagrams
from flowgraph.diagram.diagram import Diagram

HELP = "difference equation, transfer function, poles, zeros, stability, hidden modes"


def configure(parser: argparse.ArgumentParser) -> None:
    """The options of this command."""
    add_file_arguments(parser)


def execute(options: argparse.Namespace) -> int:
    """Prints the analysis of each diagram."""
    analysed = [(diagram, analyse(diagram)) for diagram in chosen_diagrams(options, "claims")]
    if options.json:
        told = {"diagrams": [_told(diagram, found) for diagram, found in analysed]}
        print(json.dumps(told, indent=2, ensure_ascii=False))
    else:
        print("\n".join(analysis_page(diagram, found) for diagram, found in analysed), end="")
    return 0


def _told(diagram: Diagram, found: Analysis) -> dict[str, object]:
    return {
        "name": diagram.name,
        "cells": found.cells,
        "order": found.order,
        "transfer": [
            _transfer_told(output, port.name, found) for output in diagram.outputs for port in diagram.inputs()
        ],
        "stability": found.stability,
        "exact": found.exact,
        "poles": None
        if found.poles is None
        else [[re, im] for re, im, times in in_order(found.poles) for _ in range(times)],
        "hidden_modes": [told for mode in found.hidden for told in _hidden_told(diagram, mode, found)],
        "remarks": list(found.remarks),
    }


def _hidden_told(diagram: Diagram, mode: HiddenMode, found: Analysis) -> list[dict[str, object]]:
    """One entry for each place z; its pole and radius are null where it depends on open coefficients."""
    places: list[Root | None] = [*hidden_places(mode, found)]
    return [
        {
            "pole": None if place is None else [place[0], place[1]],
            "radius": None if place is None else (place[0] ** 2 + place[1] ** 2) ** 0.5,
            "multiplicity": mode.multiplicity,
            "why": mode.why,
            "cells": [cell_name(diagram, cell) for cell in mode.cells],
        }
        for place in (places or [None])
    ]


def _transfer_told(output: str, source: str, found: Analysis) -> dict[str, object]:
    named = found.named[(output, source)] if found.named else None
    number = found.numbers[(output, source)] if found.numbers else None
    at_zeros = zeros(number) if number else None
    return {
        "output": output,
        "input": source,
        "numerator": list(named.numerator) if named else None,
        "denominator": list(named.denominator) if named else None,
        "numerator_values": _strings(number.numerator) if number else None,
        "denominator_values": _strings(number.denominator) if number else None,
        "zeros": None if at_zeros is None else [[re, im] for re, im, times in in_order(at_zeros) for _ in range(times)],
    }


def _strings(polynomial: fmpq_poly) -> list[str]:
    return [str(value) for value in polynomial.coeffs()] or ["0"]
