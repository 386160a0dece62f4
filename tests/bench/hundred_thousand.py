"""100 000 elements from `repeat`: elaborate, check and schedule. Prints seconds and peak memory.

python tests/bench/hundred_thousand.py
"""

from __future__ import annotations

import gc
import resource
from time import perf_counter

from flowgraph.schedule.schedule import schedule
from flowgraph.text.load import load_text

SECTIONS = 16_667

TEXT = f"""
diagram long_chain {{
    const N = {SECTIONS}
    coef b1, b2, a1, a2
    input x
    output y
    wire s[0] = x
    repeat k = 1 .. N {{
        adder w[k] = s[k-1] - a1*w1[k] - a2*w2[k]
        delay w1[k] = w[k]
        delay w2[k] = w1[k]
        adder u[k] = b1*w1[k] + b2*w2[k]
        gain  g[k] = 1/2*u[k]
        adder s[k] = w[k] + g[k]
    }}
    wire y = s[N]
    require cells <= 2*N
}}
"""


def main() -> None:
    gc.disable()  # as the command line does
    began = perf_counter()
    loaded = load_text(TEXT)
    checked = perf_counter()
    diagram = loaded.diagrams[0]
    found = schedule(diagram)
    done = perf_counter()
    peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024
    errors = [finding.code for finding in loaded.findings if not finding.code.startswith("claim-")]
    print(f"elements            {len(diagram.elements)}")
    print(f"findings            {errors or 'none but claims'}")
    print(f"elaborate and check {checked - began:.2f} s")
    print(f"schedule            {done - checked:.2f} s ({len(found.operations)} operations)")
    print(f"together            {done - began:.2f} s")
    print(f"peak memory         {peak:.0f} MB")


if __name__ == "__main__":
    main()
