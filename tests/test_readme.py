"""The README shows what the tool does."""

from readme_examples import README, refreshed


def test_every_example_of_the_readme_comes_out_as_printed() -> None:
    """Shown files are the samples, shown output is today's output, to the letter."""
    text = README.read_text("utf-8")
    assert refreshed(text) == text
