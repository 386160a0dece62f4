"""`check` of a small file as a whole process, in turn with `python -c "import lark"`: median ratio.

python tests/bench/check_start.py
"""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path
from statistics import median
from time import perf_counter

SAMPLE = Path(__file__).parents[2] / "samples" / "hum_notch.sfg"
TURNS = 15


def seconds(*arguments: str) -> float:
    """The wall time of one Python process."""
    began = perf_counter()
    subprocess.run([sys.executable, *arguments], check=True, stdout=subprocess.DEVNULL)
    return perf_counter() - began


def main() -> None:
    pairs = [(seconds("-m", "flowgraph", "check", str(SAMPLE)), seconds("-c", "import lark")) for _ in range(TURNS)]
    print(f"check            {median(check for check, _ in pairs):.3f} s")
    print(f"import lark      {median(lark for _, lark in pairs):.3f} s")
    print(f"ratio, median of {TURNS} pairs  {median(check / lark for check, lark in pairs):.2f}")


if __name__ == "__main__":
    main()
