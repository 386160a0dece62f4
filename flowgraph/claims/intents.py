"""Verdicts on intents: the diagram against an equation, a ratio or another diagram."""

from __future__ import annotations

from dataclasses import dataclass, replace

from flowgraph.algebra.behaviour import Behaviour, DiagramBehaviour, RatioBehaviour
from flowgraph.algebra.compare import Comparison, compare_behaviours
from flowgraph.algebra.rational_functions import Undefined
from flowgraph.algebra.solve import STARTS
from flowgraph.claims.conditions import conditions
from flowgraph.claims.equation import NotLinear, equation_diagram
from flowgraph.claims.response import check_causal
from flowgraph.claims.verdict import Verdict
from flowgraph.claims.witness import Search, search_witness, varying_names
from flowgraph.claims.wording import claim_text
from flowgraph.diagram.claim import DiagramIntent, EquationIntent, Intent, RatioIntent
from flowgraph.diagram.diagram import Coefficient, Diagram
from flowgraph.diagram.elements import Element, Input, Signal, redirected, signals_read


@dataclass(frozen=True, slots=True)
class _Question:
    """Both sides of an intent, the responses to compare, and all coefficients they name."""

    left: Behaviour
    right: Behaviour
    pairs: list[tuple[str, str]]
    coefficients: dict[str, Coefficient]


def verdict_on_intent(intent: Intent, diagram: Diagram) -> Verdict:
    """Proved for every value of the coefficients, refuted with a witness, or undecided with the reason."""
    said = claim_text(intent, diagram)
    try:
        question = _question(intent, diagram)
        comparison = compare_behaviours(question.left, question.right, question.pairs, question.coefficients)
    except NotLinear as error:
        return Verdict(said, intent.span, "undecided", "none", reason=f"the right side is not linear: {error}")
    except Undefined as error:
        return Verdict(said, intent.span, "undecided", "none", reason=str(error))
    except ZeroDivisionError as error:
        return Verdict(said, intent.span, "refuted", "exact", reason=f"no diagram can meet this claim: {error}")
    if comparison.equal:
        return _proved(said, intent, question, comparison)
    return _not_equal(said, intent, question, comparison)


def _question(intent: Intent, diagram: Diagram) -> _Question:
    sources = [*(port.name for port in diagram.inputs()), STARTS]
    one_output = cone(diagram, intent.output)
    left = DiagramBehaviour(one_output)
    match intent:
        case RatioIntent(output, source, ratio, late):
            check_causal(ratio, diagram.coefficients)
            right: Behaviour = RatioBehaviour(ratio, late, diagram.coefficients)
            return _Question(left, right, [(output, source)], dict(diagram.coefficients))
        case EquationIntent(output):
            right = DiagramBehaviour(equation_diagram(intent, diagram))
            return _Question(left, right, [(output, source) for source in sources], dict(diagram.coefficients))
        case DiagramIntent(output, other, inputs):
            right = DiagramBehaviour(_in_our_ports(other, output, dict(inputs), diagram))
            coefficients = {**diagram.coefficients, **other.coefficients}
            return _Question(left, right, [(output, source) for source in sources], coefficients)


def cone(diagram: Diagram, output: str) -> Diagram:
    """Just what reaches one output, and all inputs: the rest cannot change the answer."""
    needed: set[str] = set()
    waiting = [diagram.outputs[output].signal.name]
    while waiting:
        name = waiting.pop()
        if name not in needed:
            needed.add(name)
            waiting.extend(signal.name for signal in signals_read(diagram.elements[name]))
    elements = {
        name: element for name, element in diagram.elements.items() if name in needed or isinstance(element, Input)
    }
    return replace(diagram, elements=elements, outputs={output: diagram.outputs[output]})


def _in_our_ports(other: Diagram, output: str, inputs: dict[str, str], diagram: Diagram) -> Diagram:
    """The other diagram with its one output and its inputs named as here, its elements apart from ours."""
    new_names = {name: inputs.get(name, f"{other.name}: {name}") for name in other.elements}
    shown = next(iter(other.outputs.values()))
    read = [signal for element in other.elements.values() for signal in signals_read(element)]
    there = {signal: Signal(new_names[signal.name], signal.tap) for signal in [*read, shown.signal]}
    elements: dict[str, Element] = {port.name: Input(port.name) for port in diagram.inputs()}
    for name, element in other.elements.items():
        if not isinstance(element, Input):
            elements[new_names[name]] = replace(redirected(element, there), name=new_names[name])
    outputs = {output: replace(shown, name=output, signal=there[shown.signal])}
    return replace(other, elements=elements, outputs=outputs)


def _proved(said: str, intent: Intent, question: _Question, comparison: Comparison) -> Verdict:
    ratio = [intent.ratio] if isinstance(intent, RatioIntent) else []
    expressions = [*question.left.expressions(), *question.right.expressions(), *ratio]
    rests_on = conditions(question.coefficients, expressions)
    return Verdict(said, intent.span, "proved", comparison.method, comparison.error_below, rests_on)


def _not_equal(said: str, intent: Intent, question: _Question, comparison: Comparison) -> Verdict:
    """Not equal as functions of the coefficients: a refutation only with values that show it."""
    assert comparison.differs_at is not None
    search = search_witness(question.left, question.right, comparison.differs_at, question.coefficients)
    method = "exact" if search.exact else "certified"
    if search.counterexample is None:
        return Verdict(said, intent.span, "undecided", method, reason=_why_undecided(search))
    reason = ""
    if search.file_agrees and search.exact:
        reason = f"holds for the numbers of the file only: make {_unnamed(question)} a const, or name it in the claim"
    elif search.file_agrees:
        reason = "with the numbers of the file both sides are equal as far as 512 bits tell"
    return Verdict(said, intent.span, "refuted", method, counterexample=search.counterexample, reason=reason)


def _why_undecided(search: Search) -> str:
    if search.cut_off:
        return (
            f"not equal as functions of z and the coefficients, but the first {search.cut_off} samples, where "
            "the search for a witness ends, show no difference"
        )
    if search.file_agrees:
        return (
            "equal as far as 512 bits tell, but not as functions of the coefficients: each value of "
            "sqrt, sin, cos, tan, exp and pi is a free symbol in a proof"
        )
    return "not equal as functions of the coefficients, but no values were found that show a difference"


def _unnamed(question: _Question) -> str:
    """The coefficients whose value the diagram needs and the claim does not name."""
    drawn = varying_names(question.coefficients, question.left.expressions())
    claimed = set(varying_names(question.coefficients, question.right.expressions()))
    missing = [name for name in drawn if name not in claimed]
    return ", ".join(missing or drawn)
