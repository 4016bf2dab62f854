"""A hundred fits of a Morse-like molecule to levels with noise: how often each number lies within two standard errors.

Run `python tests/bench/fit_trials.py [TRIALS]`. The levels are those of the closed form plus seeded normal noise.
"""

import sys
import time

import numpy as np

from specterm.analysis.fit_levels import Solver
from specterm.analysis.fitting import fit
from specterm.analysis.observed import End, Observation, Observed

TRUE = {"T0": 120.0, "D0": 40.0, "a": 0.9}
SHEET = "H = p^2/2 + T0 + D0*(1 - exp(-a*x))^2; x in (-inf, inf); T0 = 119; D0 = 43; a = 0.86"
FREE = dict.fromkeys(TRUE, (-np.inf, np.inf))
LEVELS = 7
NOISE = 0.02


def morse(v):
    """Return the level number v: T + a sqrt(2 D) (v + 1/2) - a^2 (v + 1/2)^2/2 (closed form, hbar and mass 1)."""
    return TRUE["T0"] + TRUE["a"] * np.sqrt(2 * TRUE["D0"]) * (v + 0.5) - TRUE["a"] ** 2 * (v + 0.5) ** 2 / 2


def observed(seed, noise=NOISE):
    """Return levels with seeded noise."""
    shaken = morse(np.arange(LEVELS)) + noise * np.random.default_rng(seed).standard_normal(LEVELS)
    return Observed(tuple(Observation(v + 2, None, End(v), float(e), noise) for v, e in enumerate(shaken)), weighted=True)


def trials(count, first=0):
    """Return the distances of the fitted numbers from the true ones in standard errors, (trials, numbers), and chi-squares."""
    off, chi2 = [], []
    for seed in range(first, first + count):
        found = fit(SHEET, observed(seed), FREE, Solver())
        off.append([(one.value - TRUE[one.name]) / one.error for one in found.parameters])
        chi2.append(found.chi2)
    return np.array(off), np.array(chi2)


if __name__ == "__main__":
    start = time.perf_counter()
    number = int(sys.argv[1]) if len(sys.argv) > 1 else 100
    distances, squares = trials(number)
    within = (np.abs(distances) <= 2).sum(axis=0)
    for name, count in zip(TRUE, within, strict=True):
        sys.stdout.write(f"{name}: {count} of {number} within 2 standard errors\n")
    sys.stdout.write(f"mean chi-square {squares.mean():.2f} for {LEVELS - len(TRUE)}; {time.perf_counter() - start:.1f} s\n")
