"""A difference equation as a diagram: one adder over past inputs and past outputs (direct form I)."""

from __future__ import annotations

from fractions import Fraction

from flowgraph.diagram.claim import EquationIntent
from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.elements import Adder, Delay, Element, Input, Output, Signal, Term
from flowgraph.diagram.expression import (
    ZERO,
    Expression,
    Negative,
    Number,
    Product,
    Quotient,
    Sample,
    Sum,
    children,
)


class NotLinear(ValueError):
    """The right side of an equation multiplies signals, divides by one, or adds a constant."""


def equation_diagram(intent: EquationIntent, diagram: Diagram) -> Diagram:
    """The diagram that computes the equation literally, with the inputs and coefficients of `diagram`.

    Values before sample 0 are the starting contents of its two lines. Raises NotLinear.
    """
    terms = linear_terms(intent.right)
    elements: dict[str, Element] = {port.name: Input(port.name) for port in diagram.inputs()}
    history = {(signal, late): value for signal, late, value in intent.history}
    reach: dict[str, int] = {}
    for sample, _ in terms:
        reach[sample.signal] = max(reach.get(sample.signal, 0), sample.late)
    result = "equation"  # an element of its own, in case the output shares its name with an input
    wires: list[Term] = []
    for sample, coefficient in terms:
        source = result if sample.signal == intent.output else sample.signal
        signal = Signal(f"past {source}", sample.late) if sample.late else Signal(source)
        wires.append(Term(signal, coefficient=coefficient))
    elements[result] = Adder(result, tuple(wires))
    for name, longest in reach.items():
        if longest:
            source = result if name == intent.output else name
            starts = tuple(history.get((name, late), ZERO) for late in range(1, longest + 1))
            kept = starts if any(start != ZERO for start in starts) else ()
            elements[f"past {source}"] = Delay(f"past {source}", Signal(source), longest, kept)
    outputs = {intent.output: Output(intent.output, Signal(result))}
    return Diagram(f"equation for {intent.output}", elements, outputs, diagram.coefficients)


def linear_terms(right: Expression) -> list[tuple[Sample, Expression]]:
    """The samples of a linear expression with the coefficient of each, in the order written."""
    if isinstance(right, Sample):
        return [(right, Number(Fraction(1)))]
    if not reads_samples(right):
        if right == ZERO:
            return []
        raise NotLinear("a constant is added to the signals")
    match right:
        case Sum(parts):
            return [term for part in parts for term in linear_terms(part)]
        case Negative(inner):
            return [(sample, Negative(coefficient)) for sample, coefficient in linear_terms(inner)]
        case Quotient(upper, lower):
            if reads_samples(lower):
                raise NotLinear("a signal stands below a division")
            return [(sample, Quotient(coefficient, lower)) for sample, coefficient in linear_terms(upper)]
        case Product(factors):
            with_samples = [factor for factor in factors if reads_samples(factor)]
            if len(with_samples) > 1:
                raise NotLinear("two signals are multiplied")
            others = tuple(factor for factor in factors if not reads_samples(factor))
            return [
                (sample, coefficient if not others else Product((*others, coefficient)))
                for sample, coefficient in linear_terms(with_samples[0])
            ]
        case _:
            raise NotLinear("a signal stands inside a power or a function")


def reads_samples(expression: Expression) -> bool:
    """Whether an expression reads any signal."""
    waiting = [expression]
    while waiting:
        part = waiting.pop()
        if isinstance(part, Sample):
            return True
        waiting.extend(children(part))
    return False
