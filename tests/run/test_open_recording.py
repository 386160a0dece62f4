"""An open electrocardiogram through two published integer filters, held against their equations in integers.

Pan and Tompkins, A real-time QRS detection algorithm, IEEE Trans. BME 32 (1985); difference
equations as in Tompkins (ed.), Biomedical Digital Signal Processing, eqs. 12.9 to 12.14.
"""

from __future__ import annotations

from fractions import Fraction
from pathlib import Path

import numpy as np
import pywt
from numpy.typing import NDArray
from scipy.io import wavfile

from flowgraph.diagram.diagram import Diagram, count
from flowgraph.diagram.elements import Adder, Delay, Element, Input, Output, Signal, Term
from flowgraph.diagram.expression import Number
from flowgraph.run.csv_files import read_csv
from flowgraph.run.run_recording import run_recording

Integers = NDArray[np.int64]


def ecg() -> Integers:
    """1024 samples of the recording that PyWavelets ships, in its own whole units."""
    recorded = np.asarray(pywt.data.ecg())
    assert np.array_equal(recorded, np.round(recorded))
    return recorded.astype(np.int64)


def term(signal: str, tap: int = 0, factor: str = "1") -> Term:
    value = Fraction(factor)
    return Term(Signal(signal, tap), value < 0, None if abs(value) == 1 else Number(abs(value)))


def low_pass() -> Diagram:
    """y = 2*y1 - y2 + x - 2*x6 + x12 with one shared line behind x."""
    return diagram(
        "low_pass",
        Input("x"),
        Delay("past", Signal("x"), 12),
        Delay("back", Signal("y"), 2),
        Adder("y", (term("back", 1, "2"), term("back", 2, "-1"), term("x"), term("past", 6, "-2"), term("past", 12))),
    )


def high_pass() -> Diagram:
    """s = s1 + x - x32 and y = x16 - s/32: all but the mean of 32 samples."""
    return diagram(
        "high_pass",
        Input("x"),
        Delay("past", Signal("x"), 32),
        Delay("s1", Signal("s")),
        Adder("s", (term("s1", 1), term("x"), term("past", 32, "-1"))),
        Adder("y", (term("past", 16), term("s", 0, "-1/32"))),
    )


def diagram(name: str, *elements: Element) -> Diagram:
    return Diagram(
        name, {element.name: element for element in elements}, {"y": Output("y", Signal("y"))}, rate=Fraction(200)
    )


def late(x: Integers, samples: int) -> Integers:
    """x[n - samples], with zeros before its begin."""
    return np.concatenate([np.zeros(samples, dtype=np.int64), x])[: len(x)]


def low_passed(x: Integers) -> Integers:
    """Eq. 12.10 in integers, sample by sample."""
    driven = x - 2 * late(x, 6) + late(x, 12)
    y = [0, 0]
    for value in driven.tolist():
        y.append(2 * y[-1] - y[-2] + value)
    return np.array(y[2:])


def run_csv(diagram: Diagram, x: Integers, folder: Path) -> NDArray[np.float64]:
    (folder / "in.csv").write_text("x\n" + "\n".join(map(str, x.tolist())) + "\n")
    run_recording(diagram, str(folder / "in.csv"), str(folder / "out.csv"), lambda _: None)
    return read_csv(str(folder / "out.csv")).columns[0]


def test_the_integer_low_pass_of_an_ecg_is_exact(tmp_path: Path) -> None:
    """Every sample equals the published equation in integers, although both poles sit on the unit circle."""
    assert np.array_equal(run_csv(low_pass(), ecg(), tmp_path), low_passed(ecg()))
    triangle = np.convolve(ecg(), [1, 2, 3, 4, 5, 6, 5, 4, 3, 2, 1])[: len(ecg())]
    assert np.array_equal(low_passed(ecg()), triangle)


def test_the_integer_high_pass_of_an_ecg_is_exact(tmp_path: Path) -> None:
    """32*y = 32*x16 - (x + x1 + .. + x31), evaluated directly in integers."""
    x = ecg()
    times_32 = 32 * late(x, 16) - sum((late(x, k) for k in range(32)), np.zeros(len(x), dtype=np.int64))
    assert np.array_equal(run_csv(high_pass(), x, tmp_path) * 32, times_32)


def test_the_filters_hold_as_many_cells_as_their_shared_lines_need() -> None:
    """14 cells and no multiplier for the low-pass; 33 and none for the high-pass."""
    assert (count(low_pass()).cells, count(low_pass()).multiplies) == (14, 0)
    assert (count(high_pass()).cells, count(high_pass()).multiplies) == (33, 0)


def test_the_same_ecg_as_16_bit_sound_gives_the_same_samples(tmp_path: Path) -> None:
    """WAV integers are scaled by 2^-15, which changes no digit of a linear diagram without starting contents."""
    wavfile.write(tmp_path / "in.wav", 200, ecg().astype(np.int16))
    run_recording(low_pass(), str(tmp_path / "in.wav"), str(tmp_path / "out.wav"), lambda _: None)
    rate, made = wavfile.read(tmp_path / "out.wav")
    assert rate == 200
    assert np.array_equal(made * 2**15, low_passed(ecg()))
