"""Sections of filters as difference equations in fractions, and the structures that can be drawn for them.

They run here without the tool, so they say independently what a diagram has to do.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from fractions import Fraction
from random import Random

Values = dict[str, Fraction]


@dataclass(frozen=True)
class Factor:
    """A coefficient of the fuzzer: a number times at most one name."""

    number: Fraction
    name: str = ""

    def text(self) -> str:
        size = str(abs(self.number))
        return self.name if self.name and size == "1" else f"{size}*{self.name}" if self.name else size

    def signed(self) -> str:
        return ("-" if self.number < 0 else "+") + self.text()

    def value(self, values: Values) -> Fraction:
        return self.number * values[self.name] if self.name else self.number

    def negated(self) -> Factor:
        return replace(self, number=-self.number)


ONE = Factor(Fraction(1))


@dataclass(frozen=True)
class Section:
    """y[n] = sum of b_k x[n-k] - sum of a_k y[n-k], and what x and y were before sample 0."""

    b: tuple[Factor, ...]
    a: tuple[Factor, ...]
    past_x: tuple[int, ...] = ()
    past_y: tuple[int, ...] = ()

    def ratio(self, power: int = 0) -> str:
        """In z^-1, or with both sides times z^power."""

        def polynomial(factors: tuple[Factor, ...]) -> str:
            return " ".join(f"{factor.signed()}*z^{power - k}" for k, factor in enumerate(factors)).removeprefix("+")

        return f"({polynomial(self.b)})/({polynomial((ONE, *self.a))})"

    def equation(self) -> str:
        terms = [f"{factor.signed()}*x[n-{k}]" if k else f"{factor.signed()}*x[n]" for k, factor in enumerate(self.b)]
        terms += [f"{factor.negated().signed()}*y[n-{k}]" for k, factor in enumerate(self.a, 1)]
        past = [f", x[-{k}] = {value}" for k, value in enumerate(self.past_x, 1)]
        past += [f", y[-{k}] = {value}" for k, value in enumerate(self.past_y, 1)]
        return f"y[n] = {' '.join(terms).removeprefix('+')}{''.join(past)}"

    def run(self, x: list[Fraction], values: Values, *, held: bool) -> list[Fraction]:
        """The samples of y; with what was held before sample 0, or from rest."""
        b, a = ([factor.value(values) for factor in side] for side in (self.b, self.a))
        before_x = {-k: Fraction(value) for k, value in enumerate(self.past_x, 1)} if held else {}
        before_y = {-k: Fraction(value) for k, value in enumerate(self.past_y, 1)} if held else {}
        y: list[Fraction] = []
        for n in range(len(x)):
            new = [b[k] * (x[n - k] if n >= k else before_x.get(n - k, 0)) for k in range(len(b))]
            old = [a[k - 1] * (y[n - k] if n >= k else before_y.get(n - k, 0)) for k in range(1, len(a) + 1)]
            y.append(sum(new, Fraction(0)) - sum(old, Fraction(0)))
        return y


@dataclass(frozen=True)
class Chain:
    """Sections one after the other, `late` samples later."""

    sections: tuple[Section, ...]
    late: int = 0

    def run(self, source: str, values: Values, samples: int) -> list[Fraction]:
        signal = [Fraction(int(n == self.late and source != "")) for n in range(samples)]
        for section in self.sections:
            signal = section.run(signal, values, held=source == "")
        return signal

    def ratio(self, random: Random) -> str:
        shape = " * ".join(section.ratio(random.randint(-2, 3)) for section in self.sections)
        return shape + (f" late {self.late} samples" if self.late else "")


def line(name: str, terms: list[tuple[Factor, str]]) -> str:
    """An adder, or a gain where there is one term."""
    if len(terms) == 1:
        return f"gain {name} = {'-' if terms[0][0].number < 0 else ''}{terms[0][0].text()} * {terms[0][1]}"
    wires = [("-" if factor.number < 0 else "+") + f" {factor.text()}*{signal}" for factor, signal in terms]
    return f"adder {name} = {' '.join(wires).removeprefix('+ ')}"


def cells(name: str, signal: str, number: int, held: tuple[int, ...] = ()) -> list[str]:
    names = ", ".join(f"{name}{k}" for k in range(1, number + 1))
    starts = f" starts {', '.join(map(str, held))}" if held else ""
    return [f"delay {names} = {signal}{starts}"] if number else []


def direct_one(section: Section, x: str, y: str) -> list[str]:
    terms = [(factor, f"{y}_x{k}" if k else x) for k, factor in enumerate(section.b)]
    terms += [(factor.negated(), f"{y}_y{k}") for k, factor in enumerate(section.a, 1)]
    return [
        line(y, terms),
        *cells(f"{y}_x", x, len(section.b) - 1, section.past_x),
        *cells(f"{y}_y", y, len(section.a), section.past_y),
    ]


def direct_two(section: Section, x: str, y: str) -> list[str]:
    back = [(ONE, x), *((factor.negated(), f"{y}_w{k}") for k, factor in enumerate(section.a, 1))]
    forth = [(factor, f"{y}_w{k}" if k else f"{y}_w") for k, factor in enumerate(section.b)]
    return [
        line(f"{y}_w", back),
        line(y, forth),
        *cells(f"{y}_w", f"{y}_w", max(len(section.a), len(section.b) - 1)),
    ]


def transposed(section: Section, x: str, y: str) -> list[str]:
    size = max(len(section.a), len(section.b) - 1)
    lines: list[str] = []
    for k in range(size + 1):
        terms = [(section.b[k], x)] if k < len(section.b) else []
        terms += [(section.a[k - 1].negated(), y)] if 0 < k <= len(section.a) else []
        terms += [(ONE, f"{y}_s{k + 1}")] if k < size else []
        lines.append(line(f"{y}_t{k}" if k else y, terms))
        lines += [f"delay {y}_s{k} = {y}_t{k}"] if k else []
    return lines


def drawn_as(chain: Chain, random: Random, x: str, y: str) -> list[str]:
    """The lines of a chain: every section in one of three structures."""
    lines = [f"delay {y}_in = {x} by {chain.late}"] if chain.late else []
    source = f"{y}_in[end]" if chain.late else x
    for at, section in enumerate(chain.sections):
        name = y if at == len(chain.sections) - 1 else f"{y}_{at}"
        held = any(section.past_x) or any(section.past_y)
        lines += (direct_one if held else random.choice([direct_one, direct_two, transposed]))(section, source, name)
        source = name
    random.shuffle(lines)
    return lines


def coef_lines(names: list[str], values: Values | None) -> list[str]:
    return [f"coef {name}" + (f" = {values[name]}" if values else "") for name in names]
