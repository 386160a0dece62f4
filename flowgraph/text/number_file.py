"""Coefficient files: decimals or fractions, exact as written, separated by commas, semicolons or blanks."""

from __future__ import annotations

import os
import re
from fractions import Fraction

from flowgraph.source.diagnostic import Diagnostic
from flowgraph.source.span import Source, Span
from flowgraph.text import syntax as s
from flowgraph.text.exact import BITS, ELEMENTS, FILE_LENGTH, TooLargeError, exact_number
from flowgraph.text.scope import Fault, Scope

_ENTRY = re.compile(r"[^\s,;]+")
_NUMBER = re.compile(r"([+-]?)([0-9]+(?:\.[0-9]+)?(?:[eE][+-]?[0-9]+)?)(?:/([0-9]+))?")


def path_below(folder: str, path: str) -> str | None:
    """The real path of a file named in a diagram, or None where it would leave the folder."""
    root = os.path.realpath(folder)
    full = os.path.realpath(os.path.join(root, path))
    inside = full.startswith(root if root.endswith(os.sep) else root + os.sep)
    return full if inside and not os.path.isabs(path) else None


def read_numbers(scope: Scope, path: s.Word, folder: str) -> list[tuple[Fraction, Span]]:
    """The numbers of a file in their order, each with its place. Raises Fault."""
    full = path_below(folder, path.text)
    if full is None:
        raise scope.fault("path", f"{path.text} does not stand below the folder of this file", path.start, path.end)
    try:
        if os.path.getsize(full) > FILE_LENGTH:
            raise scope.fault(
                "too-large", f"{path.text} is larger than {FILE_LENGTH // 2**20} MiB", path.start, path.end
            )
        with open(full, encoding="utf-8-sig") as file:
            source = Source(os.path.join(os.path.dirname(scope.source.name), path.text), file.read())
    except OSError as error:
        reason = (error.strerror or "cannot be read").lower()
        raise scope.fault("unreadable", f"{path.text} cannot be read: {reason}", path.start, path.end) from None
    except ValueError:
        raise scope.fault("unreadable", f"{path.text} is no text file", path.start, path.end) from None
    found = list(_numbers(source))
    if not found:
        raise scope.fault("numbers", f"{path.text} holds no number", path.start, path.end)
    return found


def _numbers(source: Source) -> list[tuple[Fraction, Span]]:
    found: list[tuple[Fraction, Span]] = []
    at = 0
    for line in source.text.splitlines(keepends=True):
        for entry in _ENTRY.finditer(line.partition("#")[0]):
            span = Span(source, at + entry.start(), at + entry.end())
            found.append((_number(entry.group(), span), span))
            if len(found) > ELEMENTS:
                raise Fault(Diagnostic("too-large", f"more than {ELEMENTS} numbers", span))
        at += len(line)
    return found


def _number(text: str, span: Span) -> Fraction:
    """One entry, exactly. Raises Fault."""
    match = _NUMBER.fullmatch(text)
    if match is None:
        raise Fault(
            Diagnostic(
                "numbers",
                f"{text[:40]} is no number",
                span,
                help="a file of coefficients holds decimals such as -0.25 or fractions such as 1/3",
            )
        )
    sign, above, below = match.groups()
    try:
        value = exact_number(above)
        if below is not None:
            value /= exact_number(below)
    except TooLargeError:
        raise Fault(Diagnostic("too-large", f"this number needs more than {BITS} bits", span)) from None
    except ZeroDivisionError:
        raise Fault(Diagnostic("zero-division", "this divides by zero", span)) from None
    return -value if sign == "-" else value
