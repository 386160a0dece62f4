"""A file -> its includes and diagrams as typed lines, and every syntax finding."""

from __future__ import annotations

from dataclasses import replace

from lark import UnexpectedInput

from flowgraph.source.diagnostic import Diagnostic
from flowgraph.source.span import Source, Span
from flowgraph.text import syntax as s
from flowgraph.text.build_tree import MisplacedError
from flowgraph.text.exact import BITS, TooLargeError
from flowgraph.text.explain_syntax import explain
from flowgraph.text.parser import line_parser
from flowgraph.text.read_lines import Block, Line, read_lines
from flowgraph.text.words import starts_a_claim


def parse_file(source: Source) -> tuple[s.FileText, list[Diagnostic]]:
    """Every line that can be understood, and what is wrong with the others."""
    return _FileParser(source).parse()


class _FileParser:
    def __init__(self, source: Source) -> None:
        self._source = source
        self._parser = line_parser()
        self._block, self._findings = read_lines(source)

    def parse(self) -> tuple[s.FileText, list[Diagnostic]]:
        includes: list[s.Statement] = []
        diagrams: list[s.DiagramText] = []
        for line in self._block.lines:
            parsed = self._node(line.head if isinstance(line, Block) else line)
            if isinstance(line, Block):
                diagrams.extend(self._diagram(line, parsed))
            elif parsed is None or isinstance(parsed.node, s.Include):
                includes.extend([parsed] if parsed else [])
            else:
                self._report(line, "outside", "this line stands outside a diagram", "put it between the { and } of one")
        return s.FileText(self._source, tuple(includes), tuple(diagrams)), self._findings

    def _report(self, line: Line, code: str, message: str, mend: str) -> None:
        self._findings.append(Diagnostic(code, message, Span(self._source, line.start, line.end), help=mend))

    def _node(self, line: Line) -> s.Statement | None:
        """The parsed line, or None after reporting what is wrong with it."""
        if line.broken:
            return None
        text = self._source.text
        try:
            return s.Statement(self._parser.parse(text, line.start, line.end), line.start, line.end)
        except UnexpectedInput as error:
            finding = explain(error, self._source, line.start, line.end)
        except MisplacedError as error:
            span = Span(self._source, error.start, error.end)
            finding = Diagnostic(error.code, error.message, span, help=error.mend)
        except TooLargeError:
            span = Span(self._source, line.start, line.end)
            finding = Diagnostic("too-large", f"a number in this line needs more than {BITS} bits", span)
        claim = starts_a_claim(text, line.start)
        self._findings.append(replace(finding, code=f"claim-{finding.code}") if claim else finding)
        return None

    def _diagram(self, block: Block, parsed: s.Statement | None) -> list[s.DiagramText]:
        if parsed is not None and isinstance(parsed.node, s.DiagramHead):
            return [s.DiagramText(parsed.node.name, self._body(block), self._source, parsed.start, parsed.end)]
        if parsed is not None:
            self._report(block.head, "outside", "only a diagram may begin a block here", "write diagram NAME {")
        self._body(block)
        return []

    def _body(self, block: Block) -> tuple[s.BodyLine, ...]:
        lines: list[s.BodyLine] = []
        for line in block.lines:
            parsed = self._node(line.head if isinstance(line, Block) else line)
            if isinstance(line, Block):
                lines.append(self._repeat(line, parsed))
            elif parsed is None:
                lines.append(s.Broken(line.start, line.end))
            elif isinstance(parsed.node, s.DiagramHead | s.RepeatHead | s.RepeatIn):
                self._report(
                    line, "block-missing", "this line needs a block", "end it with { and close the block with }"
                )
                lines.append(s.Broken(line.start, line.end))
            elif isinstance(parsed.node, s.Include):
                self._report(
                    line, "outside", "an include stands inside a diagram", "put it outside, before the diagram"
                )
            else:
                lines.append(parsed)
        return tuple(lines)

    def _repeat(self, block: Block, parsed: s.Statement | None) -> s.Repeat | s.Broken:
        body = self._body(block)
        if parsed is not None and isinstance(parsed.node, s.RepeatHead | s.RepeatIn):
            return s.Repeat(parsed.node, body, parsed.start, parsed.end)
        if parsed is not None:
            self._report(
                block.head, "outside", "only a repeat may begin a block inside a diagram", "write repeat k = A .. B {"
            )
        return s.Broken(block.head.start, _last(block))


def _last(block: Block) -> int:
    """The offset behind the last line of a block, however deep."""
    while block.lines:
        line = block.lines[-1]
        if isinstance(line, Line):
            return line.end
        block = line
    return block.head.end
