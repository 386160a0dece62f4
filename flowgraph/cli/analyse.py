"""`flowgraph analyse`: difference equation, transfer function, poles, zeros, stability, hidden modes."""

from __future__ import annotations

import argparse
import json
from textwrap import wrap

from flint import fmpq_poly

from flowgraph.algebra.modes import HiddenMode
from flowgraph.algebra.transfer import NamedTransfer, roots_in_z
from flowgraph.claims.analysis import Analysis, Root, analyse, zeros
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
        print("\n".join(_page(diagram, found) for diagram, found in analysed), end="")
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
        "poles": None if found.poles is None else [[re, im] for re, im, times in found.poles for _ in range(times)],
        "hidden_modes": [
            {
                "pole": [real, imaginary],
                "radius": (real * real + imaginary * imaginary) ** 0.5,
                "multiplicity": mode.multiplicity,
                "why": mode.why,
                "cells": [cell_name(diagram, cell) for cell in mode.cells],
            }
            for mode in found.hidden
            for real, imaginary, _ in roots_in_z(mode.factor)
        ],
        "remarks": list(found.remarks),
    }


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
        "zeros": None if at_zeros is None else [[re, im] for re, im, times in at_zeros for _ in range(times)],
    }


def _strings(polynomial: fmpq_poly) -> list[str]:
    return [str(value) for value in polynomial.coeffs()] or ["0"]


def cell_name(diagram: Diagram, cell: tuple[str, int]) -> str:
    """A cell as its signal is written: `x1`, or `line[3]`."""
    name, at = cell
    lengths = {delay.name: delay.length for delay in diagram.delays()}
    return name if lengths[name] == 1 else f"{name}[{at}]"


def _page(diagram: Diagram, found: Analysis) -> str:
    """The analysis for reading, at most 80 columns wide."""
    lines = [f"{diagram.name}", *_cells(found)]
    for output in diagram.outputs:
        if found.named:
            lines.extend(_equation(diagram, output, found.named))
    for output in diagram.outputs:
        for port in diagram.inputs():
            lines.extend(_response(output, port.name, found))
    if found.stability is not None:
        road = "exact" if found.exact else "certified"
        lines.append(f"  stability    {found.stability} ({road})")
    if found.poles is not None:
        lines.extend(_roots("poles", found.poles))
    for mode in found.hidden:
        lines.extend(_hidden(diagram, mode))
    for remark in found.remarks:
        lines.extend(_wrapped("note", remark))
    return "\n".join(lines) + "\n"


def _cells(found: Analysis) -> list[str]:
    if found.order is None:
        return [f"  cells        {found.cells}"]
    spare = found.cells - found.order
    told = "none to spare" if spare == 0 else f"{spare} more than the least possible, {found.order}"
    return [f"  cells        {found.cells} ({told})"]


def _equation(diagram: Diagram, output: str, named: dict[tuple[str, str], NamedTransfer]) -> list[str]:
    """y[n] in past inputs and outputs: direct where all responses of the output share a denominator."""
    responses = [(port.name, named[(output, port.name)]) for port in diagram.inputs()]
    responses = [(source, response) for source, response in responses if response.numerator != ("0",)]
    lowers = {response.denominator for _, response in responses}
    if len(lowers) != 1:
        return []
    lower = next(iter(lowers))
    terms = [
        term
        for source, response in responses
        for late, factor in enumerate(response.numerator)
        for term in _term(factor, source, late, "")
    ]
    terms += [term for late, factor in enumerate(lower) if late for term in _term(factor, output, late, "-")]
    left = f"{output}[n]" if lower[0] == "1" else f"{_bracketed(lower[0])}*{output}[n]"
    return _wrapped("equation", f"{left} = {_joined(terms)}")


def _term(factor: str, signal: str, late: int, sign: str) -> list[str]:
    """One signed term of an equation, or none where the factor is 0."""
    if factor == "0":
        return []
    sample = f"{signal}[n]" if late == 0 else f"{signal}[n-{late}]"
    negative = factor.startswith("-") and " " not in factor
    size = factor[1:] if negative else factor
    minus = negative != (sign == "-")
    scaled = sample if size == "1" else f"{_bracketed(size)}*{sample}"
    return [f"- {scaled}" if minus else f"+ {scaled}"]


def _bracketed(factor: str) -> str:
    return f"({factor})" if " " in factor or "/" in factor else factor


def _joined(terms: list[str]) -> str:
    if not terms:
        return "0"
    text = " ".join(terms)
    return text[2:] if text.startswith("+ ") else "-" + text[2:]


def _response(output: str, source: str, found: Analysis) -> list[str]:
    lines: list[str] = []
    if found.named:
        response = found.named[(output, source)]
        lines.extend(_ratio(f"{output} / {source}", response.numerator, response.denominator))
    if found.numbers:
        number = found.numbers[(output, source)]
        named = found.named[(output, source)] if found.named else None
        values = (tuple(_strings(number.numerator)), tuple(_strings(number.denominator)))
        if named is None or values != (named.numerator, named.denominator):
            lines.extend(_ratio("  with numbers", *(tuple(_short(v) for v in side) for side in values)))
        at_zeros = zeros(number)
        if at_zeros:
            lines.extend(_roots("zeros", at_zeros))
    return lines


def _short(value: str) -> str:
    """An exact fraction, or twelve digits of one that is too long to read."""
    if len(value) <= 14:
        return value
    upper, _, lower = value.partition("/")
    return f"{int(upper) / int(lower or '1'):.12g}"


def _ratio(label: str, numerator: tuple[str, ...], denominator: tuple[str, ...]) -> list[str]:
    above, below = _polynomial(numerator), _polynomial(denominator)
    if below == "1":
        return _wrapped(label, above)
    return [*_wrapped(label, f"({above})"), *_wrapped("", f"/ ({below})")]


def _polynomial(coefficients: tuple[str, ...]) -> str:
    """A polynomial in z^-1 as the language writes it."""
    terms: list[str] = []
    for power, factor in enumerate(coefficients):
        if factor == "0":
            continue
        negative = factor.startswith("-") and " " not in factor
        size = factor[1:] if negative else factor
        late = "" if power == 0 else f"z^-{power}"
        body = late if size == "1" and late else _bracketed(size) + (f"*{late}" if late else "")
        terms.append(f"- {body}" if negative else f"+ {body}")
    return _joined(terms)


def _roots(label: str, roots: list[Root]) -> list[str]:
    if not roots:
        return []
    lines: list[str] = []
    for real, imaginary, times in roots:
        if imaginary < 0:
            continue
        place = f"{real:.9g}" if not imaginary else f"{real:.9g} +- {imaginary:.9g}i"
        radius = (real * real + imaginary * imaginary) ** 0.5
        lines.append(f"z = {place}, radius {radius:.9g}" + (f", {times} times" if times > 1 else ""))
    return [f"  {label if at == 0 else '':<12} {line}" for at, line in enumerate(lines)]


def _hidden(diagram: Diagram, mode: HiddenMode) -> list[str]:
    places = [
        f"{real:.6g}" + (f" +- {imaginary:.6g}i" if imaginary else "")
        for real, imaginary, _ in roots_in_z(mode.factor)
        if imaginary >= 0
    ]
    times = f", {mode.multiplicity} times" if mode.multiplicity > 1 else ""
    cells = ", ".join(cell_name(diagram, cell) for cell in mode.cells)
    return _wrapped("hidden mode", f"z = {', '.join(places)}{times}: {mode.why}; lives in {cells}")


def _wrapped(label: str, text: str) -> list[str]:
    parts = wrap(text, 64, break_long_words=False, break_on_hyphens=False) or [""]
    head = f"  {label:<12} "
    if len(label) > 12:
        return [f"  {label}", *(f"  {'':<12} {part}" for part in parts)]
    return [head + parts[0], *(f"  {'':<12} {part}" for part in parts[1:])]
