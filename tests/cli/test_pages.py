"""The pages of analyse and verify: exact, aligned, and at most 80 columns wide."""

from __future__ import annotations

from pathlib import Path

import pytest

from flowgraph.cli.main import main


def page(capsys: pytest.CaptureFixture[str], command: str, text: str, code: int = 0) -> str:
    """What a command prints of a diagram; never wider than 80 columns."""
    Path("d.sfg").write_text(text)
    assert main([command, "d.sfg"]) == code
    told = capsys.readouterr().out
    assert max(map(len, told.splitlines())) <= 80
    return told


@pytest.fixture(autouse=True)
def _in_a_folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)


def test_analyse_of_a_crossover(capsys: pytest.CaptureFixture[str]) -> None:
    """Each output with its equation, each pair with its ratio and zeros; numbers as short decimals."""
    told = page(
        capsys,
        "analyse",
        """\
diagram split {
    coef   a = 0.75
    input  x
    output low, high
    adder  low = (1 - a)*x + a*low1
    delay  low1 = low
    adder  high = 1/3*x - 1/3*low
    intent low / x = (1 - a) / (1 - a*z^-1)
    intent high / x = 1/3 - 1/3*(1 - a) / (1 - a*z^-1)
}
""",
    )
    assert "  in numbers   0.25\n               / (1 - 0.75*z^-1)\n  zeros        z = 0, radius 0\n" in told
    assert (
        "  in numbers   (0.25 - 0.25*z^-1)\n               / (1 - 0.75*z^-1)\n  zeros        z = 1, radius 1\n" in told
    )
    assert told.endswith("  stability    stable (exact)\n  poles        z = 0.75, radius 0.75\n")


def test_analyse_writes_numbers_exactly_or_says_rounded(capsys: pytest.CaptureFixture[str]) -> None:
    """1/3 stays a fraction, 1/8 is 0.125, and what twelve digits do not hold stands on a line `rounded`."""
    told = page(
        capsys,
        "analyse",
        """\
diagram d {
    coef   g = 1/3
    coef   h = 1.23456789012345
    input  x
    output y, w
    adder  y = g*x + 1/8*x1
    delay  x1 = x
    gain   w = h*x
    intent y / x = g + 1/8*z^-1
    intent w / x = h
}
""",
    )
    assert "  in numbers   (1/3) + 0.125*z^-1\n" in told
    assert "  rounded      1.23456789012\n" in told


def test_analyse_says_where_numbers_without_a_name_are_shortened(capsys: pytest.CaptureFixture[str]) -> None:
    """A product of three decimals has more digits than a page wants."""
    told = page(
        capsys,
        "analyse",
        """\
diagram d {
    input  x
    output y
    gain   a = 0.123456*x
    gain   b = 0.654321*a
    gain   y = 0.111111*b
    intent y / x = 0.123456*0.654321*0.111111
}
""",
    )
    assert "  equation     y[n] = 0.00897553028846*x[n]\n" in told
    assert "  note         numbers are shown to 12 digits here: --json gives all of them\n" in told


def test_analyse_writes_sums_as_one_would(capsys: pytest.CaptureFixture[str]) -> None:
    """A sum begins with a term that it adds; where it adds none its sign is taken out."""
    told = page(
        capsys,
        "analyse",
        """\
diagram d {
    coef   r, s
    input  x
    output y
    adder  y = (1 - r)*x - (r + s)*x1
    delay  x1 = x
    intent y[n] = (1 - r)*x[n] - (r + s)*x[n-1]
}
""",
    )
    assert "  equation     y[n] = (1 - r)*x[n] - (r + s)*x[n-1]\n" in told
    assert "  y / x        (1 - r) - (r + s)*z^-1\n" in told


def test_analyse_of_a_comb_lists_roots_in_order_without_noise(capsys: pytest.CaptureFixture[str]) -> None:
    """z^4 = 0.7^4: four roots of one radius, from left to right, those on the axes exactly there."""
    told = page(
        capsys,
        "analyse",
        """\
diagram comb {
    input  x
    output y
    adder  y = x + 0.2401*line[end]
    delay  line = y by 4
    intent y[n] = x[n] + 0.2401*y[n-4]
}
""",
    )
    assert told.endswith(
        "  poles        z = -0.7, radius 0.7\n"
        "               z = 0 +- 0.7i, radius 0.7\n"
        "               z = 0.7, radius 0.7\n"
    )


def test_analyse_names_hidden_modes_and_their_cells(capsys: pytest.CaptureFixture[str]) -> None:
    """The recursive mean hides a mode at z = 1, cells of a line that follow each other are told as one."""
    told = page(
        capsys,
        "analyse",
        """\
diagram mean {
    input  x
    output y, twice
    adder  y = y1 + 1/8*x - 1/8*line[end]
    delay  y1 = y
    delay  line = x by 8
    delay  again = x by 8
    gain   twice = 2*again[end]
    intent y / x = 1/8*(1 - z^-8) / (1 - z^-1)
    intent twice / x = 2*z^-8
}
""",
    )
    assert "  hidden mode  z = 1: no input moves it; lives in y1\n" in told
    assert (
        "  hidden mode  z = 0, 8 times: no input moves it; lives in line[1 .. 8],\n               again[1 .. 8]\n"
        in told
    )


def test_analyse_places_only_hidden_modes_that_depend_on_no_open_coefficient(
    capsys: pytest.CaptureFixture[str],
) -> None:
    """The mode at r is somewhere, the one at 1/2 is there for every r."""
    told = page(
        capsys,
        "analyse",
        """\
diagram d {
    coef   r
    input  x
    output y
    adder  a = x + r*a1
    delay  a1 = a
    adder  b = x + r*b1
    delay  b1 = b
    adder  c = x + 1/2*c1
    delay  c1 = c
    adder  y = a + b + c - 1/2*c1
    intent y / x = 2 / (1 - r*z^-1) + 1
}
""",
    )
    assert "  hidden mode  z depends on open coefficients: no input moves it; lives in a1,\n               b1\n" in told
    assert "  hidden mode  z = 0.5: no output shows it; lives in c1\n" in told


def test_analyse_of_an_oscillator(capsys: pytest.CaptureFixture[str]) -> None:
    """No input, no ratio, and a pole that no enclosure can place: all said, none left out."""
    told = page(
        capsys,
        "analyse",
        """\
diagram tone {
    coef   c = cos(1/10)
    output y
    adder  y = 2*c*y1 - y2
    delay  y1, y2 = y starts 0, 1
    intent y[n] = 2*c*y[n-1] - y[n-2], y[-2] = 1
}
""",
    )
    assert "  stability    undecided: too close to the limit to tell\n" in told
    assert "  note         there is no input: all outputs come from the starting contents\n" in told


def test_formulas_and_lists_that_would_fill_pages_are_counted(capsys: pytest.CaptureFixture[str]) -> None:
    """A response of 151 samples: --json has all of it, the page says how long it is."""
    told = page(
        capsys,
        "analyse",
        """\
diagram fir {
    input  x
    output y
    delay  line = x by 150
    adder  y = total(k = 0 .. 150, (k + 1)*line[k])
    intent y[n] = total(k = 0 .. 150, (k + 1)*x[n-k])
}
""",
    )
    assert "lines long: --json gives it)\n" in told
    assert "lines more: --json gives all\n" in told
    assert len(told.splitlines()) < 40


def test_verify_never_breaks_a_name(capsys: pytest.CaptureFixture[str]) -> None:
    """Long names stay whole; a claim goes on in an indented line."""
    name = "embankment_vibration_sensor_at_the_upper_end_of_the_reach"
    told = page(
        capsys,
        "verify",
        f"diagram d {{\ninput {name}\noutput y\ngain y = 1/2*{name}\nintent y / {name} = 1/2\n}}\n",
    )
    assert (
        told
        == f"d: 1 proved\n  proved     intent y /\n                 {name}\n                 = 1/2\n"
        + ("               exact (d.sfg:5:1)\n")
        or told.count(name) == 1
    )


def test_verify_tells_what_is_left_to_the_uses(capsys: pytest.CaptureFixture[str]) -> None:
    """A requirement that needs values is judged where they are given, and said to be."""
    told = page(
        capsys,
        "verify",
        """\
diagram d {
    coef   a
    input  x
    output y
    adder  y = x + a*y1
    delay  y1 = y
    intent y / x = 1 / (1 - a*z^-1)
    require stable
}
diagram user {
    input  x
    output y
    use    y = d(x) with a = 1/2
    intent y / x = 1 / (1 - 1/2*z^-1)
}
""",
    )
    assert told == (
        "d: 1 proved\n"
        "  proved     intent y / x = 1 / (1 - a*z^-1)\n"
        "               exact (d.sfg:7:5)\n"
        "  at uses    require stable (d.sfg:8:5)\n"
        "\n"
        "user: 2 proved\n"
        "  proved     intent y / x = 1 / (1 - 1/2*z^-1)\n"
        "               exact (d.sfg:14:5)\n"
        "  proved     require stable\n"
        "               exact (d.sfg:8:5)\n"
        "               with the values given to y (d.sfg:13:5)\n"
    )
