"""Random diagrams from a fixed generator: the same seed gives the same diagram everywhere, for ever."""

from __future__ import annotations

from board import board

from flowgraph.diagram.diagram import Diagram


class Dice:
    """A linear congruential generator (the constants of Knuth's MMIX; from memory)."""

    def __init__(self, seed: int) -> None:
        self.state = (seed * 2 + 1) * 0x9E3779B97F4A7C15 % 2**64
        for _ in range(4):
            self.roll(2)

    def roll(self, sides: int) -> int:
        """A whole number from 0 up to, not including, `sides`."""
        self.state = (self.state * 6364136223846793005 + 1442695040888963407) % 2**64
        return (self.state >> 33) * sides >> 31

    def pick(self, choices: list[str]) -> str:
        return choices[self.roll(len(choices))]


def random_board(size: int, seed: int) -> Diagram:
    """One input, one output, `size` adders, delays and gains, loops through delays only, all of it read."""
    dice = Dice(seed * 64 + size)
    kinds = ["adder" if dice.roll(100) < 45 else "delay" if dice.roll(100) < 65 else "gain" for _ in range(size)]
    kinds[-1] = "adder"
    names = [f"{kind[0]}{at}" for at, kind in enumerate(kinds)]
    unread = ["x"]
    lines = ["input x"]
    delays = [name for name, kind in zip(names, kinds, strict=True) if kind == "delay"]
    for at, (name, kind) in enumerate(zip(names, kinds, strict=True)):
        earlier = ["x", *names[:at]]
        if kind == "delay":
            source = unread[0] if unread and dice.roll(2) else dice.pick([*earlier, *(n for n in names if n != name)])
            lines.append(f"delay {name} = {source}")
            unread = [other for other in unread if other != source] + [name]
        elif kind == "gain":
            source = dice.pick(unread or earlier)
            lines.append(f"gain {name} = k{at}*{source}")
            unread = [other for other in unread if other != source] + [name]
        else:
            choices = list(dict.fromkeys([*unread[:2], dice.pick(earlier), dice.pick([*delays, *earlier])]))
            if at == size - 1:
                choices = list(dict.fromkeys([*unread, *choices]))
            if len(choices) < 2:
                choices = list(dict.fromkeys([*choices, "x", *earlier]))[:2]
            if len(choices) < 2:
                lines.append(f"gain {name} = k{at}*x")
                unread = [other for other in unread if other != "x"] + [name]
                continue
            terms = []
            for source in choices:
                sign = "-" if dice.roll(3) == 0 else "+"
                scale = f"c{at}{len(terms)}*" if dice.roll(2) else ""
                terms.append(f"{sign} {scale}{source}")
            lines.append(f"adder {name} = {' '.join(terms)}")
            unread = [other for other in unread if other not in choices] + [name]
    return board(f"random{size}_{seed}", *lines, f"output y = {names[-1]}")
