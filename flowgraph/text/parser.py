"""One logical line -> one typed node: the grammar file, its parser, and the tree builder it calls."""

from __future__ import annotations

from collections.abc import Iterator
from functools import lru_cache
from importlib.resources import files
from pathlib import Path

from lark import Lark, Token

from flowgraph.text.build_tree import TreeBuilder
from flowgraph.text.syntax import Node


def grammar_text() -> str:
    """The one grammar file: inside the package where it was installed, beside it in a checkout."""
    packaged = files("flowgraph").joinpath("grammar", "flowgraph.lark")
    beside = Path(__file__).parents[2] / "grammar" / "flowgraph.lark"
    return packaged.read_text("utf-8") if packaged.is_file() else beside.read_text("utf-8")


class _EveryName:
    """Offers NAME in every state of the parser, so that `inputx` is never `input x`."""

    always_accept = ("NAME",)

    def process(self, stream: Iterator[Token]) -> Iterator[Token]:
        return stream


class LineParser:
    """The parser of one logical line; it turns into typed nodes while it reads."""

    def __init__(self) -> None:
        self._builder = TreeBuilder()
        self._lark = Lark(
            grammar_text(),
            parser="lalr",
            lexer="contextual",
            postlex=_EveryName(),
            transformer=self._builder,
            maybe_placeholders=True,
        )

    def parse(self, text: str, start: int, end: int) -> Node:
        """The node for the characters `start` .. `end` of `text`.

        Raises lark.UnexpectedInput (its offsets count from `start`), TooLargeError or MisplacedError.
        """
        self._builder.origin = start
        node: Node = self._lark.parse(text[start:end])  # type: ignore[assignment]
        return node


@lru_cache(maxsize=1)
def line_parser() -> LineParser:
    """The parser, made once a process, when the first line is read."""
    return LineParser()
