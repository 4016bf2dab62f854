"""Time the derivatives of levels, and compare those of every preset with central differences of the solver.

Run: python tests/bench/sensitivities.py. Not collected by pytest; nothing is asserted. One thread.
"""

from __future__ import annotations

import one_thread  # noqa: F401 - before numpy

# isort: split
import statistics
import sys
import time
from pathlib import Path

import numpy as np

sys.path.insert(0, str(Path(__file__).resolve().parent.parent / "reference"))

from test_derivatives import FOLDER, NAMES, NEAR, differences, found

from specterm.analysis.sensitivities import sensitivities
from specterm.language import parse
from specterm.model import build
from specterm.spectrum import solve

EIGHT = """units: energy meV, length nm, mass m_e
H = p*(1/(2*m))*p + V + e*F*x
F = 9 [kV/cm]; one = 4.9; gap = 1.6; two = 6.1; offset = 265; deep = 20; inside = 0.061; outside = 0.088
layers x: thickness, V [meV], m [m_e]
    14   offset  outside
    one  deep    inside
    gap  offset  outside
    two  0       inside
    14   offset  outside
x in layers
"""


def seconds(model, spectrum, folder, repeats=9):
    """Return the median time of the derivatives of all levels by all numbers."""
    spent = []
    for _ in range(repeats):
        start = time.perf_counter()
        sensitivities(model, spectrum, folder)
        spent.append(time.perf_counter() - start)
    return statistics.median(spent)


def main() -> None:
    """Print times, and how far each preset's derivatives are off."""
    model = build(parse(EIGHT))
    spectrum = solve(model, count=10)
    print(f"8 parameters, 10 levels: {1e3 * seconds(model, spectrum, None):.0f} ms")
    worst = 0.0
    for name in NAMES:
        text, _, slopes = found(name)
        model = build(parse(text), folder=FOLDER)
        took = seconds(model, solve(model, count=10, near=NEAR.get(name)), FOLDER, 3)
        for parameter in slopes.parameters:
            true, unsure = differences(name, text, parameter)
            size = np.abs(true).max()
            if size < 10 * unsure.max():
                print(f"{name:18s} {parameter:8s} vanishes: {np.nanmax(np.abs(slopes.column(parameter))):.0e}")
                continue
            off = np.nanmax(np.abs(slopes.column(parameter) - true)) / size
            worst = max(worst, off)
            print(f"{name:18s} {parameter:8s} off {off:.0e} of the largest; differences known to {unsure.max() / size:.0e}")
        print(f"{name:18s} {len(slopes.parameters)} parameters, 10 levels: {1e3 * took:.0f} ms")
    print(f"worst: {worst:.1e}")


if __name__ == "__main__":
    main()
