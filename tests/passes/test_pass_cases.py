"""Each case of tests/cases: the pass makes exactly the text after of the text before, every step proved."""

import pytest
from case_files import CASES, Case, read_cases

from flowgraph.diagram.diagram import Diagram
from flowgraph.passes.reduce import PASSES, reduce_diagram, take_step, tidied
from flowgraph.text.load import load_text
from flowgraph.text.printer import print_diagram

BY_NAME = {found.__name__: found for found in PASSES}
ALL = [(path.stem, case) for path in sorted(CASES.glob("*.txt")) for case in read_cases(path.read_text("utf-8"))]


def rewritten(name: str, diagram: Diagram) -> Diagram:
    """The diagram after one pass, as often as it finds anything, or after all passes; each step is checked."""
    if name == "reduce":
        return reduce_diagram(diagram).after
    changed = False
    while (step := take_step(BY_NAME[name], diagram)) is not None:
        diagram, changed = step.after, True
    return tidied(diagram) if changed else diagram


def loaded(text: str) -> Diagram:
    """The last diagram of a text; findings on claims and on what is unread do not matter here."""
    return load_text(text).diagrams[-1]


@pytest.mark.parametrize(("name", "case"), ALL, ids=[f"{name}: {case.title}" for name, case in ALL])
def test_case(name: str, case: Case) -> None:
    """Before leads to after, a second run changes nothing, and the text reads back as the same diagram."""
    after = rewritten(name, loaded(case.before))
    assert print_diagram(after) == case.after
    assert rewritten(name, after) is after
    again = loaded(print_diagram(after))
    assert print_diagram(again) == case.after
    assert list(again.elements.values()) == list(after.elements.values())
