"""The loader of case files drops nothing in silence."""

import pytest
from case_files import CASES, read_cases

WHOLE = "== one\n-- before\ndiagram a {}\n-- after\ndiagram b {}\n"


def test_reads_a_case() -> None:
    """Title, before and after come back as they stand."""
    [case] = read_cases(WHOLE)
    assert (case.title, case.before, case.after, case.line) == ("one", "diagram a {}\n", "diagram b {}\n", 1)


@pytest.mark.parametrize(
    ("text", "told"),
    [
        (WHOLE.replace("-- after", "-- afterwards"), "line 4: no header may say '-- afterwards' here"),
        (WHOLE.replace("-- before", "==before"), "line 2: no header may say '==before' here"),
        ("== one\n-- before\ndiagram a {}\n", "line 1: the case 'one' needs one before and one after, in this order"),
        ("== one\n-- after\nx\n-- before\ny\n", "line 1: the case 'one' needs one before and one after, in this order"),
        (WHOLE + WHOLE, "line 6: the title 'one' is used twice"),
        (WHOLE + "-- after\n", "line 6: no header may say '-- after' here"),
        ("diagram a {}\n" + WHOLE, "line 1: 'diagram a {}' stands outside any part"),
    ],
)
def test_refuses_a_broken_file(text: str, told: str) -> None:
    """Unknown headers, unpaired parts, repeated titles and stray lines are errors with their line."""
    with pytest.raises(ValueError, match="line") as raised:
        read_cases(text)
    assert str(raised.value) == told


def test_every_pass_has_cases() -> None:
    """There is one file for each pass and one for all together, none for anything else, and none is empty."""
    from flowgraph.passes.reduce import PASSES

    files = {path.stem: path for path in CASES.glob("*.txt")}
    assert set(files) == {*(found.__name__ for found in PASSES), "reduce"}
    assert all(read_cases(path.read_text(encoding="utf-8")) for path in files.values())
