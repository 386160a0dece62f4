"""Nothing false is ever proved: random structures with claims that are true by construction, and with slips in them.

What is true is known without the tool's algebra: a section is its difference equation, run here in fractions.
"""

from __future__ import annotations

from dataclasses import replace
from decimal import Decimal, localcontext
from fractions import Fraction
from itertools import count
from math import isqrt
from random import Random

import pytest
from random_sections import Chain, Factor, Section, Values, coef_lines, direct_one, direct_two, drawn_as, transposed
from read_diagram import read_diagram

from flowgraph.claims.analysis import analyse
from flowgraph.claims.verdict import Verdict
from flowgraph.claims.verify import verify


def some_chain(random: Random, names: list[str]) -> Chain:
    """One to three sections with random coefficients, some of them named, none of them 0."""

    def factor() -> Factor:
        number = Fraction(random.choice([-1, 1]) * random.randint(1, 99), random.choice([1, 2, 7, 10, 100]))
        return Factor(random.choice([number, Fraction(1)]), random.choice(["", *names]))

    def section() -> Section:
        return Section(
            tuple(factor() for _ in range(random.randint(1, 3))), tuple(factor() for _ in range(random.randint(0, 2)))
        )

    if random.random() < 0.3:
        only = section()
        past = [tuple(random.randint(-3, 3) for _ in range(k)) for k in (len(only.b) - 1, len(only.a))]
        return Chain((replace(only, past_x=past[0], past_y=past[1]),))
    return Chain(tuple(section() for _ in range(random.randint(1, 3))), random.choice([0, 0, 3]))


def slipped(chain: Chain, random: Random, names: list[str]) -> Chain:
    """The same with one slip: last digit, sign, another name, one delay more, other contents."""
    at = random.randrange(len(chain.sections))
    section = chain.sections[at]
    kind = random.choice(["digit", "sign", "name", "late", "past"])
    if kind == "late" and not any((*section.past_x, *section.past_y)):
        return replace(chain, late=chain.late + 1)
    if kind == "past" and section.past_y:
        changed = replace(section, past_y=(section.past_y[0] + 1, *section.past_y[1:]))
    else:
        side = random.choice(["a", "b"]) if section.a else "b"
        factors = list(getattr(section, side))
        k = random.randrange(len(factors))
        old = factors[k]
        others = [name for name in names if name != old.name]
        if kind == "sign":
            factors[k] = old.negated()
        elif kind == "name" and others:
            factors[k] = replace(old, name=random.choice(others))
        else:
            factors[k] = replace(old, number=old.number + Fraction(1, 10 ** random.choice([2, 12, 40])))
        changed = replace(section, **{side: tuple(factors)})
    return replace(chain, sections=(*chain.sections[:at], changed, *chain.sections[at + 1 :]))


def holds_anything(chain: Chain) -> bool:
    return any(any((*section.past_x, *section.past_y)) for section in chain.sections)


def intents(chain: Chain, random: Random, names: list[str], number: int, *, held: bool) -> tuple[list[str], list[str]]:
    """Up to three claims that say the diagram is `chain`, and the other diagram they need. A ratio is
    silent about contents, so there is none where the diagram has `held` some."""
    equation = len(chain.sections) == 1 and not chain.late
    claims = [f"intent {chain.sections[0].equation()}"] if equation else []
    if not held:
        claims.append(f"intent y / x = {chain.ratio(random)}")
    given = ", ".join(f"{name} = {name}" for name in names)
    claims.append(f"intent y = other{number}(x)" + (f" with {given}" if given else ""))
    lines = [*coef_lines(names, None), "input u", "output v", *drawn_as(chain, random, "u", "v")]
    return claims, [f"diagram other{number} {{", *lines, "}"]


def confirmed(verdict: Verdict, true: Chain, false: Chain, values: Values) -> bool:
    """Whether both sides, run here at the values of the witness, part where and as it says."""
    shown = verdict.counterexample
    assert shown is not None
    here = values | {name: Fraction(text) for name, text in shown.coefficients}
    ours, theirs = (chain.run(shown.source, here, shown.sample + 1) for chain in (true, false))
    return ours[:-1] == theirs[:-1] and (str(ours[-1]), str(theirs[-1])) == (shown.diagram, shown.claim)


def used_names(chain: Chain) -> list[str]:
    factors = [factor for section in chain.sections for factor in (*section.b, *section.a)]
    return sorted({factor.name for factor in factors} - {""})


@pytest.mark.parametrize("seed", range(60))
def test_true_claims_are_proved_and_slips_are_refuted_with_a_witness_that_holds(seed: int) -> None:
    """Equations, ratios and other diagrams, over open, valued and plain coefficients."""
    random = Random(seed)
    names = random.choice([[], ["p"], ["p", "q", "w"]])
    chain = some_chain(random, names)
    names = used_names(chain)
    values = {name: Fraction(random.randint(2, 9), 10) for name in names}
    valued = random.random() < 0.5
    wrong = [slipped(chain, random, names) for _ in range(3)]
    claims: list[str] = []
    others: list[str] = []
    sides: list[Chain] = []
    for number, side in zip(count(), [chain, *wrong], strict=False):
        said, other = intents(side, random, names, number, held=holds_anything(chain))
        claims, others, sides = claims + said, others + other, sides + [side] * len(said)
    lines = [*coef_lines(names, values if valued else None), "input x", "output y", *drawn_as(chain, random, "x", "y")]
    text = "\n".join([*others, "diagram d {", *lines, *claims, "}"])
    verdicts = verify(read_diagram(text))
    for verdict, side in zip(verdicts, sides, strict=True):
        assert verdict.outcome == ("proved" if side is chain else "refuted"), (text, verdict)
        assert side is chain or confirmed(verdict, chain, side, values), (text, verdict)


@pytest.mark.parametrize("seed", range(15))
def test_every_output_is_told_apart_for_every_input(seed: int) -> None:
    """Two inputs, two outputs, four responses: each is proved, and refuted with a slip in it."""
    random = Random(seed)
    lines = ["coef p, q", "input x0, x1", "output y0, y1", "adder y0 = s00 + s10", "adder y1 = s01 - s11"]
    claims: list[str] = []
    sides: list[tuple[Chain, Chain]] = []
    for i in (0, 1):
        for j in (0, 1):
            made = some_chain(random, ["p", "q"])
            at_rest = tuple(replace(section, past_x=(), past_y=()) for section in made.sections)
            chain = replace(made, sections=at_rest)
            lines += drawn_as(chain, random, f"x{i}", f"s{i}{j}")
            sign = "-" if i and j else ""
            for side in (chain, slipped(chain, random, ["p", "q"])):
                claims.append(f"intent y{j} / x{i} = {sign}{side.ratio(random)}")
                sides.append((chain, side))
    lines += ["adder both = p*x0 + q*x0x", "delay x0x = x0", "output rest = both"]
    verdicts = verify(read_diagram("\n".join(["diagram d {", *lines, *claims, "}"])))
    for verdict, (chain, side) in zip(verdicts, sides, strict=True):
        assert verdict.outcome == ("proved" if side is chain else "refuted"), (lines, verdict)
        if side is not chain and "= -" not in verdict.claim:
            assert confirmed(verdict, chain, side, {})


def cosine(turns: Fraction) -> Decimal:
    """cos(2 pi turns) by its power series, in the precision in force."""
    pi = Decimal("3.14159265358979323846264338327950288419716939937510582097494459230781640628620899862803")
    angle = 2 * pi * turns.numerator / turns.denominator
    total = term = Decimal(1)
    for k in range(1, 60):
        term = -term * angle * angle / (2 * k * (2 * k - 1))
        total += term
    return total


def decibels(b: list[Fraction], a: list[Fraction], turns: Fraction) -> Decimal:
    """The gain of b(w)/a(w) to fifty digits: |p|^2 is a sum of autocorrelations times cosines."""

    def squared(p: list[Fraction]) -> Decimal:
        lags = [sum((p[k] * p[k + lag] for k in range(len(p) - lag)), Fraction(0)) for lag in range(len(p))]
        parts = [Decimal(value.numerator) / Decimal(value.denominator) for value in lags]
        return parts[0] + 2 * sum(value * cosine(lag * turns % 1) for lag, value in enumerate(parts[1:], 1))

    return 10 * (squared(b) / squared(a)).log10()


@pytest.mark.parametrize("seed", range(12))
def test_gain_limits_are_told_from_the_gain_to_twenty_five_digits(seed: int) -> None:
    """A limit just above the gain is kept, one just below is broken; the gain comes from decimals."""
    random = Random(seed)
    b, a = ([Fraction(random.randint(-99, 99), 100) for _ in range(3)] for _ in range(2))
    turns = Fraction(random.randint(0, 24_000), 48_000)
    section = Section(tuple(Factor(v or Fraction(1)) for v in b), tuple(Factor(v or Fraction(1)) for v in a))
    with localcontext() as context:
        context.prec = 70
        sides = [factor.number for factor in section.b], [Fraction(1), *(factor.number for factor in section.a)]
        gain = decibels(*sides, turns)
        low, high = (f"{gain + sign * Decimal('1e-25'):.40f}" for sign in (-1, 1))
    place = f"require gain y / x at {turns * 48000} Hz"
    claims = [f"{place} <= {high} dB", f"{place} >= {low} dB", f"{place} within {low} .. {high} dB"]
    claims += [f"{place} <= {low} dB", f"{place} >= {high} dB"]
    lines = ["rate 48 kHz", "input x", "output y", *transposed(section, "x", "y"), *claims]
    verdicts = verify(read_diagram("\n".join(["diagram d {", *lines, "}"])))
    assert [verdict.outcome for verdict in verdicts] == ["proved"] * 3 + ["refuted"] * 2


def multiplied(left: list[Fraction], right: list[Fraction]) -> list[Fraction]:
    product = [Fraction(0)] * (len(left) + len(right) - 1)
    for i, a in enumerate(left):
        for j, b in enumerate(right):
            product[i + j] += a * b
    return product


@pytest.mark.parametrize("seed", range(30))
def test_stable_and_bounded_follow_from_the_poles_a_section_was_made_with(seed: int) -> None:
    """Poles down to 10^-20 from the circle; one of them is cancelled, so that only `stable` sees it."""
    random = Random(seed)

    def pole() -> tuple[list[Fraction], Fraction]:
        """A factor in z^-1 and its squared radius."""
        near = 1 + Fraction(random.choice([-1, -1, -1, 0, 1]), 10 ** random.randint(1, 20))
        if random.random() < 0.5:
            return [Fraction(1), random.choice([-1, 1]) * near], near**2
        c, s = random.choice([(3, 4), (5, 12), (-4, 3), (-12, 5)])
        real = near * Fraction(c, isqrt(c * c + s * s))
        return [Fraction(1), -2 * real, near**2], near**2

    hidden, hidden_radius = pole()
    numerator, denominator, radii = list(hidden), list(hidden), list[Fraction]()
    for _ in range(random.randint(1, 3)):
        factor, radius = pole()
        denominator, radii = multiplied(denominator, factor), [*radii, radius]
        if factor == hidden:
            numerator, radii = multiplied(numerator, factor), radii[:-1]
    section = Section(tuple(map(Factor, numerator)), tuple(map(Factor, denominator[1:])))
    shape = random.choice([direct_one, direct_two, transposed])
    lines = ["input x", "output y", *shape(section, "x", "y"), "require stable", "require bounded y / x"]
    verdicts = verify(read_diagram("\n".join(["diagram d {", *lines, "}"])))
    bounded = all(radius < 1 for radius in radii)
    stable = bounded and hidden_radius < 1
    assert [verdict.outcome for verdict in verdicts] == [
        "proved" if stable else "refuted",
        "proved" if bounded else "refuted",
    ]
    assert bool(verdicts[1].conditions) == (bounded and not stable)


def lag(coefficient: str, *lines: str) -> str:
    """y[n] = x[n] + coefficient * y[n-1]."""
    fixed = ["rate 1 kHz", "input x", "output y", f"adder y = x + {coefficient}*y1", "delay y1 = y"]
    return "\n".join(["diagram d {", *fixed, *lines, "}"])


@pytest.mark.parametrize(
    ("coefficient", "ratio", "conditions"),
    [
        ("a", "1/(1 - a*z^-1)", ()),
        ("a", "z^2/(z^2 - a*z)", ()),
        ("a", "z/(z - a)", ()),
        ("a", "a/(a - a^2*z^-1)", ("a <> 0",)),
        ("a", "z^3*a/(a*z^3 - a^2*z^2)", ("a <> 0",)),
        ("1/a", "1/(1 - z^-1/a)", ("a <> 0",)),
        ("1/a", "a/(a - z^-1)", ("a <> 0",)),
        ("a^-2", "(1 - a^-2*z^-1)^-1", ("a <> 0",)),
        ("a/(1 + a)", "(1 + a)/(1 + a - a*z^-1)", ("1 + a <> 0",)),
        ("sqrt(a)", "1/(1 - sqrt(a)*z^-1)", ("a >= 0",)),
        ("tan(a)", "1/(1 - tan(a)*z^-1)", ("cos(a) <> 0",)),
    ],
)
def test_a_proof_lists_exactly_the_values_at_which_a_denominator_vanishes(
    coefficient: str, ratio: str, conditions: tuple[str, ...]
) -> None:
    """With z or z^-1: what is left out is where the first coefficient of a denominator is 0."""
    (verdict,) = verify(read_diagram(lag(coefficient, "coef a", f"intent y / x = {ratio}")))
    assert (verdict.outcome, verdict.conditions) == ("proved", conditions)


@pytest.mark.parametrize(
    ("ratio", "outcome"),
    [
        ("(z^-2)/(z^-2 - 1/2*z^-3)", "proved"),
        ("(z^-9)^2/(z^-18 - 1/2*z^-19)", "proved"),
        ("z*z*z/(z*z*z - 1/2*z*z)", "proved"),
        ("(z - z + z^-1)/(z - z + z^-1 - 1/2*z^-2)", "proved"),
        ("z^2/(z - 1/2)", "refuted"),
        ("z", "refuted"),
        ("1/(z^-1 - 1/2*z^-2)", "refuted"),
        ("1/(z - z)", "refuted"),
        ("(z - z)/(z - z)", "refuted"),
        ("(z - z)*(z - z)^-1", "refuted"),
    ],
)
def test_ratios_that_start_late_and_ratios_that_no_diagram_has(ratio: str, outcome: str) -> None:
    """Common powers of z do no harm; what answers before its cause, or divides by zero, is refuted with a reason."""
    (verdict,) = verify(read_diagram(lag("1/2", f"intent y / x = {ratio}")))
    assert verdict.outcome == outcome
    assert verdict.reason.startswith("" if outcome == "proved" else "no diagram can meet this claim: the ")


@pytest.mark.parametrize(
    ("coefficient", "claim", "reason"),
    [
        ("sqrt(4)/2", "require gain y / x at 0 Hz <= 3 dB", "a pole lies at this frequency, or too close to tell"),
        ("sqrt(4)/4", "require gain y / x at 250 Hz >= 0 dB", "the gain there is -0.96910013 dB"),
        ("q*sqrt(4)", "intent y[n] = x[n] + q*2*y[n-1]", "equal as far as 512 bits tell, but not as functions"),
        ("q*exp(0)", "intent y[n] = x[n] + 2*q^2*y[n-1]", "with the numbers of the file both sides are equal as far"),
        ("q", "intent y[n] = x[n] + 2*q^2*y[n-1]", "holds for the numbers of the file only: make q a const"),
        ("1/(q - 1/2)", "require stable", "the value is not a real number: it divides by zero"),
    ],
)
def test_a_reason_says_no_more_than_is_known(coefficient: str, claim: str, reason: str) -> None:
    """Certified digits are not exact ones, and a pole is not a limit that is nearly met."""
    coef = "coef q = 1/2" if "q" in coefficient.replace("sqrt", "") else ""
    (verdict,) = verify(read_diagram(lag(coefficient, coef, claim)))
    assert verdict.reason.startswith(reason)


@pytest.mark.parametrize("value", ["", " = 1/2", " = 0", " = -1", " = 1000", " = 100_000_000_000"])
@pytest.mark.parametrize(
    "coefficient",
    [
        *("1/(a - a)", "(a - a)/(a - a)", "1/(a - 1/2)", "a/a", "a^-1"),
        *("sqrt(a)", "exp(a)", "exp(-a)", "1/sin(pi*a)", "tan(a)"),
    ],
)
def test_every_coefficient_gets_a_verdict_with_a_reason(coefficient: str, value: str) -> None:
    """No real value, division by zero, far beyond the doubles: never a traceback, and never a wrong proof."""
    claims = [f"intent y[n] = x[n] + {coefficient}*y[n-1]", f"intent y[n] = x[n] + ({coefficient} + 1)*y[n-1]"]
    needs = ["require stable", "require bounded y / x", "require gain y / x at 100 Hz <= 40 dB"]
    diagram = read_diagram(lag(coefficient, f"coef a{value}", *claims, *needs))
    verdicts = verify(diagram)
    assert len(verdicts) == 5
    defined = "(a - a)" not in coefficient
    assert [verdict.outcome for verdict in verdicts[:2]] == (["proved", "refuted"] if defined else ["undecided"] * 2)
    assert not verdicts[1].reason.startswith("holds for the numbers of the file")
    for verdict in verdicts:
        assert verdict.reason or verdict.counterexample or verdict.outcome == "proved"
    found = analyse(diagram)
    assert found.stability is not None or found.remarks
