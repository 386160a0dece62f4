"""What a verdict says, and that nothing false is ever proved."""

from __future__ import annotations

import pytest
from read_diagram import read_diagram, read_diagrams

from flowgraph.claims.verdict import Counterexample, Verdict
from flowgraph.claims.verify import verify, verify_all


def first(text: str) -> Verdict:
    """The first verdict on the last diagram of a text."""
    return verify(read_diagram(text))[0]


def lag(claim: str, coefficient: str = "coef r = 0.5", feedback: str = "+ r*y1", more: str = "") -> str:
    return f"""
        diagram lag {{
            rate 1 kHz
            {coefficient}
            input x
            output y
            adder y = x {feedback}
            delay y1 = y {more}
            {claim}
        }}"""


def test_a_proof_holds_for_every_value_of_a_coefficient() -> None:
    """The named coefficient stands for any number, so the claim is an identity."""
    verdict = first(lag("intent y / x = 1/(1 - r*z^-1)"))
    assert (verdict.outcome, verdict.method, verdict.conditions) == ("proved", "exact", ())


def test_a_refutation_shows_the_first_sample_that_differs_at_the_values_of_the_file() -> None:
    """A turned sign shows at n = 1, and both values are exact."""
    verdict = first(lag("intent y / x = 1/(1 + r*z^-1)"))
    assert verdict.outcome == "refuted"
    assert verdict.counterexample == Counterexample("y", "x", 1, "1/2", "-1/2")


def test_a_claim_that_holds_for_the_numbers_of_the_file_only_is_refuted_and_says_so() -> None:
    """0.5 in the claim is not the coefficient r, whatever r is today."""
    verdict = first(lag("intent y / x = 1/(1 - 0.5*z^-1)"))
    assert verdict.outcome == "refuted"
    assert verdict.reason == "holds for the numbers of the file only: make r a const, or name it in the claim"
    assert verdict.counterexample is not None
    assert verdict.counterexample.coefficients == (("r", "1/2"),) or verdict.counterexample.sample > 0


def test_open_coefficients_get_values_in_a_witness() -> None:
    """Where the file has no values, the witness states the ones it took."""
    verdict = first(lag("intent y / x = 1/(1 + a*z^-1)", "coef a", "+ a*y1"))
    assert verdict.counterexample == Counterexample("y", "x", 1, "1/2", "-1/2", (("a", "1/2"),))


def test_one_digit_makes_a_claim_false() -> None:
    """A coefficient that is off in its last digit is found, far below what a double can tell."""
    wrong = "0.5000000000000000000000000000000000000000000000000000000001"
    verdict = first(lag(f"intent y / x = 1/(1 - {wrong}*z^-1)", "const r = 1/2", "+ r*y1"))
    assert verdict.outcome == "refuted"


def test_starting_contents_count_in_an_equation() -> None:
    """An equation without its past is another behaviour than a cell that holds something."""
    assert first(lag("intent y[n] = x[n] + r*y[n-1]", more="starts 2")).counterexample == Counterexample(
        "y", "", 0, "1", "0"
    )
    assert first(lag("intent y[n] = x[n] + r*y[n-1], y[-1] = 2", more="starts 2")).outcome == "proved"
    assert first(lag("intent y[n] = x[n] + r*y[n-1], y[-1] = 3", more="starts 2")).outcome == "refuted"


def test_a_ratio_with_powers_of_z_of_either_sign() -> None:
    """Textbooks write z or z^-1; the meaning is the same."""
    assert first(lag("intent y / x = z/(z - r)")).outcome == "proved"
    assert first(lag("intent y / x = z^2/(z^2 - r*z)")).outcome == "proved"


def test_a_ratio_that_is_late() -> None:
    """`late` is a power of z^-1."""
    text = """
        diagram late_lag {
            input x
            output y
            delay old = x by 3
            adder y = old[3] + 1/2*y1
            delay y1 = y
            intent y / x = 1/(1 - 1/2*z^-1) late 3 samples
        }"""
    assert first(text).outcome == "proved"
    assert first(text.replace("late 3", "late 2")).outcome == "refuted"


def test_values_of_functions_are_free_symbols_that_may_prove() -> None:
    """cos of the same angle, written in two ways, is the same symbol."""
    angle = "coef f0 = 50 Hz\ncoef c = cos(2*pi*f0/rate)"
    assert first(lag("intent y / x = 1/(1 - cos(pi*2*f0/rate)*z^-1)", angle, "+ c*y1")).outcome == "proved"


def test_values_of_functions_are_free_symbols_that_never_refute() -> None:
    """sqrt(2)^2 is 2, but not for a free symbol: the verdict is undecided, and says why."""
    verdict = first(lag("intent y / x = 1/(1 - 1/2*z^-1)", "const q = 1/4", "+ q*sqrt(2)^2*y1"))
    assert verdict.outcome == "undecided"
    assert verdict.reason.startswith("equal as far as 512 bits tell")


def test_values_of_functions_refute_by_certified_enclosures() -> None:
    """A wrong cosine is a certain difference, shown in certified digits."""
    verdict = first(lag("intent y / x = 1/(1 - sin(1)*z^-1)", "const q = 1", "+ q*cos(1)*y1"))
    assert (verdict.outcome, verdict.method) == ("refuted", "certified")
    assert verdict.counterexample == Counterexample("y", "x", 1, "0.540302305868", "0.841470984808")


def test_a_proof_lists_the_values_it_leaves_out() -> None:
    """A division by a coefficient holds where that coefficient is not zero."""
    verdict = first(lag("intent y / x = a/(a - b*z^-1)", "coef a, b", "+ b/a*y1"))
    assert verdict.outcome == "proved"
    assert verdict.conditions == ("a <> 0",)


def test_a_ratio_that_no_diagram_can_have_is_refuted() -> None:
    """A response cannot begin before its cause."""
    from flowgraph.claims.intents import verdict_on_intent
    from flowgraph.diagram.claim import RatioIntent
    from flowgraph.diagram.expression import Name

    diagram = read_diagram(lag("intent y / x = 1/(1 - r*z^-1)"))
    verdict = verdict_on_intent(RatioIntent("y", "x", Name("z")), diagram)
    assert verdict.outcome == "refuted"
    assert verdict.reason == "no diagram can meet this claim: the ratio is not causal"


def test_several_inputs_and_outputs_are_told_apart() -> None:
    """The difference is named with its output and its input."""
    text = """
        diagram pair {
            input  a, b
            output s, d
            adder  s = a + b
            adder  d = a - b
            intent s[n] = a[n] + b[n]
            intent d / a = 1
            intent d / b = 1
        }"""
    verdicts = verify(read_diagram(text))
    assert [verdict.outcome for verdict in verdicts] == ["proved", "proved", "refuted"]
    assert verdicts[2].counterexample == Counterexample("d", "b", 0, "-1", "1")


def test_another_diagram_as_the_intent_counts_its_contents() -> None:
    """Equality with another diagram includes what the cells hold at the start."""
    text = """
        diagram plain {
            coef r
            input u
            output v
            adder v = u + r*v1
            delay v1 = v starts 1
            intent v[n] = u[n] + r*v[n-1], v[-1] = 1
        }
        diagram same {
            coef r = 0.9
            input x
            output y
            adder y = r*old + x
            delay old = y starts 1
            intent y = plain(x) with r = r
        }"""
    assert first(text).outcome == "proved"
    assert first(text.replace("delay old = y starts 1", "delay old = y starts 2")).counterexample == Counterexample(
        "y", "", 0, "9/5", "9/10"
    )


def test_a_hidden_mode_cannot_hide_from_stable() -> None:
    """A response that cancels a mode is not the whole diagram."""
    text = """
        diagram hidden {
            input x
            output y
            adder a = x + 2*a1
            delay a1 = a
            adder y = a - 2*a1
            intent y / x = 1
            require bounded y / x
            require stable
        }"""
    verdicts = verify(read_diagram(text))
    assert [verdict.outcome for verdict in verdicts] == ["proved", "proved", "refuted"]
    assert verdicts[1].conditions == ("unstable modes cancel in y / x (analyse lists them)",)
    assert verdicts[2].reason == "unstable: largest pole radius 2 at z = 2"


def test_requirements_of_an_open_diagram_are_judged_at_each_use() -> None:
    """The same section is stable in one place and not in the other; the verdict names both lines."""
    text = """
        diagram section {
            coef a
            input x
            output y
            adder y = x + a*y1
            delay y1 = y
            intent y / x = 1/(1 - a*z^-1)
            require stable
        }
        diagram user {
            input x
            output y
            use low = section(x) with a = 0.5
            use y = section(low) with a = 1.5
            intent y / x = 1/((1 - 0.5*z^-1)*(1 - 1.5*z^-1))
        }"""
    diagrams = read_diagrams(text)
    together = verify_all([diagrams["section"], diagrams["user"]], set(), lambda _: None)
    assert [verdict.outcome for verdict in together[0][1]] == ["proved"]
    assert [verdict.outcome for verdict in verify(diagrams["section"])] == ["proved", "undecided"]
    verdicts = verify(diagrams["user"])
    assert [verdict.outcome for verdict in verdicts] == ["proved", "proved", "refuted"]
    assert verdicts[2].use is not None
    assert verdicts[2].use.line == verdicts[2].span.line + 6


def test_requirements_inside_a_used_diagram_are_judged_through_its_user() -> None:
    """A section two uses deep gets its values from the outermost diagram."""
    text = """
        diagram pole {
            coef a
            input x
            output y
            adder y = x + a*y1
            delay y1 = y
            intent y / x = 1/(1 - a*z^-1)
            require stable
        }
        diagram pair {
            coef a
            input x
            output y
            use p = pole(x) with a = a
            use y = pole(p) with a = 2*a
            intent y / x = 1/((1 - a*z^-1)*(1 - 2*a*z^-1))
        }
        diagram user {
            input x
            output y
            use y = pair(x) with a = 0.75
            intent y / x = 1/((1 - 0.75*z^-1)*(1 - 1.5*z^-1))
        }"""
    verdicts = verify(read_diagrams(text)["user"])
    assert [verdict.outcome for verdict in verdicts] == ["proved", "proved", "refuted"]


def test_a_gain_limit_that_is_met_exactly_is_decided_exactly() -> None:
    """0 dB at 0 Hz is met by a normalised lag, and not by one that is off by 10^-40."""
    lagged = "adder y = 1/4*x + 3/4*y1"
    text = (
        f"diagram d {{\nrate 1 kHz\ninput x\noutput y\n{lagged}\ndelay y1 = y\nrequire gain y / x at 0 Hz >= 0 dB\n}}"
    )
    assert first(text).outcome == "proved"
    assert first(text.replace("1/4*x", "0.2499999999999999999999999999999999999999*x")).outcome == "refuted"


def test_a_claim_by_identity_test_states_its_bound() -> None:
    """Thirty free sections in parallel are beyond exact polynomials; the verdict never says exact."""
    count = 30
    names = ", ".join(f"a{k}, b{k}" for k in range(count))
    lines = [f"adder p{k} = x + a{k}*d{k}\n delay d{k} = p{k}" for k in range(count)]
    total = " + ".join(f"b{k}*p{k}" for k in range(count))
    claim = " + ".join(f"b{k}/(1 - a{k}*z^-1)" for k in range(count))
    text = f"diagram d {{\ncoef {names}\ninput x\noutput y\n" + "\n".join(lines)
    verdict = first(text + f"\nadder y = {total}\nintent y / x = {claim}\n}}")
    assert (verdict.outcome, verdict.method) == ("proved", "identity test")
    assert verdict.error_below >= 80
    wrong = first(text + f"\nadder y = {total}\nintent y / x = {claim.replace('a7*', 'a8*')}\n}}")
    assert wrong.outcome == "refuted"
    assert wrong.counterexample is not None


def test_a_difference_beyond_the_samples_looked_at_is_undecided_for_that_reason(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    """Two long lines that differ by one cell: the search says where it ended, and nothing else."""
    monkeypatch.setattr("flowgraph.claims.witness.WORK_LIMIT", 300)
    text = """
        diagram far {
            input x
            output y
            delay line = x by 400
            wire y = line[end]
            intent y / x = z^-399
        }"""
    verdict = first(text)
    assert verdict.outcome == "undecided"
    assert "the first 100 samples, where the search for a witness ends, show no difference" in verdict.reason
