"""Proofs on all-pole lattices: 12 cells with names, 50 with numbers, 50 with names.

python tests/bench/lattices.py
"""

from __future__ import annotations

from fractions import Fraction
from time import perf_counter

from flowgraph.claims.verify import verify
from flowgraph.text.load import load_text


def lattice_text(cells: int, coefficient: dict[int, str], name: str, turned: bool) -> str:
    """A lattice in the language; `turned` writes every sum the other way round."""
    lines = ["input x", "output y, b"]
    for m in range(cells, 0, -1):
        source = "x" if m == cells else f"f{m}"
        scaled = f"{coefficient[m]}*s{m}"
        left = f"y = -{scaled} + {source}" if turned else f"y = {source} - {scaled}"
        lines.append("adder " + (left if m == 1 else left.replace("y =", f"f{m - 1} =", 1)))
    for m in range(1, cells + 1):
        inner = "y" if m == 1 else f"f{m - 1}"
        lines.append(f"delay s{m} = " + ("y" if m == 1 else f"g{m - 1}"))
        terms = [f"{coefficient[m]}*{inner}", f"s{m}"]
        result = "b" if m == cells else f"g{m}"
        lines.append(f"adder {result} = " + " + ".join(terms[::-1] if turned else terms))
    return f"diagram {name} {{\n" + "\n".join(lines)


def time_proof(label: str, cells: int, coefficient: dict[int, str], names: list[str]) -> None:
    declared = f"\ncoef {', '.join(names)}" if names else ""
    given = f" with {', '.join(f'{name} = {name}' for name in names)}" if names else ""
    plain = lattice_text(cells, coefficient, "plain", False).replace("output y, b", "output b") + declared + "\n}\n"
    turned = lattice_text(cells, coefficient, "turned", True).replace("output y, b", "output b") + declared
    text = plain + turned + f"\nintent b = plain(x){given}\n}}\n"
    diagram = load_text(text).diagrams[-1]
    began = perf_counter()
    verdict = verify(diagram)[0]
    seconds = perf_counter() - began
    bound = f", error below 2^-{verdict.error_below}" if verdict.error_below else ""
    print(f"{label:<24} {verdict.outcome} ({verdict.method}{bound}) in {seconds:.3f} s")


def main() -> None:
    named = {m: f"k{m}" for m in range(1, 51)}
    numbers = {m: f"({Fraction((m * 7919) % 15000 - 7000, 16384)})" for m in range(1, 51)}
    time_proof("12 cells, names", 12, named, [named[m] for m in range(1, 13)])
    time_proof("50 cells, numbers", 50, numbers, [])
    time_proof("50 cells, names", 50, named, [named[m] for m in range(1, 51)])


if __name__ == "__main__":
    main()
