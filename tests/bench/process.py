"""Time `specterm levels` on a simple sheet as a whole process, over a process that only imports numpy and scipy.linalg.

Run: python tests/bench/process.py [--repeats 10]. Not collected by pytest; nothing is asserted. Runs alternate.
"""

from __future__ import annotations

import argparse
import os
import statistics
import subprocess
import sys
import time
from pathlib import Path

REPO = Path(__file__).resolve().parent.parent.parent
COMMANDS = {
    "import numpy, scipy.linalg": ["-c", "import numpy, scipy.linalg"],
    "specterm levels": ["-m", "specterm", "levels", "-e", "H = p^2 + x^4; x in (-inf, inf)"],
    "specterm levels --json": ["-m", "specterm", "levels", "-e", "H = p^2 + x^4; x in (-inf, inf)", "--json"],
    "specterm levels, a preset": ["-m", "specterm", "levels", "coupled-wells"],
    "specterm presets": ["-m", "specterm", "presets"],
}


def main() -> None:
    """Print the medians and their ratios to the first command."""
    parser = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    parser.add_argument("--repeats", type=int, default=10)
    repeats = parser.parse_args().repeats
    environ = {**os.environ, "PYTHONPATH": str(REPO), "OPENBLAS_NUM_THREADS": "1"}
    seconds: dict[str, list[float]] = {name: [] for name in COMMANDS}
    for _ in range(repeats + 1):
        for name, words in COMMANDS.items():
            start = time.perf_counter()
            subprocess.run([sys.executable, *words], env=environ, cwd=REPO, capture_output=True, check=True)
            seconds[name].append(time.perf_counter() - start)
    medians = {name: statistics.median(runs[1:]) for name, runs in seconds.items()}
    base = next(iter(medians.values()))
    for name, value in medians.items():
        print(f"{name:28s} {1e3 * value:6.0f} ms  {value / base:5.2f} x")


if __name__ == "__main__":
    main()
