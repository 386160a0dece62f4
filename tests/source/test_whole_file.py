"""Output files appear whole or not at all."""

from __future__ import annotations

import os
from pathlib import Path

import pytest

from flowgraph.source.whole_file import whole_file


def test_a_file_is_replaced_only_at_the_end(tmp_path: Path) -> None:
    """Until the work is done the old contents stay; afterwards nothing else is left in the folder."""
    target = tmp_path / "out.csv"
    target.write_text("old")
    with whole_file(str(target)) as place:
        place.write_text("new")
        assert target.read_text() == "old"
        assert place.suffix == ".csv"
    assert target.read_text() == "new"
    assert list(tmp_path.iterdir()) == [target]


@pytest.mark.parametrize("trouble", [ValueError, KeyboardInterrupt])
def test_trouble_leaves_the_folder_as_it_was(tmp_path: Path, trouble: type[BaseException]) -> None:
    """Also when the user interrupts."""

    def interrupted() -> None:
        with whole_file(str(tmp_path / "out.csv")) as place:
            place.write_text("half")
            raise trouble

    with pytest.raises(trouble):
        interrupted()
    assert list(tmp_path.iterdir()) == []


def test_a_missing_folder_is_told_before_work_starts(tmp_path: Path) -> None:
    """The error names the file as the user did."""
    path = str(tmp_path / "nowhere" / "out.csv")
    with pytest.raises(FileNotFoundError) as caught, whole_file(path):
        pytest.fail("the work began")
    assert caught.value.filename == path


def test_a_pipe_is_written_directly(tmp_path: Path) -> None:
    """What is no plain file is never replaced by one."""
    pipe = tmp_path / "pipe"
    os.mkfifo(pipe)
    with whole_file(str(pipe)) as place:
        assert place == pipe
    assert not pipe.is_file()
