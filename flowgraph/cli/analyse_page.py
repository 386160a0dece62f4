"""The page that `flowgraph analyse` prints: at most 80 columns, exact where that can be read.

Numbers of at most TWELVE digits are shown exactly, longer ones to twelve digits on a line named
`rounded` or with a note; --json always gives the exact ones.
"""

from __future__ import annotations

import re
from collections.abc import Sequence
from fractions import Fraction
from textwrap import wrap

from flowgraph.algebra.modes import HiddenMode
from flowgraph.algebra.transfer import NamedEquation, NamedTransfer, roots_in_z
from flowgraph.claims.analysis import Analysis, Root, zeros
from flowgraph.diagram.diagram import Diagram

TWELVE = 12
MOST_LINES = 24
"""Lines of one formula or list beyond which the page refers to --json."""

UNBROKEN = "\N{NO-BREAK SPACE}"
NUMBER = re.compile(r"-?\d+(/\d+)?")


def analysis_page(diagram: Diagram, found: Analysis) -> str:
    """All of the analysis for reading, with a line end after the last line."""
    lines = [diagram.name, *_cells(found)]
    for output, equation in (found.equations or {}).items():
        lines += _equation(output, equation)
    for output in diagram.outputs:
        for port in diagram.inputs():
            lines += _response(output, port.name, found)
    lines += _stability(found)
    if found.poles is not None:
        lines += _roots("poles", found.poles)
    for mode in found.hidden:
        lines += _hidden(diagram, mode, found)
    if not diagram.inputs():
        lines += _wrapped("note", "there is no input: all outputs come from the starting contents")
    if found.named and not all(_shown(factor)[1] for ratio in found.named.values() for factor in _factors(ratio)):
        lines += _wrapped("note", f"numbers are shown to {TWELVE} digits here: --json gives all of them")
    for remark in found.remarks:
        lines += _wrapped("note", remark)
    return "\n".join(lines) + "\n"


def _factors(ratio: NamedTransfer) -> tuple[str, ...]:
    return (*ratio.numerator, *ratio.denominator)


def cell_name(diagram: Diagram, cell: tuple[str, int]) -> str:
    """A cell as its signal is written: `x1`, or `line[3]`."""
    name, at = cell
    length = _lengths(diagram)[name]
    return name if length == 1 else f"{name}[{at}]"


def in_order(roots: Sequence[Root]) -> list[Root]:
    """Largest radius first, then from left to right; parts that are rounding noise are 0."""
    clean = [_clean(root) for root in roots]
    return sorted(clean, key=lambda root: (-float(f"{_radius(root):.9g}"), root[0], root[1]))


def hidden_places(mode: HiddenMode, found: Analysis) -> list[Root]:
    """Where in z the mode is; empty where that depends on coefficients without a value.

    Those were tried at random values of 60 bits, which show in the polynomial of the mode.
    """
    depends = found.numbers is None and any(abs(int(value)) >> 40 for value in mode.factor.coeffs())
    return [] if depends else in_order(list(roots_in_z(mode.factor)))


def _lengths(diagram: Diagram) -> dict[str, int]:
    return {delay.name: delay.length for delay in diagram.delays()}


def _radius(root: Root) -> float:
    return float((root[0] ** 2 + root[1] ** 2) ** 0.5)


def _clean(root: Root) -> Root:
    noise = 1e-15 * _radius(root)
    real, imaginary = (0.0 if abs(part) <= noise else part for part in root[:2])
    return real, imaginary, root[2]


def _cells(found: Analysis) -> list[str]:
    if found.order is None:
        return [f"  cells        {found.cells}"]
    spare = found.cells - found.order
    told = "none to spare" if spare == 0 else f"{spare} more than the least possible, {found.order}"
    return [f"  cells        {found.cells} ({told})"]


def _stability(found: Analysis) -> list[str]:
    if found.stability is not None:
        return [f"  stability    {found.stability} ({'exact' if found.exact else 'certified'})"]
    if found.numbers is None:
        return []
    why = (
        "not stable: modes that stay for ever occur twice"
        if found.exact
        else "undecided: too close to the limit to tell"
    )
    return [f"  stability    {why}"]


def _equation(output: str, equation: NamedEquation) -> list[str]:
    """y[n] in past inputs and outputs."""
    lower = equation.denominator
    terms = [
        term
        for source, numerator in equation.numerators.items()
        for late, factor in enumerate(numerator)
        for term in _term(factor, source, late, "")
    ]
    terms += [term for late, factor in enumerate(lower) if late for term in _term(factor, output, late, "-")]
    left = f"{output}[n]" if lower[0] == "1" else f"{_factor(lower[0])}*{output}[n]"
    return _formula("equation", f"{left} = {_joined(terms)}")


def _term(factor: str, signal: str, late: int, sign: str) -> list[str]:
    """One signed term of an equation, or none where the factor is 0."""
    if factor == "0":
        return []
    sample = f"{signal}[n]" if late == 0 else f"{signal}[n-{late}]"
    negative, size = _sign_and_size(factor)
    minus = negative != (sign == "-")
    scaled = sample if size == "1" else f"{_factor(size)}*{sample}"
    return [f"- {scaled}" if minus else f"+ {scaled}"]


def _response(output: str, source: str, found: Analysis) -> list[str]:
    """The ratio with names, the same in numbers where that says more, and its zeros."""
    lines: list[str] = []
    named = found.named[(output, source)] if found.named else None
    if named:
        lines += _ratio(f"{output} / {source}", named.numerator, named.denominator)
    if found.numbers:
        number = found.numbers[(output, source)]
        upper = tuple(str(value) for value in number.numerator.coeffs()) or ("0",)
        lower = tuple(str(value) for value in number.denominator.coeffs())
        if named is None:
            lines.append(f"  {output} / {source}")
        if named is None or (upper, lower) != (named.numerator, named.denominator):
            exact = found.exact and all(_shown(value)[1] for value in (*upper, *lower))
            lines += _ratio("in numbers" if exact else "rounded", upper, lower)
        lines += _roots("zeros", zeros(number) or [])
    return lines


def _ratio(label: str, numerator: tuple[str, ...], denominator: tuple[str, ...]) -> list[str]:
    above, below = _polynomial(numerator), _polynomial(denominator)
    if below == "1":
        return _formula(label, above)
    return [
        *_formula(label, above if " " not in above else f"({above})"),
        *_formula("", f"/ {below}" if below.isidentifier() else f"/ ({below})"),
    ]


def _polynomial(coefficients: tuple[str, ...]) -> str:
    """A polynomial in z^-1 as the language writes it."""
    terms: list[str] = []
    alone = sum(factor != "0" for factor in coefficients) == 1
    for power, factor in enumerate(coefficients):
        if factor == "0":
            continue
        negative, size = _sign_and_size(factor)
        late = "" if power == 0 else f"z^-{power}"
        if size == "1" and late:
            body = late
        elif alone and not late:
            body = _shown(size)[0]
        else:
            body = _factor(size) + (f"*{late}" if late else "")
        terms.append(f"- {body}" if negative else f"+ {body}")
    return _joined(terms)


def _sign_and_size(factor: str) -> tuple[bool, str]:
    """Whether it is subtracted, and what: a sum begins with a term that it adds, `-r + 1` as `1 - r`."""
    terms = re.split(r" (?=[+-] )", factor)
    terms[0] = f"- {terms[0][1:]}" if terms[0].startswith("-") else f"+ {terms[0]}"
    first = next((at for at, term in enumerate(terms) if term.startswith("+")), None)
    if first is None:
        return True, _joined([f"+{term[1:]}" for term in terms])
    return False, _joined([terms[first], *terms[:first], *terms[first + 1 :]])


def _factor(factor: str) -> str:
    """A factor as it stands in front of `*`."""
    shown = _shown(factor)[0]
    return f"({shown})" if " " in shown or "/" in shown else shown


def _shown(value: str) -> tuple[str, bool]:
    """A number as a short decimal or fraction, else rounded to twelve digits; whether it is exact."""
    if not NUMBER.fullmatch(value) or ("/" not in value and len(value) <= TWELVE):
        return value, True
    exact = Fraction(value)
    rounded = _twelve_digits(exact)
    if "e" not in rounded and Fraction(rounded) == exact:
        return rounded, True
    return (value, True) if len(value) <= TWELVE else (rounded, False)


def _twelve_digits(value: Fraction) -> str:
    try:
        return f"{float(value):.{TWELVE}g}"
    except OverflowError:
        digits = str(abs(value.numerator) // value.denominator)
        return f"{'-' * (value < 0)}{digits[0]}.{digits[1:TWELVE]}e+{len(digits) - 1}"


def _joined(terms: list[str]) -> str:
    if not terms:
        return "0"
    text = " ".join(terms)
    return text[2:] if text.startswith("+ ") else "-" + text[2:]


def _roots(label: str, roots: Sequence[Root]) -> list[str]:
    """One line for each root or conjugate pair."""
    lines: list[str] = []
    for root in in_order(roots):
        if root[1] >= 0:
            times = f", {root[2]} times" if root[2] > 1 else ""
            lines.append(f"z = {_place(root)}, radius {_radius(root):.9g}{times}")
    if len(lines) > MOST_LINES:
        lines[MOST_LINES:] = [f"and {len(lines) - MOST_LINES} lines more: --json gives all"]
    return [f"  {label if at == 0 else '':<12} {line}" for at, line in enumerate(lines)]


def _place(root: Root) -> str:
    return f"{root[0]:.9g}" if not root[1] else f"{root[0]:.9g} +- {root[1]:.9g}i"


def _hidden(diagram: Diagram, mode: HiddenMode, found: Analysis) -> list[str]:
    places = [_place(place) for place in hidden_places(mode, found) if place[1] >= 0]
    where = f"z = {', '.join(places)}" if places else "z depends on open coefficients"
    times = f", {mode.multiplicity} times" if mode.multiplicity > 1 else ""
    lines = _wrapped("hidden mode", f"{where}{times}: {mode.why}; lives in {_cell_names(diagram, mode.cells)}")
    return [line.replace(UNBROKEN, " ") for line in lines]


def _cell_names(diagram: Diagram, cells: Sequence[tuple[str, int]]) -> str:
    """The cells in their order, those that follow each other in a line as `line[1 .. 8]`."""
    runs: list[tuple[str, int, int]] = []
    for name, at in cells:
        if runs and runs[-1][0] == name and runs[-1][2] == at - 1:
            runs[-1] = (name, runs[-1][1], at)
        else:
            runs.append((name, at, at))
    lengths = _lengths(diagram)
    told = [
        name
        if lengths[name] == 1
        else f"{name}[{first}]"
        if first == last
        else f"{name}[{first}{UNBROKEN}..{UNBROKEN}{last}]"
        for name, first, last in runs
    ]
    return ", ".join(told)


def _formula(label: str, text: str) -> list[str]:
    """A formula, or a word on its length where it would fill pages."""
    lines = _wrapped(label, text)
    if len(lines) <= MOST_LINES:
        return lines
    return _wrapped(label, f"{'/ ' * text.startswith('/ ')}.. ({len(lines)} lines long: --json gives it)")


def _wrapped(label: str, text: str) -> list[str]:
    parts = wrap(text, 64, break_long_words=False, break_on_hyphens=False) or [""]
    if len(label) > 12:
        return [f"  {label}", *(f"  {'':<12} {part}" for part in parts)]
    return [f"  {label:<12} {parts[0]}", *(f"  {'':<12} {part}" for part in parts[1:])]
