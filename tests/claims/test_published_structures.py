"""Transfer functions, responses and verdicts of published structures."""

from __future__ import annotations

from fractions import Fraction

import pytest
from exact_values import exact_values
from read_diagram import read_diagram, read_diagrams

from flowgraph.algebra.numbers import numbered
from flowgraph.algebra.stability_at_values import stability_at_values
from flowgraph.algebra.transfer import number_transfers
from flowgraph.claims.verdict import Verdict
from flowgraph.claims.verify import verify
from flowgraph.diagram.diagram import Diagram, count
from flowgraph.diagram.simulate import simulate


def impulse_response(diagram: Diagram, samples: int) -> list[Fraction]:
    """The first samples of the first output's answer to a unit pulse at the first input."""
    pulse = {diagram.inputs()[0].name: [Fraction(1)]}
    output = next(iter(diagram.outputs))
    return simulate(diagram, exact_values(diagram), pulse, samples, Fraction(0))[output]


def transfer(diagram: Diagram) -> tuple[list[Fraction], list[Fraction]]:
    """Numerator and denominator of the first response, in lowest terms, rising powers of z^-1."""
    found = next(iter(number_transfers(numbered(diagram).diagram).transfers.values()))
    numerator, denominator = (
        [Fraction(int(value.p), int(value.q)) for value in side.coeffs()]
        for side in (found.numerator, found.denominator)
    )
    return numerator, denominator


def outcomes(verdicts: list[Verdict]) -> list[str]:
    return [verdict.outcome for verdict in verdicts]


def fractions(text: str) -> list[Fraction]:
    return [Fraction(part) for part in text.split()]


# A. V. Oppenheim, R. W. Schafer, Discrete-Time Signal Processing, examples of 6.3, from memory:
# H = (1 + 2w + w^2) / (1 - 3/4 w + 1/8 w^2) in every form.
SECTION_CLAIM = "intent y / x = (1 + 2*z^-1 + z^-2) / (1 - 3/4*z^-1 + 1/8*z^-2)\nrequire stable"
FORMS = {
    "direct form I": """
        input x
        output y
        delay x1, x2 = x
        delay y1, y2 = y
        adder v = x + 2*x1 + x2
        adder y = v + 3/4*y1 - 1/8*y2""",
    "direct form I, one adder": """
        input x
        output y
        delay x1, x2 = x
        delay y1, y2 = y
        adder y = x + 2*x1 + x2 + 3/4*y1 - 1/8*y2""",
    "direct form II": """
        input x
        output y
        adder w = x + 3/4*w1 - 1/8*w2
        delay w1, w2 = w
        adder y = w + 2*w1 + w2""",
    "transposed direct form II": """
        input x
        output y
        adder y = x + s1
        adder t1 = 2*x + 3/4*y + s2
        adder t2 = x - 1/8*y
        delay s1 = t1
        delay s2 = t2""",
    "transposed direct form I": """
        input x
        output y
        adder v = x + r1
        adder p1 = 3/4*v + r2
        gain  p2 = -1/8*v
        delay r1 = p1
        delay r2 = p2
        adder y = v + q1
        adder u1 = 2*v + q2
        delay q1 = u1
        delay q2 = v""",
    "cascade": """
        input x
        output y
        adder w = x + 1/2*w1
        delay w1 = w
        adder m = w + w1
        adder v = m + 1/4*v1
        delay v1 = v
        adder y = v + v1""",
    "parallel": """
        input x
        output y
        adder p = x + 1/2*p1
        delay p1 = p
        adder q = x + 1/4*q1
        delay q1 = q
        adder y = 8*x + 18*p - 25*q""",
}


@pytest.mark.parametrize("form", FORMS)
def test_one_section_in_every_form(form: str) -> None:
    """All forms of the textbook section are proved to be it, and answer with its samples."""
    diagram = read_diagram(f"diagram d {{\n{FORMS[form]}\n{SECTION_CLAIM}\n}}")
    assert outcomes(verify(diagram)) == ["proved", "proved"]
    expected = fractions("1 11/4 47/16 119/64 263/256 551/1024 1127/4096 2279/16384")
    assert impulse_response(diagram, 8) == expected


def test_parallel_form_with_a_constant() -> None:
    """L. Chaparro, Signals and Systems, examples 11.16 and 11.18: parallel and cascade of one H."""
    texts = """
        diagram parallel {
            input x
            output y
            adder p = x - 1/2*p1
            delay p1 = p
            adder q = x + 2/5*q1
            delay q1 = q
            adder y = -3*x - p + 7*q
            intent y / x = (3 + 3.6*z^-1 + 0.6*z^-2) / (1 + 0.1*z^-1 - 0.2*z^-2)
        }
        diagram cascade_form {
            input x
            output y
            adder p = 3*x - 1/2*p1
            delay p1 = p
            adder m = p + p1
            adder q = m + 2/5*q1
            delay q1 = q
            adder y = q + 1/5*q1
            intent y = parallel(x)
        }
    """
    diagrams = read_diagrams(texts)
    for diagram in diagrams.values():
        assert outcomes(verify(diagram)) == ["proved"]
        assert impulse_response(diagram, 6) == fractions("3 3.3 0.87 0.573 0.1167 0.10293")


@pytest.mark.parametrize("swapped", [False, True])
def test_cascade_with_poles_on_the_unit_circle(swapped: bool) -> None:
    """Chaparro, example 11.17: both pairings are the same filter, and it is marginal."""
    first = "adder u = x + x1 - u2\n delay x1 = x\n delay u1, u2 = u\n"
    second = "adder y = u + 1/5*v1 + 2/5*y1\n delay v1 = u\n delay y1 = y\n"
    if swapped:
        first = "adder u = x + 1/5*x1 - u2\n delay x1 = x\n delay u1, u2 = u\n"
        second = "adder y = u + v1 + 2/5*y1\n delay v1 = u\n delay y1 = y\n"
    ratio = "(1 + 1.2*z^-1 + 0.2*z^-2) / (1 - 0.4*z^-1 + z^-2 - 0.4*z^-3)"
    diagram = read_diagram(
        f"diagram d {{\n input x\n output y\n {first}{second} intent y / x = {ratio}\n require stable\n }}"
    )
    verdicts = verify(diagram)
    assert outcomes(verdicts) == ["proved", "refuted"]
    assert verdicts[1].reason.startswith("marginal")
    assert stability_at_values(diagram).stability == "marginal"


def test_partial_fractions_are_exact() -> None:
    """A university exercise: (1 - w)/(1 - 0.2w - 0.15w^2) = -5/8/(1 - 0.5w) + 13/8/(1 + 0.3w)."""
    diagram = read_diagram("""
        diagram d {
            input x
            output y
            adder p = x + 0.5*p1
            delay p1 = p
            adder q = x - 0.3*q1
            delay q1 = q
            adder y = -5/8*p + 13/8*q
            intent y / x = (1 - z^-1) / (1 - 0.2*z^-1 - 0.15*z^-2)
        }""")
    assert outcomes(verify(diagram)) == ["proved"]


def section(name: str, source: str, b: tuple[str, ...], a: tuple[str, str]) -> str:
    """Lines of a direct-form-II section: w = source - a1 w1 - a2 w2, name = b w."""
    parts = [f"{value}*{name}w{k or ''}" for k, value in enumerate(b)]
    return (
        (
            f"adder {name}w = {source} - {a[0]}*{name}w1 - {a[1]}*{name}w2\n"
            f"delay {name}w1, {name}w2 = {name}w\n"
            f"adder {name} = {' + '.join(parts)}\n"
        )
        .replace("- -", "+ ")
        .replace("+ -", "- ")
    )


def gain_text(output: str, frequency: str, low: str, high: str) -> str:
    return f"require gain {output} / x at {frequency} within {low} .. {high} dB\n"


def test_butterworth_cascade_with_published_coefficients() -> None:
    """Oppenheim & Schafer, bilinear Butterworth example 7.3 (from memory): three sections, four digits.

    With a rate of 20 Hz, 0.2 pi a sample is 2 Hz.
    """
    lines = section("u", "x", ("0.0007378", "0.0014756", "0.0007378"), ("-1.2686", "0.7051"))
    lines += section("v", "u", ("1", "2", "1"), ("-1.0106", "0.3583"))
    lines += section("y", "v", ("1", "2", "1"), ("-0.9044", "0.2155"))
    gains = gain_text("y", "2 Hz", "-0.5653", "-0.5633") + gain_text("y", "3 Hz", "-15.0011", "-14.9991")
    gains += gain_text("y", "5 Hz", "-50.0018", "-49.9998")
    ratio = "0.0007378*(1 + z^-1)^6 / ((1 - 1.2686*z^-1 + 0.7051*z^-2)*(1 - 1.0106*z^-1 + 0.3583*z^-2)*"
    ratio += "(1 - 0.9044*z^-1 + 0.2155*z^-2))"
    text = f"diagram d {{\nrate 20 Hz\ninput x\noutput y\n{lines}intent y / x = {ratio}\nrequire stable\n{gains}}}"
    diagram = read_diagram(text)
    assert set(outcomes(verify(diagram))) == {"proved"}
    numerator, denominator = transfer(diagram)
    expected = [1, -3.1836, 4.62225564, -3.77950345, 1.81361859, -0.47999815, 0.05444334]
    assert [float(value) for value in denominator] == pytest.approx(expected, abs=1e-8)
    assert float(sum(numerator) / sum(denominator)) == pytest.approx(1.00006833, abs=1e-8)


def test_impulse_invariant_parallel_form_with_published_coefficients() -> None:
    """Oppenheim & Schafer, impulse invariance example 7.2 (from memory): three sections in parallel."""
    lines = section("u", "x", ("0.2871", "-0.4466"), ("-1.2971", "0.6949"))
    lines += section("v", "x", ("-2.1428", "1.1455"), ("-1.0691", "0.3699"))
    lines += section("t", "x", ("1.8557", "-0.6303"), ("-0.9972", "0.2570"))
    gains = gain_text("y", "0 Hz", "-0.005", "0.005") + gain_text("y", "2 Hz", "-0.999", "-0.995")
    gains += gain_text("y", "3 Hz", "-15.386", "-15.382")
    text = f"diagram d {{\nrate 20 Hz\ninput x\noutput y\n{lines}adder y = u + v + t\n{gains}}}"
    diagram = read_diagram(text)
    assert set(outcomes(verify(diagram))) == {"proved"}
    numerator, _ = transfer(diagram)
    assert numerator[0] == 0
    expected = [6.3397e-4, 1.00956516e-2, 1.61720784e-2, 4.08972514e-3, 1.03802417e-4]
    assert [float(value) for value in numerator[1:]] == pytest.approx(expected, abs=1e-9)


@pytest.mark.parametrize("length", [4, 8, 30])
def test_the_carried_moving_average_is_the_plain_one_and_hides_a_mode_at_one(length: int) -> None:
    """Textbook: (1/M) sum w^k = (1/M)(1 - w^M)/(1 - w), with a cancelled pole at z = 1; M - 1 against M + 1 cells."""
    from flowgraph.claims.analysis import analyse

    texts = f"""
        diagram plain {{
            const M = {length}
            input x
            output y
            delay line = x by M - 1
            adder y = 1/M*x + total(k = 1 .. M - 1, 1/M*line[k])
            intent y[n] = total(k = 0 .. M - 1, x[n-k])/M
        }}
        diagram carried {{
            const M = {length}
            input x
            output y
            delay line = x by M
            delay y1 = y
            adder y = y1 + 1/M*x - 1/M*line[end]
            intent y = plain(x)
            require bounded y / x
            require stable
        }}
    """
    diagrams = read_diagrams(texts)
    assert count(diagrams["plain"]).cells == length - 1
    assert count(diagrams["carried"]).cells == length + 1
    assert outcomes(verify(diagrams["plain"])) == ["proved"]
    verdicts = verify(diagrams["carried"])
    assert outcomes(verdicts) == ["proved", "proved", "refuted"]
    assert verdicts[1].conditions == ("marginal modes cancel in y / x (analyse lists them)",)
    hidden = analyse(diagrams["carried"]).hidden
    assert [(str(mode.factor), mode.why, mode.cells) for mode in hidden[:1]] == [
        ("x + (-1)", "no input moves it", (("y1", 1),))
    ]


def test_leaky_integrator() -> None:
    """Common practice, no source: h[n] = (1 - l) l^n, gain 1 at 0 Hz, 2 multiplies, 1 add, 1 cell."""
    diagram = read_diagram("""
        diagram d {
            rate 8 kHz
            coef l = 0.75
            input x
            output y
            adder y = l*y1 + (1 - l)*x
            delay y1 = y
            intent y / x = (1 - l)/(1 - l*z^-1)
            require stable
            require gain y / x at 0 Hz within 0 .. 0 dB
            require cells <= 1
            require multiplies <= 2
        }""")
    assert set(outcomes(verify(diagram))) == {"proved"}
    assert impulse_response(diagram, 6) == [Fraction(1, 4) * Fraction(3, 4) ** n for n in range(6)]
    assert (count(diagram).multiplies, count(diagram).adds, count(diagram).cells) == (2, 1, 1)


LOW_PASS = """
    diagram low_pass {
        rate   200 Hz
        input  x
        output y
        delay  xs = x by 12
        delay  y1, y2 = y
        adder  y = 2*y1 - y2 + x - 2*xs[6] + xs[12]
        intent y / x = ((1 - z^-6)/(1 - z^-1))^2
        require bounded y / x
        require gain y / x at 0 Hz within 31.1260 .. 31.1261 dB
        require gain y / x at 10.771 Hz within 28.115 .. 28.117 dB
        require gain y / x at 200/6 Hz <= -300 dB
    }
"""


def test_the_integer_low_pass_with_cancelled_poles() -> None:
    """J. Pan, W. J. Tompkins 1985; Tompkins, Biomedical Digital Signal Processing, eq. 12.9-12.10."""
    from flowgraph.claims.analysis import analyse

    diagram = read_diagram(LOW_PASS.replace("at 200/6 Hz", "at 100/3 Hz").replace("100/3 Hz", "rate/6"))
    assert set(outcomes(verify(diagram))) == {"proved"}
    assert impulse_response(diagram, 14) == fractions("1 2 3 4 5 6 5 4 3 2 1 0 0 0")
    hidden = analyse(diagram).hidden
    assert [(str(mode.factor), mode.multiplicity) for mode in hidden if str(mode.factor) != "x"] == [("x + (-1)", 2)]


def test_the_integer_high_pass() -> None:
    """Tompkins, eq. 12.11-12.14: 32 taps of -1/32 but for 31/32 in the middle."""
    diagram = read_diagram("""
        diagram high_pass {
            rate   200 Hz
            input  x
            output y
            delay  xs = x by 32
            adder  s = s1 + x - xs[32]
            delay  s1 = s
            adder  y = xs[16] - 1/32*s
            intent y / x = (-1/32 + z^-16 - z^-17 + 1/32*z^-32)/(1 - z^-1)
            require gain y / x at 0 Hz <= -300 dB
            require gain y / x at half within 0 .. 0 dB
            require gain y / x at 5 Hz within -2.307 .. -2.305 dB
        }""")
    assert set(outcomes(verify(diagram))) == {"proved"}
    assert impulse_response(diagram, 33) == [
        Fraction(31, 32) if n == 16 else Fraction(-1, 32) if n < 32 else Fraction(0) for n in range(33)
    ]
    assert count(diagram).cells == 33


def test_savitzky_golay_smoother() -> None:
    """A. Savitzky, M. J. E. Golay 1964 (from memory): five points, quadratic; gain 1 at 0 Hz."""
    diagram = read_diagram("""
        diagram d {
            rate 1 kHz
            input x
            output y
            delay x1, x2, x3, x4 = x
            adder ends = x + x4
            adder near = x1 + x3
            adder y = -3/35*ends + 12/35*near + 17/35*x2
            intent y[n] = (-3*x[n] + 12*x[n-1] + 17*x[n-2] + 12*x[n-3] - 3*x[n-4])/35
            require gain y / x at 0 Hz within 0 .. 0 dB
            require multiplies <= 3
        }""")
    assert set(outcomes(verify(diagram))) == {"proved"}


def test_simpson_integrator_is_marginal() -> None:
    """Tompkins, eq. 6.27-6.29: poles exactly at +1 and -1, so unbounded at 0 Hz and at half the rate."""
    diagram = read_diagram("""
        diagram d {
            rate 100 Hz
            input x
            output y
            delay x1, x2 = x
            delay y1, y2 = y
            adder y = y2 + 1/300*x + 4/300*x1 + 1/300*x2
            intent y / x = 1/300*(1 + 4*z^-1 + z^-2)/(1 - z^-2)
            require stable
            require bounded y / x
            require gain y / x at 0 Hz <= 200 dB
            require gain y / x at 25 Hz within -43.53 .. -43.51 dB
        }""")
    # |H| = T (2 + cos wT) / (3 sin wT), at wT = pi/2: 2/300 = -43.52 dB
    assert outcomes(verify(diagram)) == ["proved", "refuted", "refuted", "refuted", "proved"]
    assert stability_at_values(diagram).stability == "marginal"


def test_filter_sharpening() -> None:
    """J. F. Kaiser, R. W. Hamming 1977, the method (from memory): 3 w G^2 - 2 G^3 with G = (1 + 2w + w^2)/4."""
    diagram = read_diagram("""
        diagram smooth {
            input x
            output y
            delay x1, x2 = x
            adder y = 1/4*x + 1/2*x1 + 1/4*x2
            intent y / x = (1 + 2*z^-1 + z^-2)/4
        }
        diagram sharpened {
            rate 1 Hz
            input x
            output y
            use g1 = smooth(x)
            use g2 = smooth(g1)
            use g3 = smooth(g2)
            delay d1 = g2
            adder y = 3*d1 - 2*g3
            intent y / x = (-1 + 9*z^-2 + 16*z^-3 + 9*z^-4 - z^-6)/32
            require gain y / x at 0 Hz within 0 .. 0 dB
            require gain y / x at half <= -300 dB
        }""")
    assert set(outcomes(verify(diagram))) == {"proved"}
    assert impulse_response(diagram, 8) == [Fraction(k, 32) for k in (-1, 0, 9, 16, 9, 0, -1, 0)]


def test_k_weighting_of_itu_r_bs_1770() -> None:
    """ITU-R BS.1770, tables 1 and 2 (48 kHz); responses of the cascade recomputed from them."""
    shelf = section(
        "v",
        "x",
        ("1.53512485958697", "-2.69169618940638", "1.19839281085285"),
        ("-1.69065929318241", "0.73248077421585"),
    )
    high = section("y", "v", ("1", "-2", "1"), ("-1.99004745483398", "0.99007225036621"))
    published = [
        ("100 Hz", -1.133498),
        ("200 Hz", -0.264897),
        ("500 Hz", 0.042462),
        ("997 Hz", 0.691014),
        ("1000 Hz", 0.697704),
        ("2000 Hz", 3.071257),
        ("10 kHz", 4.041882),
    ]
    gains = "".join(gain_text("y", at, f"{value - 1e-5:.7f}", f"{value + 1e-5:.7f}") for at, value in published)
    gains += gain_text("v", "0 Hz", "-1e-11", "1e-11") + gain_text("v", "half", "3.999843", "3.999845")
    diagram = read_diagram(f"diagram d {{\nrate 48 kHz\ninput x\noutput y, v\n{shelf}{high}require stable\n{gains}}}")
    assert set(outcomes(verify(diagram))) == {"proved"}
    response = [float(value) for value in impulse_response(diagram, 4)]
    assert response == pytest.approx([1.53512486, -0.11160148, -0.10311189, -0.09297001], abs=1e-8)


def test_high_pass_filters_of_g_729() -> None:
    """ITU-T G.729 3.1 and 4.2.5, RFC 3951: the stated edges, ripple and attenuation at 8 kHz."""
    pre = section("p", "x", ("0.46363718", "-0.92724705", "0.46363718"), ("-1.9059465", "0.9114024"))
    post = section("q", "x", ("0.93980581", "-1.8795834", "0.93980581"), ("-1.9330735", "0.93589199"))
    stated = [
        ("q", "0 Hz", -39.989),
        ("q", "100 Hz", -0.25),
        ("q", "4 kHz", -0.25),
        ("p", "0 Hz", -46.011),
        ("p", "140 Hz", -6.2706),
        ("p", "4 kHz", -6.2706),
    ]
    gains = "".join(gain_text(*place, f"{value - 6e-4:.4f}", f"{value + 6e-4:.4f}") for *place, value in stated)
    text = f"diagram d {{\nrate 8 kHz\ninput x\noutput p, q\n{pre}{post}require stable\n{gains}}}"
    diagram = read_diagram(text)
    assert set(outcomes(verify(diagram))) == {"proved"}
