"""Require lines -> typed requirements."""

from __future__ import annotations

from fractions import Fraction
from typing import cast

from flowgraph.diagram.claim import (
    BoundedRequirement,
    CountRequirement,
    GainRequirement,
    Requirement,
    StableRequirement,
)
from flowgraph.diagram.diagram import Diagram
from flowgraph.source.span import Span
from flowgraph.text import syntax as s
from flowgraph.text.exact import DECIBELS
from flowgraph.text.instances import Instance
from flowgraph.text.meaning import fixed, whole
from flowgraph.text.ports import input_port, output_port
from flowgraph.text.scope import Env, Scope


def requirement(scope: Scope, diagram: Diagram, line: Instance) -> Requirement:
    """The requirement of a line. Raises Fault."""
    env = line.env
    span = scope.span(line.start, line.end)
    match line.node:
        case s.StableLine(number):
            return StableRequirement(number, span)
        case s.BoundedLine(number, output, input_):
            return BoundedRequirement(
                output_port(scope, output, env), input_port(scope, diagram, input_, env), number, span
            )
        case s.GainLimitLine():
            return _gain(scope, diagram, line.node, env, span)
        case s.CountLine(number, counted, highest):
            limit = whole(scope, highest, env, "a count")
            return CountRequirement("cells" if counted == "cells" else "multiplies", limit, number, span)
    raise scope.silent()


def _gain(scope: Scope, diagram: Diagram, node: s.GainLimitLine, env: Env, span: Span) -> GainRequirement:
    """`gain y / x at F within A .. B dB`. Raises Fault."""
    output, input_ = output_port(scope, node.output, env), input_port(scope, diagram, node.input, env)
    at = node.frequency
    frequency, seconds = fixed(scope, at, env)
    if scope.rate is None:
        scope.used_rate = True
        raise scope.fault(
            "rate-missing", "a frequency needs a rate", at.start, at.end, "add a line such as: rate 48 kHz"
        )
    if seconds != -1:
        raise scope.fault(
            "units", "a gain is asked for at a frequency", at.start, at.end, "write the unit, such as 1 kHz"
        )
    if not 0 <= frequency <= scope.rate / 2:
        raise scope.fault(
            "frequency", f"a frequency lies between 0 Hz and half the rate, {scope.rate / 2} Hz", at.start, at.end
        )
    lowest, highest = (_decibels(scope, limit, env) for limit in (node.lowest, node.highest))
    if lowest is not None and highest is not None and lowest > highest:
        limit = cast(s.Expr, node.lowest)
        raise scope.fault(
            "range", "this range ends before it begins", limit.start, limit.end, "write the lower end first"
        )
    return GainRequirement(output, input_, frequency, lowest, highest, node.number, span)


def _decibels(scope: Scope, limit: s.Expr | None, env: Env) -> Fraction | None:
    if limit is None:
        return None
    value, seconds = fixed(scope, limit, env)
    if seconds:
        raise scope.fault("units", "a limit is a number of dB", limit.start, limit.end)
    if abs(value) > DECIBELS:
        raise scope.fault("too-large", f"a limit beyond {DECIBELS} dB", limit.start, limit.end)
    return value
