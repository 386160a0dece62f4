"""All diagrams of a file and its includes, elaborated on demand, each once for every rate it is used at."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field
from fractions import Fraction

from flowgraph.diagram.diagram import Diagram
from flowgraph.source.diagnostic import Diagnostic
from flowgraph.text import syntax as s
from flowgraph.text.exact import LEVELS
from flowgraph.text.scope import Fault, Scope
from flowgraph.text.words import LONGEST_NAME, RESERVED, nearest


@dataclass(frozen=True, slots=True)
class Elaborated:
    """What became of one diagram: None where a line of it could not be understood."""

    diagram: Diagram | None
    rate_inherited: bool
    size: int
    levels: int
    """How deep diagrams are used in it, itself included."""
    findings: tuple[Diagnostic, ...]


@dataclass(slots=True)
class Program:
    """Diagrams by name; `elaborate` makes one of them, given the rate of its user."""

    texts: dict[str, s.DiagramText]
    elaborate: Callable[[Program, s.DiagramText, Fraction | None], Elaborated]
    made: dict[tuple[str, Fraction | None], Elaborated] = field(default_factory=dict)
    open: list[str] = field(default_factory=list)
    broken: set[str] = field(default_factory=set)
    """Diagrams that a file tried to define and that could not be read."""
    too_large: set[str] = field(default_factory=set)
    """Diagrams beyond the bound by what they use."""
    left_alone: set[str] = field(default_factory=set)
    """The large ones that those are built from."""

    def make(self, name: str, rate: Fraction | None) -> Elaborated:
        """The diagram at a rate: its own where it has one, else the user's."""
        key = (name, rate)
        if key not in self.made:
            self.open.append(name)
            try:
                self.made[key] = self.elaborate(self, self.texts[name], rate)
            finally:
                self.open.pop()
        return self.made[key]

    def used(self, scope: Scope, name: s.Word) -> Elaborated:
        """The diagram that a line of `scope` names. Raises Fault."""
        if name.text not in self.texts:
            if name.text in self.broken:
                raise scope.silent()
            close = nearest(name.text, list(self.texts))
            raise scope.fault(
                "diagram-missing",
                f"there is no diagram {name.text}",
                name.start,
                name.end,
                f"did you mean {close}?" if close else "define it, or include the file it stands in",
            )
        if name.text in self.open:
            path = [*self.open[self.open.index(name.text) :], name.text]
            raise scope.fault(
                "uses-itself",
                f"the diagram {name.text} leads back to itself: {' -> '.join(path)}",
                name.start,
                name.end,
                "a diagram is built from others, never from itself",
            )
        if name.text in self.too_large:
            raise scope.silent()
        if len(self.open) > LEVELS:
            raise scope.fault("too-deep", f"diagrams used more than {LEVELS} deep", name.start, name.end)
        made = self.make(name.text, scope.rate)
        if made.diagram is None:
            raise Fault()
        scope.levels = max(scope.levels, made.levels + 1)
        if scope.levels > LEVELS:
            raise scope.fault("too-deep", f"diagrams used more than {LEVELS} deep", name.start, name.end)
        own = made.diagram.rate
        if own is not None and scope.rate is not None and own != scope.rate:
            raise scope.fault(
                "rate-differs",
                f"{name.text} runs at {own} Hz, and this diagram at {scope.rate} Hz",
                name.start,
                name.end,
                "one diagram has one rate",
            )
        if own is not None and scope.rate is None:
            raise scope.fault(
                "rate-missing",
                f"{name.text} runs at {own} Hz, and this diagram has no rate",
                name.start,
                name.end,
                "add the same rate line here",
            )
        return made

    def versions(self, name: str) -> list[Elaborated]:
        """What was made of a diagram: at its users' rates first where its own text needs one, else by itself."""
        made = [found for (known, rate), found in self.made.items() if known == name and rate is not None]
        alone = self.made.get((name, None))
        if alone is None:
            return made
        return made if made and alone.rate_inherited else [alone, *made]

    def check_name(self, scope: Scope, name: s.Word) -> None:
        """Tells a reserved or overlong name of a diagram."""
        if name.text in RESERVED:
            scope.tell(
                scope.fault(
                    "reserved",
                    f"{name.text} is a word of the language and no name",
                    name.start,
                    name.end,
                    "choose another name",
                ).finding
            )
        elif len(name.text) > LONGEST_NAME:
            scope.tell(
                scope.fault(
                    "name-too-long", f"a name has at most {LONGEST_NAME} characters", name.start, name.end
                ).finding
            )
