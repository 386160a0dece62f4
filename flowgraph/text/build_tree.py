"""The tree builder: Lark calls it for each rule it has read, and typed nodes come out at once."""

from __future__ import annotations

from typing import TypeAlias

from lark import Token, Transformer

from flowgraph.text import syntax as s
from flowgraph.text.exact import LEVELS, exact_number
from flowgraph.text.written import height

Limits: TypeAlias = tuple[s.Expr | None, s.Expr | None]
Response: TypeAlias = tuple[s.Reference, s.Reference]
Starts: TypeAlias = tuple[tuple[s.Expr, ...], bool]


class MisplacedError(ValueError):
    """Something the grammar takes and the language does not; `start` and `end` say where."""

    def __init__(self, code: str, message: str, mend: str, start: int, end: int) -> None:
        super().__init__(message)
        self.code, self.message, self.mend, self.start, self.end = code, message, mend, start, end


class TreeBuilder(Transformer[Token, s.Node]):
    """One method a rule; every terminal is a `Word` with its place in the file.

    `origin` is the offset of the line that is being read.
    """

    origin = 0

    def _word(self, token: Token) -> s.Word:
        start = self.origin + (token.start_pos or 0)
        return s.Word(str(token), start, start + len(token))

    NAME = NUMBER = UNIT = OPERATOR = SIGN = LPAR = RPAR = RSQB = FUNCTION = FOLD = COUNT = COUNTED = _word

    def STRING(self, token: Token) -> s.Word:  # noqa: N802
        word = self._word(token)
        return word._replace(text=word.text[1:-1])

    # Expressions

    def number(self, parts: tuple[s.Word, s.Word | None]) -> s.Figure:
        figure, unit = parts
        if unit is None:
            return s.Figure(exact_number(figure.text), "", figure.start, figure.end)
        return s.Figure(exact_number(figure.text, unit.text), unit.text, figure.start, unit.end)

    def reference(self, parts: list[s.Word | s.At]) -> s.Reference:
        name = parts[0]
        assert isinstance(name, s.Word)
        if len(parts) == 1:
            return s.Reference(name.text, (), name.start, name.end)
        inner = tuple(part.text if isinstance(part, s.Word) else part for part in parts[1:])
        return s.Reference(name.text, inner, name.start, parts[-1].end)

    def index(self, parts: tuple[s.Expr, s.Word]) -> s.At:
        return s.At(parts[0], parts[1].end)

    def chain(self, parts: list[s.Word | s.Expr]) -> s.Expr:
        """A run of factors and operators: products are grouped first, then added."""
        terms: list[s.Signed] = []
        factors: list[s.Factor] = []
        negative = signed = divides = False
        for part in parts:
            if not isinstance(part, s.Word):
                factors.append(s.Factor(divides, part))
            elif part.text == "*":
                divides = False
            elif part.text == "/":
                divides = True
            else:
                if factors:
                    terms.append(s.Signed(negative, _group(factors)))
                    factors = []
                divides = False
                negative = part.text == "-"
                signed = True
        last = _group(factors)
        if not signed:
            return last
        terms.append(s.Signed(negative, last))
        return s.Total(tuple(terms), parts[0].start, last.end)

    def power(self, parts: tuple[s.Expr, s.Word | None, s.Expr]) -> s.Raised:
        base, sign, exponent = parts
        levels = max(height(base), height(exponent) + 1)
        if levels > LEVELS:
            raise MisplacedError(
                "too-deep", f"more than {LEVELS} powers on top of each other", "", base.start, exponent.end
            )
        if sign is not None:
            exponent = s.Total((s.Signed(sign.text == "-", exponent),), sign.start, exponent.end)
        return s.Raised(base, exponent, levels, base.start, exponent.end)

    def bracket(self, parts: tuple[s.Word, s.Expr, s.Word]) -> s.Bracket:
        return s.Bracket(parts[1], parts[0].start, parts[2].end)

    def call(self, parts: tuple[s.Word, s.Expr, s.Word]) -> s.Call:
        return s.Call(parts[0].text, parts[1], parts[0].start, parts[2].end)

    def fold(self, parts: tuple[s.Word, s.Word, s.Expr, s.Expr, s.Expr, s.Word]) -> s.Fold:
        kind, variable, first, last, body, close = parts
        return s.Fold(kind.text, variable, first, last, body, kind.start, close.end)

    def count(self, parts: tuple[s.Word, s.Word, s.Word]) -> s.CountOf:
        return s.CountOf(parts[1], parts[0].start, parts[2].end)

    # Lists

    def names(self, parts: list[s.Reference]) -> tuple[s.Reference, ...]:
        return tuple(parts)

    def labels(self, parts: list[s.Word]) -> tuple[s.Word, ...]:
        return tuple(parts)

    def sums(self, parts: list[s.Expr]) -> tuple[s.Expr, ...]:
        return tuple(parts)

    def histories(self, parts: list[s.Reference | s.Expr]) -> tuple[tuple[s.Reference, s.Expr], ...]:
        return tuple(zip(parts[0::2], parts[1::2], strict=True))  # type: ignore[arg-type]

    def response(self, parts: tuple[s.Reference, s.Word, s.Reference]) -> Response:
        output, mark, input_ = parts
        if mark.text != "/":
            raise MisplacedError(
                "syntax", f"{mark.text} cannot stand here", "write output / input", mark.start, mark.end
            )
        return output, input_

    def by(self, parts: tuple[s.Expr]) -> s.Expr:
        return parts[0]

    def late(self, parts: tuple[s.Expr]) -> s.Expr:
        return parts[0]

    def starts(self, parts: tuple[tuple[s.Expr, ...]]) -> Starts:
        return parts[0], False

    def starts_listed(self, parts: tuple[tuple[s.Expr, ...]]) -> Starts:
        return parts[0], True

    def between(self, parts: tuple[s.Expr, s.Expr]) -> Limits:
        return parts[0], parts[1]

    def at_most(self, parts: tuple[s.Expr]) -> Limits:
        return None, parts[0]

    def at_least(self, parts: tuple[s.Expr]) -> Limits:
        return parts[0], None

    def named_argument(self, parts: tuple[s.Word, s.Expr]) -> s.Argument:
        return s.Argument(parts[0], parts[1])

    def argument(self, parts: tuple[s.Expr]) -> s.Argument:
        return s.Argument(None, parts[0])

    def arguments(self, parts: list[s.Argument]) -> tuple[s.Argument, ...]:
        return tuple(parts)

    def binding(self, parts: tuple[s.Reference, s.Expr]) -> s.Binding:
        return s.Binding(parts[0], parts[1], False)

    def binding_each(self, parts: tuple[s.Reference, s.Reference]) -> s.Binding:
        return s.Binding(parts[0], parts[1], True)

    def binding_table(self, parts: tuple[s.Reference]) -> s.Binding:
        raise later(f"with {parts[0].name}", parts[0].start, parts[0].end)

    def bindings(self, parts: list[s.Binding]) -> tuple[s.Binding, ...]:
        return tuple(parts)

    def application(self, parts: tuple[s.Word, tuple[s.Argument, ...], tuple[s.Binding, ...] | None]) -> s.Application:
        return s.Application(parts[0], parts[1], parts[2] or ())

    # Lines

    def diagram(self, parts: tuple[s.Word]) -> s.Node:
        return s.DiagramHead(parts[0])

    def include(self, parts: tuple[s.Word]) -> s.Node:
        return s.Include(parts[0])

    def title(self, parts: tuple[s.Word]) -> s.Node:
        return s.PageLine("title", parts[0])

    def version(self, parts: tuple[s.Word]) -> s.Node:
        return s.PageLine("version", parts[0])

    def note(self, parts: tuple[s.Word]) -> s.Node:
        return s.PageLine("note", parts[0])

    def row(self, parts: tuple[tuple[s.Reference, ...]]) -> s.Node:
        return s.Row(parts[0])

    def unused(self, parts: tuple[tuple[s.Reference, ...]]) -> s.Node:
        return s.Unused(parts[0])

    def rate(self, parts: tuple[s.Expr]) -> s.Node:
        return s.Rate(parts[0])

    def const(self, parts: tuple[s.Reference, s.Expr]) -> s.Node:
        return s.Const(*parts)

    def open_coefs(self, parts: tuple[tuple[s.Reference, ...]]) -> s.Node:
        return s.OpenCoefs(parts[0])

    def coef(self, parts: tuple[s.Reference, s.Expr]) -> s.Node:
        return s.Coef(*parts)

    def coef_list(self, parts: tuple[s.Reference, tuple[s.Expr, ...]]) -> s.Node:
        return s.CoefList(*parts)

    def coef_file(self, parts: tuple[s.Reference, s.Word]) -> s.Node:
        return s.CoefFile(*parts)

    def input(self, parts: tuple[tuple[s.Reference, ...]]) -> s.Node:
        return s.InputLine(parts[0])

    def output(self, parts: tuple[tuple[s.Reference, ...]]) -> s.Node:
        return s.OutputLine(parts[0])

    def output_of(self, parts: tuple[s.Reference, s.Expr]) -> s.Node:
        return s.OutputOf(*parts)

    def adder(self, parts: tuple[s.Reference, s.Expr]) -> s.Node:
        return s.AdderLine(*parts)

    def gain(self, parts: tuple[s.Reference, s.Expr]) -> s.Node:
        return s.GainLine(*parts)

    def wire(self, parts: tuple[s.Reference, s.Expr]) -> s.Node:
        return s.WireLine(*parts)

    def delay(self, parts: tuple[tuple[s.Reference, ...], s.Expr, s.Expr | None, Starts | None]) -> s.Node:
        names, right, by, starts = parts
        values, listed = starts if starts is not None else (None, False)
        return s.DelayLine(names, right, by, values, listed)

    def use(self, parts: tuple[s.Reference, s.Application]) -> s.Node:
        return s.UseLine(*parts)

    def cascade(self, parts: tuple[s.Reference, s.Application]) -> s.Node:
        return s.CascadeLine(*parts)

    def repeat(self, parts: tuple[s.Word, s.Expr, s.Expr]) -> s.Node:
        return s.RepeatHead(*parts)

    def repeat_in(self, parts: tuple[s.Word, tuple[s.Word, ...]]) -> s.Node:
        return s.RepeatIn(*parts)

    def equation(self, parts: tuple[s.Reference, s.Expr, tuple[tuple[s.Reference, s.Expr], ...]]) -> s.Node:
        return s.EquationLine(*parts)

    def ratio(self, parts: tuple[Response, s.Expr, s.Expr | None]) -> s.Node:
        (output, input_), ratio, late = parts
        return s.RatioLine(output, input_, ratio, late)

    def same_as(self, parts: tuple[s.Reference, s.Application]) -> s.Node:
        return s.SameAsLine(*parts)

    def require(self, parts: tuple[s.Word | None, s.RequirementNode]) -> s.Node:
        number, requirement = parts
        return requirement if number is None else requirement._replace(number=number.text)

    def stable(self, parts: list[s.Word]) -> s.Node:
        return s.StableLine("")

    def bounded(self, parts: tuple[Response]) -> s.Node:
        return s.BoundedLine("", *parts[0])

    def gain_limit(self, parts: tuple[Response, s.Expr, Limits]) -> s.Node:
        (output, input_), frequency, (lowest, highest) = parts
        return s.GainLimitLine("", output, input_, frequency, lowest, highest)

    def count_limit(self, parts: tuple[s.Word, s.Expr]) -> s.Node:
        return s.CountLine("", parts[0].text, parts[1])


def _group(factors: list[s.Factor]) -> s.Expr:
    """One factor alone, or a product."""
    if len(factors) == 1:
        return factors[0].body
    return s.Scaled(tuple(factors), factors[0].body.start, factors[-1].body.end)


def later(what: str, start: int, end: int) -> MisplacedError:
    """The one wording for what the language describes and this program does not know yet."""
    return MisplacedError("not-yet", f"`{what}` is not known here yet", "", start, end)
