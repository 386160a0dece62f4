"""One diagram of a file -> a Diagram: names, coefficients, elements, claims, then the structural rules."""

from __future__ import annotations

import os
from collections.abc import Callable
from dataclasses import dataclass, field, replace
from fractions import Fraction
from itertools import pairwise
from typing import get_args

from flowgraph.diagram.claim import Claim
from flowgraph.diagram.diagram import Coefficient, Diagram, Use
from flowgraph.diagram.elements import Element, Input, Output
from flowgraph.text import syntax as s
from flowgraph.text.build import adder, delays, gain
from flowgraph.text.claims import claim
from flowgraph.text.coefs import (
    check_coefs,
    define_consts,
    define_rate,
    measure_arrays,
    name_coefs,
    value_coefs,
)
from flowgraph.text.define import Definer
from flowgraph.text.instances import Instance, instances, leave_out
from flowgraph.text.instantiate import coefficients_under, elements_under
from flowgraph.text.meaning import full_name
from flowgraph.text.names import undefined
from flowgraph.text.place import given
from flowgraph.text.program import Elaborated, Program
from flowgraph.text.rules import judge
from flowgraph.text.scope import Fault, Scope
from flowgraph.text.signals import signal
from flowgraph.text.words import names_in_text


def elaborate(program: Program, text: s.DiagramText, rate: Fraction | None) -> Elaborated:
    """The diagram and every finding about it. `rate` is the user's, where the diagram has none of its own."""
    return _Elaboration(program, text, rate).run()


@dataclass(slots=True)
class _Elaboration:
    program: Program
    text: s.DiagramText
    user_rate: Fraction | None
    scope: Scope = field(init=False)
    definer: Definer = field(init=False)
    elements: dict[str, Element] = field(default_factory=dict)
    coefficients: dict[str, Coefficient] = field(default_factory=dict)
    uses: list[Use] = field(default_factory=list)
    claims: list[Claim] = field(default_factory=list)
    claim_reads: set[str] = field(default_factory=set)
    unused: dict[str, s.Reference] = field(default_factory=dict)
    rows: list[list[tuple[str, s.Reference]]] = field(default_factory=list)
    page: dict[str, list[str]] = field(default_factory=dict)

    def __post_init__(self) -> None:
        self.scope = Scope(self.text.source)
        self.definer = Definer(self.scope, self.program)

    def run(self) -> Elaborated:
        scope = self.scope
        self.program.check_name(scope, self.text.name)
        plain = [line for line in self.text.body if isinstance(line, s.Statement)]
        for broken in _broken_lines(self.text.body):
            leave_out(scope, broken)
        define_rate(scope, plain)
        own_rate = scope.rate is not None
        if not own_rate:
            scope.rate = self.user_rate
        scope.labels.update(_labels(self.text.body))
        folder = os.path.dirname(scope.source.name) or "."
        files = measure_arrays(scope, plain, folder)
        define_consts(scope, plain)
        try:
            lines = list(instances(scope, self.text.body, {}))
        except Fault as fault:
            scope.tell(fault.finding)
            return Elaborated(None, False, scope.size, scope.levels, tuple(scope.findings))
        lines = self._each(lines, self._name)
        self._each([line for line in lines if is_coef(line.node)], lambda line: value_coefs(scope, line, files))
        check_coefs(scope)
        self._each([line for line in lines if not is_claim(line.node)], self._build)
        self.coefficients = {**scope.coefs, **self.coefficients}
        diagram = self._diagram()
        for line in lines:
            if is_claim(line.node):
                self._claim(line, diagram)
        diagram = replace(diagram, claims=tuple(self.claims))
        judge(scope, diagram, self.definer, self.unused, self.claim_reads)
        kept = None if scope.unresolved else diagram
        return Elaborated(kept, not own_rate and scope.used_rate, scope.size, scope.levels, tuple(scope.findings))

    def _each(self, lines: list[Instance], act: Callable[[Instance], None]) -> list[Instance]:
        """Runs one pass over the lines; those that fail are told and left out from there on."""
        kept: list[Instance] = []
        for line in lines:
            self.scope.terms = 0
            try:
                act(line)
                kept.append(line)
            except Fault as fault:
                self.scope.tell(fault.finding)
                self.scope.give_up(line.start, line.end)
        return kept

    def _name(self, line: Instance) -> None:
        name_coefs(self.scope, line)
        self.definer.define(line)

    def _build(self, line: Instance) -> None:
        scope, env = self.scope, line.env
        match line.node:
            case s.InputLine(names):
                for name in names:
                    full = full_name(scope, name, env)
                    self.elements[full] = Input(full, scope.span(name.start, name.end))
            case s.AdderLine():
                self._add(adder(scope, line.node, line))
            case s.GainLine():
                self._add(gain(scope, line.node, line))
            case s.DelayLine():
                made = delays(scope, line.node, line)
                for element in made:
                    self._add(element)
                for element, following in pairwise(made):
                    scope.chained.append((element, following))
            case s.UseLine(name, applied) | s.CascadeLine(name, applied):
                self._use(full_name(scope, name, env), applied, line)
            case s.WireLine(name, _):
                signal(scope, scope.aliases[full_name(scope, name, env)].target, env)
            case s.Unused(names):
                for name in names:
                    self.unused.setdefault(full_name(scope, name, env), name)
            case s.Row(names):
                self.rows.append([(full_name(scope, name, env), name) for name in names])
            case s.PageLine(kind, word):
                said = self.page.setdefault(kind, [])
                if said and kind != "note":
                    raise scope.fault("defined-twice", f"the diagram has a {kind} already", line.start, line.end)
                said.append(word.text)
            case _:
                pass

    def _add(self, element: Element) -> None:
        self.elements[element.name] = element

    def _use(self, full: str, applied: s.Application, line: Instance) -> None:
        """Spells out every copy of a used diagram."""
        scope = self.scope
        for path, diagram, fed, row in self.definer.copies[full]:
            values = given(scope, diagram, applied, row, line.env)
            sources = {port: signal(scope, reference, line.env) for port, reference in fed.items()}
            self.elements.update(elements_under(path, diagram, sources))
            self.coefficients.update(coefficients_under(path, diagram, values))
            self.uses.append(Use(path, diagram, values, scope.span(line.start, line.end)))

    def _claim(self, line: Instance, diagram: Diagram) -> None:
        """A claim that cannot be understood leaves the diagram as it is."""
        self.scope.terms = 0
        try:
            self.claims.append(claim(self.scope, self.program, diagram, line, self.claim_reads))
        except Fault as fault:
            named = names_in_text(self.scope.source.text[line.start : line.end])
            self.scope.claimed.update(named)
            if fault.finding is not None:
                self.scope.tell(replace(fault.finding, code=f"claim-{fault.finding.code}"))

    def _diagram(self) -> Diagram:
        scope = self.scope
        outputs: dict[str, Output] = {}
        for full, reference, env in self.definer.outputs:
            try:
                self._expect_source(full, reference)
                outputs[full] = Output(full, signal(scope, reference, env), scope.ports[full])
            except Fault as fault:
                scope.tell(fault.finding)
                scope.unresolved = True
        return Diagram(
            self.text.name.text,
            self.elements,
            outputs,
            self.coefficients,
            tuple(self.claims),
            scope.rate,
            tuple([self._row(row) for row in self.rows]),
            "\n".join(self.page.get("title", [])),
            "\n".join(self.page.get("version", [])),
            tuple(self.page.get("note", [])),
            tuple(self.uses),
            scope.span(self.text.name.start, self.text.name.end),
        )

    def _expect_source(self, full: str, reference: s.Reference) -> None:
        """An output shows a signal that some line defines. Raises Fault."""
        scope = self.scope
        if full not in scope.defined and full not in scope.signals and reference.name not in scope.broken:
            raise scope.fault(
                "output-undefined",
                f"no line says what the output {full} is",
                reference.start,
                reference.end,
                f"add adder {full} = .., or write output {full} = .. with the signal it shows",
            )

    def _row(self, row: list[tuple[str, s.Reference]]) -> tuple[str, ...]:
        """The elements of a row, wires followed; a name that is none is told."""
        scope = self.scope
        names: list[str] = []
        for name, reference in row:
            signal = scope.signals.get(name) or scope.followed.get(name)
            if name in self.elements or name in scope.ports:
                names.append(name)
            elif signal is not None:
                names.append(signal.name)
            elif name not in scope.broken and name not in scope.excused:
                scope.tell(undefined(scope, name, reference).finding)
        return tuple(names)


CLAIMS = frozenset(get_args(s.ClaimNode))


def is_coef(node: s.Node) -> bool:
    """Whether a line gives coefficients their values."""
    return isinstance(node, s.Coef | s.CoefList | s.CoefFile)


def is_claim(node: s.Node) -> bool:
    """Whether a line is an intent or a requirement."""
    return type(node) in CLAIMS


def _broken_lines(body: tuple[s.BodyLine, ...]) -> list[s.Broken]:
    """The lines that could not be parsed, however deep in repeats."""
    found: list[s.Broken] = []
    for line in body:
        if isinstance(line, s.Broken):
            found.append(line)
        elif isinstance(line, s.Repeat):
            found.extend(_broken_lines(line.body))
    return found


def _labels(body: tuple[s.BodyLine, ...]) -> set[str]:
    """Every label that a repeat of the diagram runs through."""
    found: set[str] = set()
    for line in body:
        if isinstance(line, s.Repeat):
            if isinstance(line.head, s.RepeatIn):
                found.update(label.text for label in line.head.labels)
            found |= _labels(line.body)
    return found
