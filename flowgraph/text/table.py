"""Runs the LALR tables that Lark made of the grammar over one line, without an object for each token.

Lark reads a file of 100 000 lines in most of the time that a check takes. The tables, the terminals
and the tree builder are its own; only the loop over them is here. Aho, Sethi, Ullman 1986, section 4.7.
"""

from __future__ import annotations

import re
from collections.abc import Callable
from sys import intern
from typing import NamedTuple, TypeAlias, cast

from lark import Lark
from lark.grammar import Rule
from lark.lexer import PatternStr, TerminalDef
from lark.parsers.lalr_analysis import Shift

from flowgraph.text import syntax as s

Made: TypeAlias = object
"""What stands for a terminal or a rule that was read: a word, an expression, a part of a line, a node."""
Act: TypeAlias = Callable[[list[Made]], Made]


class _Reduce(NamedTuple):
    """The last `size` symbols are one `origin`; `act` makes its value of theirs, or it keeps that of its only one."""

    size: int
    origin: str
    act: Act | None


class _State(NamedTuple):
    """What may follow: `match` finds the next terminal, `keywords` are those that look like names."""

    match: Callable[[str, int, int], re.Match[str] | None]
    keywords: dict[str, str]
    shifts: dict[str, int]
    reduces: dict[str, _Reduce]
    gotos: dict[str, int]


END = "END_OF_LINE"


class LineTable:
    """The tables of a grammar of one line."""

    def __init__(self, lark: Lark) -> None:
        conf = lark.parse_interactive("").parser_state.parse_conf
        acts = cast(dict[object, Act], conf.callbacks)
        self._start, self._end = cast(int, conf.start_state), cast(int, conf.end_state)
        terminals = {terminal.name: terminal for terminal in lark.terminals}
        self._words = frozenset(terminals).intersection(name for name in acts if type(name) is str)
        blank = "|".join(terminals[name].pattern.to_regexp() for name in lark.ignore_tokens)
        self._states: dict[int, _State] = {}
        for number, row in conf.states.items():
            found = [terminals[name] for name in dict.fromkeys([*row, "NAME"]) if name in terminals]
            match, keywords = _reader(found, blank, terminals["NAME"])
            state = self._states[cast(int, number)] = _State(match, keywords, {}, {}, {})
            for symbol, (action, target) in row.items():
                name = END if symbol == "$END" else intern(str(symbol))
                if action is not Shift:
                    state.reduces[name] = _reduce(target, acts[target])
                elif name in terminals:
                    state.shifts[name] = cast(int, target)
                else:
                    state.gotos[name] = cast(int, target)

    def parse(self, text: str, start: int, end: int) -> s.Node | None:
        """The node for the characters `start` .. `end` of `text`; None where they are no line of the grammar."""
        states, words = self._states, self._words
        path = [self._start]
        values: list[Made] = []
        at = start
        while True:
            match, keywords, shifts, reduces, _ = states[path[-1]]
            found = match(text, at, end)
            if found is None or found.lastgroup is None:
                return None
            kind = found.lastgroup
            word = found[kind]
            if kind == "NAME":
                kind = keywords.get(word, kind)
            target = shifts.get(kind)
            while target is None:
                reduce = reduces.get(kind)
                if reduce is None:
                    return None
                size, origin, act = reduce
                if act is None:
                    del path[-1]
                elif size:
                    values[-size:] = [act(values[-size:])]
                    del path[-size:]
                else:
                    values.append(act([]))
                path.append(states[path[-1]].gotos[origin])
                if path[-1] == self._end and kind == END:
                    return cast(s.Node, values[-1])
                _, _, shifts, reduces, _ = states[path[-1]]
                target = shifts.get(kind)
            at = found.end()
            path.append(target)
            if kind in words:
                values.append(s.Word(word[1:-1] if kind == "STRING" else word, at - len(word), at))
            else:
                values.append(None)


def _reduce(rule: Rule, act: Act) -> _Reduce:
    """One rule; `?sum: factor` and its like pass on what they consist of."""
    passes = len(rule.expansion) == 1 and rule.options.expand1 and not rule.alias and not rule.expansion[0].is_term
    return _Reduce(len(rule.expansion), intern(str(rule.origin.name)), None if passes else act)


def _reader(
    found: list[TerminalDef], blank: str, name: TerminalDef
) -> tuple[Callable[[str, int, int], re.Match[str] | None], dict[str, str]]:
    """Finds one of some terminals, in the order in which Lark tries them; a keyword ends where a name would end."""
    a_name = re.compile(name.pattern.to_regexp())
    keywords: dict[str, str] = {}
    others: list[TerminalDef] = []
    for terminal in found:
        if isinstance(terminal.pattern, PatternStr) and a_name.fullmatch(terminal.pattern.value):
            keywords[terminal.pattern.value] = intern(str(terminal.name))
        else:
            others.append(terminal)
    others.sort(key=lambda t: (-t.priority, -t.pattern.max_width, -len(t.pattern.value), t.name))
    tried = [f"(?P<{terminal.name}>{terminal.pattern.to_regexp()})" for terminal in others]
    tried.append(rf"(?P<{END}>\Z)")
    return re.compile(f"(?:{blank})*+(?:{'|'.join(tried)})").match, keywords
