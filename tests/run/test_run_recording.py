"""Recordings through diagrams: round trips of CSV and WAV, and every bad recording refused by name."""

from __future__ import annotations

import struct
import wave
from collections.abc import Callable
from fractions import Fraction
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.io import wavfile

from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.elements import Adder, Delay, Gain, Input, Output, Signal, Term
from flowgraph.diagram.expression import Number
from flowgraph.run.csv_files import read_csv, write_csv
from flowgraph.run.recording import RecordingError
from flowgraph.run.run_recording import Ran, run_recording


def passing(*ports: str, rate: int | None = None, gain: str = "1") -> Diagram:
    """A diagram that hands each input on, times a gain."""
    elements = [Input(name) for name in ports]
    gains = [Gain(f"{name}.out", Number(Fraction(gain)), Signal(name)) for name in ports]
    return Diagram(
        "passing",
        {element.name: element for element in [*elements, *gains]},
        {f"{name}_out": Output(f"{name}_out", Signal(f"{name}.out")) for name in ports},
        rate=None if rate is None else Fraction(rate),
    )


def run(diagram: Diagram, source: Path | str, target: Path) -> Ran:
    return run_recording(diagram, str(source), str(target), lambda _: None)


@given(st.lists(st.floats(allow_nan=False, allow_infinity=False), min_size=1))
def test_every_double_comes_through_csv_unchanged(
    tmp_path_factory: pytest.TempPathFactory, values: list[float]
) -> None:
    """Subnormals, the sign of zero and the largest doubles read back as the same bits."""
    path = str(tmp_path_factory.mktemp("csv") / "values.csv")
    write_csv(path, ["level"], [np.array(values)])
    assert read_csv(path).columns[0].tobytes() == np.array(values).tobytes()


@pytest.mark.parametrize("separator", [",", ";", "\t", " , ", ";  "])
def test_columns_go_to_the_ports_of_their_name(tmp_path: Path, separator: str) -> None:
    """In any order, separated by comma, semicolon or tab; comments, empty lines, a mark and CRLF do no harm."""
    source = tmp_path / "in.csv"
    rows = ["rain", "level"], ["1", "-2.5e-3"], ["+.5", "7"]
    lines = ["# gauge 3", *(separator.join(row) for row in rows), "", ""]
    source.write_bytes(b"\xef\xbb\xbf" + "\r\n".join(lines).encode())
    ran = run(passing("level", "rain"), source, tmp_path / "out.csv")
    assert (tmp_path / "out.csv").read_text() == "level_out,rain_out\n-0.0025,1.0\n7.0,0.5\n"
    assert ran == Ran(str(tmp_path / "out.csv"), 2, ("level", "rain"), ("level_out", "rain_out"), None, ())


@pytest.mark.parametrize(
    ("data", "expected"),
    [
        (np.array([-32768, -1, 0, 32767], dtype=np.int16), [-1.0, -(2.0**-15), 0.0, 32767 / 32768]),
        (np.array([-(2**31), 1, 2**31 - 1], dtype=np.int32), [-1.0, 2.0**-31, 1 - 2.0**-31]),
        (np.array([0, 128, 255], dtype=np.uint8), [-1.0, 0.0, 127 / 128]),
        (np.array([0.25, -3.0], dtype=np.float32), [0.25, -3.0]),
        (np.array([0.1, -3.0], dtype=np.float64), [0.1, -3.0]),
    ],
)
def test_wav_samples_are_fractions_of_full_scale(
    tmp_path: Path, data: np.ndarray[tuple[int], np.dtype[np.float64]], expected: list[float]
) -> None:
    """Integers of any width are divided by 2^(bits - 1); floats stay; the output is 64 bit float at the same rate."""
    wavfile.write(tmp_path / "in.wav", 8000, data)
    ran = run(passing("x"), tmp_path / "in.wav", tmp_path / "out.wav")
    rate, made = wavfile.read(tmp_path / "out.wav")
    assert (rate, made.dtype, made.tolist()) == (8000, np.float64, expected)
    assert (ran.samples, ran.rate) == (len(expected), 8000)


def test_channels_are_the_ports_in_the_order_of_the_file(tmp_path: Path) -> None:
    """24 bit stereo in, two channels out; the first channel is the first input."""
    with wave.open(str(tmp_path / "in.wav"), "wb") as file:
        file.setnchannels(2)
        file.setsampwidth(3)
        file.setframerate(48000)
        file.writeframes(b"\x00\x00\x80\xff\xff\x7f\x00\x00\x40\x01\x00\x00")
    run(passing("left", "right", rate=48000), tmp_path / "in.wav", tmp_path / "out.wav")
    assert wavfile.read(tmp_path / "out.wav")[1].tolist() == [[-1.0, 1 - 2.0**-23], [0.5, 2.0**-23]]


def test_csv_becomes_wav_at_the_rate_of_the_diagram(tmp_path: Path) -> None:
    """A CSV file has no rate of its own."""
    (tmp_path / "in.csv").write_text("x\n0.5\n")
    run(passing("x", rate=200), tmp_path / "in.csv", tmp_path / "out.wav")
    assert wavfile.read(tmp_path / "out.wav")[0] == 200


def test_a_diagram_without_inputs_takes_a_number_of_samples(tmp_path: Path) -> None:
    """A pulse that starts in a cell goes round a line of three."""
    one = Number(Fraction(1))
    zero = Number(Fraction(0))
    diagram = Diagram(
        "turning",
        {"line": Delay("line", Signal("line", 3), 3, (zero, zero, one)), "y": Gain("y", one, Signal("line", 3))},
        {"y": Output("y", Signal("y"))},
    )
    run(diagram, "5", tmp_path / "out.csv")
    assert (tmp_path / "out.csv").read_text() == "y\n1.0\n0.0\n0.0\n1.0\n0.0\n"
    with pytest.raises(RecordingError, match="turning has no input; give a number of samples"):
        run(diagram, "in.csv", tmp_path / "out.csv")


def test_an_output_that_stops_being_a_number_is_named_with_its_first_sample(tmp_path: Path) -> None:
    """y = x + 10*y1 leaves the doubles; the output is written all the same."""
    diagram = Diagram(
        "growing",
        {
            "x": Input("x"),
            "y1": Delay("y1", Signal("y")),
            "y": Adder("y", (Term(Signal("x")), Term(Signal("y1", 1), False, Number(Fraction(10))))),
        },
        {"y": Output("y", Signal("y"))},
    )
    (tmp_path / "in.csv").write_text("x\n1e300\n" + "0\n" * 12)
    ran = run(diagram, tmp_path / "in.csv", tmp_path / "out.csv")
    assert ran.not_finite == (("y", 9),)
    assert (tmp_path / "out.csv").read_text().splitlines()[-1] == "inf"


BAD_CSV = [
    ("", ": the file is empty; its first line should name the columns"),
    ("x\n", ": the first line names columns, but no row follows"),
    ("1.5\n2\n", ":1: 1.5 is a number; the first line should name the columns"),
    ("x\n1\nnan\n", ":3: nan is no finite number (column x)"),
    ("x\n1\n\n-inf\n", ":4: -inf is no finite number (column x)"),
    ("x\n1e999\n", ":2: 1e999 is no finite number (column x)"),
    ("x\n1\ntwo\n", ":3: two is no number (column x)"),
    ("x\n1,5\n", ":2: 2 values, but the first line names 1 columns"),
    ("x;u\n0,5;1\n", ":2: 0,5 is no number (column x); write a decimal point"),
    ("x,u\n1,\n", ":2: there is no value (column u)"),
    ("x,u\n1\n", ":2: 1 values, but the first line names 2 columns"),
    ("x,x\n1,2\n", ":1: two columns are named x"),
    ("x,\n1,2\n", ":1: column 2 has no name"),
    ("x,\x1b[2J" + "u" * 50 + "\n1,2\n", ": no input for the column ?[2J" + "u" * 36 + "..; passing has 1 input: x"),
    ("u\n1\n", ": no column x and no input for the column u; passing has 1 input: x"),
    ("x,time\n1,2\n", ": no input for the column time; passing has 1 input: x"),
    ('x\n"' + "1" * 200_000 + '"\n', ":2: this line cannot be read as CSV (field larger than field limit (131072))"),
]


@pytest.mark.parametrize(("text", "message"), BAD_CSV)
def test_a_bad_csv_file_is_refused_at_its_row(tmp_path: Path, text: str, message: str) -> None:
    """The message says file, line, column and what is wrong; nothing is written."""
    source = tmp_path / "in.csv"
    source.write_text(text)
    refused(source, f"{source}{message}", passing("x"))


def test_a_binary_file_is_no_csv(tmp_path: Path) -> None:
    """Bytes that are no text are refused in one sentence."""
    source = tmp_path / "in.csv"
    source.write_bytes(bytes(range(256)))
    refused(source, f"{source}: this is no text in UTF-8, so no CSV file", passing("x"))


def sound(path: Path) -> bytes:
    """The bytes of a mono recording of 1000 samples at 44.1 kHz, 16 bit."""
    wavfile.write(path, 44100, np.arange(1000, dtype=np.int16))
    return path.read_bytes()


BAD_WAV: list[tuple[Callable[[bytes], bytes], str]] = [
    (lambda whole: b"", ": the file is empty"),
    (lambda whole: whole[:20], ": the file is cut off: header of 16 bytes announced, 0 there"),
    (lambda whole: whole[:1001], ": the file is cut off: samples of 2000 bytes announced, 957 there"),
    (lambda whole: whole[:40] + b"\xff\xff\xff\x7f" + whole[44:], ": the file is cut off: samples of 2147483647 bytes"),
    (lambda whole: b"level,rain\n" * 9, ": this cannot be read as a WAV file (File format b'leve' not understood."),
    (lambda whole: whole[:20] + b"\x06" + whole[21:], ": this cannot be read as a WAV file (Unknown wave file format"),
    (lambda whole: whole[:22] + b"\x00" + whole[23:], ": this cannot be read as a WAV file ("),
    (lambda whole: whole[:24] + bytes(4) + whole[28:], ": this cannot be read as a WAV file ("),
    (lambda whole: whole[:36], ": this cannot be read as a WAV file ("),
    (lambda whole: whole[:40] + bytes(4), ": the recording holds no samples"),
]


@pytest.mark.parametrize(("broken", "message"), BAD_WAV)
def test_a_broken_wav_file_is_refused(tmp_path: Path, broken: Callable[[bytes], bytes], message: str) -> None:
    """Cut off, of another kind, or with a header that contradicts itself: refused before work starts."""
    source = tmp_path / "in.wav"
    source.write_bytes(broken(sound(source)))
    refused(source, f"{source}{message}", passing("x"))


def test_a_wav_sample_that_is_no_number_is_refused(tmp_path: Path) -> None:
    """Float recordings may hold NaN; the sample and the channel are named."""
    source = tmp_path / "in.wav"
    wavfile.write(source, 8000, np.array([[0.0, 0.0], [0.0, np.nan]]))
    refused(source, f"{source}: sample 1 of channel 2 is nan, no number", passing("left", "right"))


def test_another_rate_or_number_of_channels_is_refused(tmp_path: Path) -> None:
    """Both rates, and both numbers, are named."""
    source = tmp_path / "in.wav"
    sound(source)
    refused(
        source,
        f"{source}: recorded at 44100 Hz, but passing works at 48000 Hz; "
        "resample the recording or change the line `rate`",
        passing("x", rate=48000),
    )
    refused(source, f"{source}: the recording has 1 channel; passing has 2 inputs: x, u", passing("x", "u"))


def refused(source: Path, message: str, diagram: Diagram) -> None:
    """The run stops with this message, and its folder holds nothing but the recording."""
    with pytest.raises(RecordingError) as caught:
        run(diagram, source, source.parent / "out.wav")
    assert str(caught.value)[: len(message)] == message
    assert list(source.parent.iterdir()) == [source]


def test_a_wav_output_needs_a_rate_in_whole_hertz(tmp_path: Path) -> None:
    """Refused before anything is computed."""
    source = tmp_path / "in.csv"
    source.write_text("x\n1\n")
    refused(
        source,
        f"{source.parent / 'out.wav'}: a WAV file needs a sample rate; add a line such as `rate 48 kHz` to the diagram",
        passing("x"),
    )
    half = Diagram("half", passing("x").elements, passing("x").outputs, rate=Fraction(1, 2))
    refused(source, f"{source.parent / 'out.wav'}: a WAV file states its rate in whole hertz, and 0.5 Hz is none", half)


def test_a_name_of_another_kind_and_a_missing_folder_are_refused(tmp_path: Path) -> None:
    """A file that cannot be named or opened leaves nothing behind."""
    source = tmp_path / "in.csv"
    source.write_text("x\n1\n")
    with pytest.raises(RecordingError, match="this name ends in neither"):
        run(passing("x"), source, tmp_path / "out.txt")
    with pytest.raises(FileNotFoundError):
        run(passing("x"), source, tmp_path / "nowhere" / "out.csv")
    with pytest.raises(FileNotFoundError):
        run(passing("x"), tmp_path / "missing.csv", tmp_path / "out.csv")
    assert list(tmp_path.iterdir()) == [source]


def test_an_output_may_replace_its_own_recording_and_follows_links(tmp_path: Path) -> None:
    """The recording is read whole before the output takes its place."""
    source = tmp_path / "in.csv"
    source.write_text("x\n1\n")
    link = tmp_path / "link.csv"
    link.symlink_to(source)
    run(passing("x", gain="3"), source, link)
    assert link.is_symlink()
    assert source.read_text() == "x_out\n3.0\n"


def test_the_same_run_gives_the_same_bytes(tmp_path: Path) -> None:
    """Nothing of the machine or the clock gets into an output."""
    source = tmp_path / "in.csv"
    source.write_text("x\n0.1\n0.2\n")
    for name in ("a.wav", "b.wav"):
        run(passing("x", rate=200, gain="1/3"), source, tmp_path / name)
    assert (tmp_path / "a.wav").read_bytes() == (tmp_path / "b.wav").read_bytes()
    assert struct.unpack("<2d", (tmp_path / "a.wav").read_bytes()[-16:]) == (0.1 * (1 / 3), 0.2 * (1 / 3))
