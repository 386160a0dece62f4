"""Exit codes of every command: 0 all holds, 1 refuted or an error, 2 cannot be used, 3 undecided."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import pytest

from flowgraph.cli.main import COMMANDS, main

GOOD = """\
diagram level_mean {
    rate   10 Hz
    coef   r = 0.75
    input  level
    output mean
    delay  mean1 = mean
    adder  mean  = (1 - r)*level + r*mean1
    intent mean[n] = (1 - r)*level[n] + r*mean[n-1]
    require stable
}
"""
WITHOUT_INTENT = GOOD.replace("    intent mean[n] = (1 - r)*level[n] + r*mean[n-1]\n", "")
REFUTED = GOOD.replace("r*mean[n-1]", "r*mean[n-2]")
UNDECIDED = """\
diagram tone {
    rate   8 kHz
    coef   c = cos(2*pi*440 Hz/rate)
    output y
    adder  y = 2*c*y1 - y2
    delay  y1, y2 = y starts 0, 1
    intent y[n] = 2*c*y[n-1] - y[n-2], y[-2] = 1
    require stable
}
"""
LOOP = GOOD.replace("    delay  mean1 = mean\n", "    wire   mean1 = mean\n")
BROKEN = GOOD.replace("coef   r = 0.75", "coef   r = = 0.75")


@pytest.fixture(autouse=True)
def _in_an_empty_folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Files are named as a user at a shell names them."""
    monkeypatch.chdir(tmp_path)
    for name, text in {
        "good": GOOD,
        "noclaim": WITHOUT_INTENT,
        "refuted": REFUTED,
        "undecided": UNDECIDED,
        "loop": LOOP,
        "broken": BROKEN,
    }.items():
        Path(f"{name}.sfg").write_text(text)
    Path("in.csv").write_text("level\n1\n0\n")


def call(command: str, file: str) -> list[str]:
    """The words of a call of one command on one file."""
    more = {"run": ["in.csv", "out.csv"], "emit": ["--to", "python"], "draw": ["-o", "out.svg"]}
    return [command, file, *more.get(command, [])]


@pytest.mark.parametrize("command", COMMANDS)
def test_a_good_file_is_0(command: str, capsys: pytest.CaptureFixture[str]) -> None:
    """Every command says something of a good file, and nothing on standard error."""
    assert main(call(command, "good.sfg")) == 0
    told = capsys.readouterr()
    assert told.out != ""
    assert told.err == ""


@pytest.mark.parametrize("command", COMMANDS)
def test_a_broken_file_is_1_and_nothing_is_written(command: str, capsys: pytest.CaptureFixture[str]) -> None:
    """The finding is told with its place; no output file appears."""
    before = sorted(Path().iterdir())
    assert main(call(command, "broken.sfg")) == 1
    told = capsys.readouterr()
    assert "broken.sfg:3:16: error: " in (told.out if command == "check" else told.err)
    assert command == "check" or told.out == ""
    assert sorted(Path().iterdir()) == before


@pytest.mark.parametrize("command", COMMANDS)
@pytest.mark.parametrize(
    ("file", "reason"), [("missing.sfg", "No such file or directory"), ("folder", "Is a directory")]
)
def test_a_file_that_cannot_be_read_is_2(
    command: str, file: str, reason: str, capsys: pytest.CaptureFixture[str]
) -> None:
    """A missing file and a folder are named with the reason, on standard error alone."""
    Path("folder").mkdir()
    assert main(call(command, file)) == 2
    assert capsys.readouterr() == ("", f"error: {file}: {reason}\n")


@pytest.mark.parametrize("command", COMMANDS)
def test_an_unknown_option_is_2(command: str, capsys: pytest.CaptureFixture[str]) -> None:
    """Options are not guessed, nor is what only begins like one."""
    for option in ("--frobnicate", "--jso"):
        with pytest.raises(SystemExit) as stopped:
            main([*call(command, "good.sfg"), option])
        assert stopped.value.code == 2
        assert capsys.readouterr().err.endswith(f"error: unrecognized arguments: {option}\n")


@pytest.mark.parametrize("words", [[], ["frobnicate"], ["check"], ["emit", "good.sfg"], ["run", "good.sfg", "in.csv"]])
def test_a_call_without_what_it_needs_is_2(words: list[str], capsys: pytest.CaptureFixture[str]) -> None:
    """No command, an unknown one, no file, no language, no output."""
    with pytest.raises(SystemExit) as stopped:
        main(words)
    assert stopped.value.code == 2
    assert capsys.readouterr().err.startswith("usage: flowgraph ")


def test_help_is_0(capsys: pytest.CaptureFixture[str]) -> None:
    """`flowgraph --help` and that of each command, at most 80 columns wide."""
    for words in [["--help"], *([command, "--help"] for command in COMMANDS)]:
        with pytest.raises(SystemExit) as stopped:
            main(words)
        assert stopped.value.code == 0
        assert max(map(len, capsys.readouterr().out.splitlines())) <= 80


def test_verify_tells_refuted_and_undecided_apart(capsys: pytest.CaptureFixture[str]) -> None:
    """1 with a refutation, 3 with nothing refuted and something undecided; a refutation wins."""
    assert main(["verify", "refuted.sfg"]) == 1
    assert main(["verify", "undecided.sfg"]) == 3
    assert main(["verify", "undecided.sfg", "refuted.sfg"]) == 1
    assert main(["verify", "good.sfg", "undecided.sfg"]) == 3
    assert "undecided  require stable" in capsys.readouterr().out


@pytest.mark.parametrize(
    ("command", "code"),
    [
        ("check", 1),
        ("verify", 1),
        ("analyse", 0),
        ("schedule", 0),
        ("draw", 0),
        ("run", 0),
        ("reduce", 1),
        ("emit", 1),
    ],
)
def test_findings_on_claims_alone_do_not_stop_every_command(
    command: str, code: int, capsys: pytest.CaptureFixture[str]
) -> None:
    """Without an intent: verify, analyse, schedule, draw and run tell the finding and go on, the others refuse."""
    assert main(call(command, "noclaim.sfg")) == code
    told = capsys.readouterr()
    assert "[claim-" in (told.out if command == "check" else told.err)
    assert command == "check" or (told.out == "") == (command in ("reduce", "emit"))


@pytest.mark.parametrize("command", COMMANDS)
def test_only_draw_goes_on_after_a_loop_without_a_delay(command: str, capsys: pytest.CaptureFixture[str]) -> None:
    """The drawing marks the loop; nothing can be computed with it."""
    assert main(call(command, "loop.sfg")) == (0 if command == "draw" else 1)
    told = capsys.readouterr()
    assert "[delay-free-loop]" in told.out + told.err


def test_draw_reduced_refuses_a_loop_without_a_delay(capsys: pytest.CaptureFixture[str]) -> None:
    """There is no reduced diagram to draw beside it."""
    assert main(["draw", "loop.sfg", "--reduced", "-o", "out.svg"]) == 1
    assert "[delay-free-loop]" in capsys.readouterr().err
    assert not Path("out.svg").exists()


def test_an_interrupted_command_is_130(monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]) -> None:
    """Ctrl-C ends a command with a word and no traceback; so does a lack of memory, with code 2."""
    monkeypatch.setattr("flowgraph.cli.verify.verify_all", _raises(KeyboardInterrupt))
    assert main(["verify", "good.sfg"]) == 130
    assert capsys.readouterr() == ("", "stopped\n")
    monkeypatch.setattr("flowgraph.cli.verify.verify_all", _raises(MemoryError))
    assert main(["verify", "good.sfg"]) == 2
    assert capsys.readouterr() == ("", "error: this needs more memory than there is\n")


def _raises(kind: type[BaseException]) -> Callable[..., None]:
    def fails(*_: object) -> None:
        raise kind

    return fails
