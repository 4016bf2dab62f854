"""A frozen spectrum of the harmonic oscillator, H = p^2/2 + x^2/2 with hbar = 1, made from Hermite functions."""

from __future__ import annotations

import numpy as np

from specterm.spectrum.result import Level, Spectrum
from specterm.views.scene import Axes


def hermite_functions(count, x):
    """Return the first `count` normalised Hermite functions, shape (count, n), by their three-term recurrence."""
    x = np.asarray(x, dtype=float)
    rows = [np.pi**-0.25 * np.exp(-(x**2) / 2)]
    if count > 1:
        rows.append(np.sqrt(2.0) * x * rows[0])
    for n in range(2, count):
        rows.append(np.sqrt(2 / n) * x * rows[-1] - np.sqrt((n - 1) / n) * rows[-2])
    return np.array(rows[:count]).reshape(count, len(x))


class States:
    """The eigenstates; `phase` not None multiplies them by exp(i phase x)."""

    def __init__(self, count, phase=None):
        """Keep how many there are."""
        self.count, self.phase = count, phase

    def evaluate(self, x, derivative=0):
        """Return values or first derivatives, shape (count, n)."""
        rows = hermite_functions(self.count + 1, x)
        values = rows[: self.count]
        if derivative:
            n = np.arange(self.count)[:, None]
            values = np.asarray(x) * values - np.sqrt(2 * (n + 1)) * rows[1:]
        return values if self.phase is None else values * np.exp(1j * self.phase * np.asarray(x))


def spectrum(count=4, *, phase=None, values=None, threshold=None, kind="bound", reach=9.0, error=3e-12):
    """Return the spectrum with levels n + 1/2."""
    energies = [n + 0.5 for n in range(count)] if values is None else values
    levels = tuple(
        Level(n, energies[n], None if kind == "box" else error, kind, n, "even" if n % 2 == 0 else "odd") for n in range(count)
    )
    return Spectrum(
        levels=levels, states=States(count, phase), bound=None, threshold=threshold, complete=True, left=-reach, right=reach,
        basis="elements of order 14", unknowns=113, tolerance=1e-8, seconds=0.0031, values=np.array(energies, dtype=float),
    )


def potential(x):
    """Return x^2/2."""
    with np.errstate(over="ignore"):
        return np.asarray(x, dtype=float) ** 2 / 2


AXES = Axes("x", "", "")
