"""Every rule broken once, with all that is said about it, byte for byte."""

from __future__ import annotations

import pytest
from message_files import MessageCase, all_cases, read_cases

from flowgraph.source.render import render
from flowgraph.text.load import load_text


@pytest.mark.parametrize("case", all_cases(), ids=lambda case: case.title)
def test_what_is_found(case: MessageCase) -> None:
    """The findings of a text are exactly those written down."""
    assert "".join(render(found) + "\n" for found in load_text(case.source).findings) == case.expected


@pytest.mark.parametrize(
    "text",
    [
        "",
        "words\n==== a\nx\n---- found\ny\n",
        "\n==== a\nx\n",
        "\n==== a\n---- found\ny\n",
        "\n==== a\nx\n---- found\n",
        "\n==== a\nx\n---- found\ny\n---- found\nz\n",
        "\n==== a\nx\n---- found\ny\n\n==== a\nx\n---- found\ny\n",
    ],
)
def test_malformed_case_files_are_refused(text: str) -> None:
    """A case that lost a part, or has the title of another, is never dropped in silence."""
    with pytest.raises(ValueError, match="made"):
        read_cases(text, "made")
