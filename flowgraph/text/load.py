"""A file and everything it includes -> diagrams and findings. Bad input never raises, it is told."""

from __future__ import annotations

import gc
import os
import sys
from dataclasses import dataclass, field

from flowgraph.diagram.diagram import Diagram
from flowgraph.source.diagnostic import Diagnostic
from flowgraph.source.span import Source, Span
from flowgraph.text import syntax as s
from flowgraph.text.elaborate import elaborate
from flowgraph.text.exact import FILE_LENGTH, LEVELS
from flowgraph.text.measure import refuse_large
from flowgraph.text.number_file import path_below
from flowgraph.text.parse_file import parse_file
from flowgraph.text.program import Program


@dataclass(frozen=True, slots=True)
class Loaded:
    """The diagrams that could be built, in the order of the files, and every finding, in theirs."""

    diagrams: tuple[Diagram, ...]
    findings: tuple[Diagnostic, ...]


def load(path: str, *, library: str | None = None) -> Loaded:
    """The diagrams of a file and its includes; `-` is standard input. Raises OSError if it cannot be read."""
    if path == "-":
        data = sys.stdin.buffer.read(FILE_LENGTH + 1)
        return _Loader(library).load("-", data)
    with open(path, "rb") as file:
        data = file.read(FILE_LENGTH + 1)
    return _Loader(library).load(path, data)


def load_text(text: str, name: str = "diagram.sfg") -> Loaded:
    """The same for a text; includes and files of numbers are looked for beside `name`."""
    return _Loader(None).load(name, text.encode("utf-8", "surrogatepass"))


@dataclass(slots=True)
class _Loader:
    library: str | None
    texts: dict[str, s.DiagramText] = field(default_factory=dict)
    findings: list[Diagnostic] = field(default_factory=list)
    read: set[str] = field(default_factory=set)
    broken: set[str] = field(default_factory=set)

    def load(self, name: str, data: bytes) -> Loaded:
        """Parses the file and its includes, then elaborates every diagram."""
        collecting = gc.isenabled()
        gc.disable()  # nothing made here forms cycles, and the collector would walk a large tree again and again
        try:
            return self._load(name, data)
        finally:
            if collecting:
                gc.enable()

    def _load(self, name: str, data: bytes) -> Loaded:
        source = self._source(name, data)
        if source is not None:
            self._take(source, [os.path.realpath(name)])
        program = Program(self.texts, elaborate, broken=self.broken)
        refuse_large(program)
        for known in self.texts:
            if known not in program.left_alone:
                program.make(known, None)
        diagrams: list[Diagram] = []
        told: dict[tuple[str, str, int, int, str], Diagnostic] = {}
        for known in self.texts:
            for made in program.versions(known):
                for finding in made.findings:
                    key = (finding.code, finding.span.file, finding.span.start, finding.span.end, finding.message)
                    told.setdefault(key, finding)
            shown = [made.diagram for made in program.versions(known)[:1] if made.diagram is not None]
            diagrams.extend(shown)
        findings = sorted([*self.findings, *told.values()], key=Diagnostic.order)
        return Loaded(tuple(diagrams), tuple(findings))

    def _tell(self, code: str, message: str, span: Span, mend: str = "") -> None:
        self.findings.append(Diagnostic(code, message, span, help=mend))

    def _source(self, name: str, data: bytes) -> Source | None:
        """The text of a file, or None after telling why it is none."""
        start = Span(Source(name, ""), 0, 0)
        if len(data) > FILE_LENGTH:
            self._tell("too-large", f"this file is larger than {FILE_LENGTH // 2**20} MiB", start)
            return None
        try:
            text = data.decode("utf-8-sig")
        except UnicodeDecodeError:
            text = "\0"
        if "\0" in text:
            self._tell("not-text", "this is no text file in UTF-8", start)
            return None
        return Source(name, text)

    def _take(self, source: Source, path: list[str]) -> None:
        """Parses one file and, before its own diagrams, what it includes."""
        parsed, findings = parse_file(source)
        self.findings.extend(findings)
        for line in parsed.includes:
            if isinstance(line.node, s.Include):
                self._include(source, line.node.path, path)
        for diagram in parsed.diagrams:
            first = self.texts.setdefault(diagram.name.text, diagram)
            if first is not diagram:
                self._tell(
                    "defined-twice",
                    f"there is a diagram {diagram.name.text} already",
                    Span(source, diagram.name.start, diagram.name.end),
                    "give one of them another name",
                )
        if not parsed.diagrams and not parsed.includes and len(path) == 1 and not findings:
            self._tell("empty", "there is no diagram in this file", Span(source, 0, 0), "write diagram NAME { .. }")

    def _include(self, source: Source, word: s.Word, path: list[str]) -> None:
        span = Span(source, word.start, word.end)
        full = self._find(source, word.text)
        if full is None:
            self._tell(
                "path",
                f"{word.text} does not stand below the folder of this file",
                span,
                "copy it there, or name its folder with --library",
            )
        elif full in path:
            self._tell("includes-itself", f"{word.text} leads back to itself", span, "take this line away")
        elif len(path) > LEVELS:
            self._tell("too-deep", f"files included more than {LEVELS} deep", span)
        elif full not in self.read:
            self.read.add(full)
            self._open(source, word, span, full, path)

    def _find(self, source: Source, path: str) -> str | None:
        """The real path of an included file: below the folder of the including one, or below the library."""
        folder = os.path.dirname(source.name) or "."
        beside = path_below(folder, path)
        if (beside is None or not os.path.exists(beside)) and self.library is not None:
            return path_below(self.library, path) or beside
        return beside

    def _open(self, source: Source, word: s.Word, span: Span, full: str, path: list[str]) -> None:
        try:
            with open(full, "rb") as file:
                data = file.read(FILE_LENGTH + 1)
        except OSError as error:
            self._tell(
                "unreadable", f"{word.text} cannot be read: {(error.strerror or 'no reason given').lower()}", span
            )
            return
        included = self._source(os.path.join(os.path.dirname(source.name), word.text), data)
        if included is not None:
            self._take(included, [*path, full])
