"""Waves made of levels, and the amplitudes of waves on levels, over the coordinate and over the wave number."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, field

import numpy as np

from specterm.analysis.measured_wave import Wave
from specterm.arrays import Array, Values
from specterm.errors import PhysicsError
from specterm.spectrum import Spectrum
from specterm.spectrum.result import States

MOST_KEPT = 4_000_000
"""Values of levels kept at most, beside those asked for last."""
BLOCK, PLACES = 500, 2_000
"""Wave numbers, and places, taken at once."""

Sample = tuple[Array, Values]
"""Places (n,) and the eigenstates there times the weights of integration over sqrt(2 pi), (levels, n)."""


@dataclass(frozen=True)
class KnownLevels:
    """The eigenstates of a spectrum with their values at places asked for before."""

    states: States
    known: dict[bytes, Values] = field(default_factory=dict)

    def __call__(self, x: Array) -> Values:
        """Return every eigenstate at the places x (n,), shape (levels, n)."""
        key = x.tobytes()
        if key not in self.known:
            if sum(values.size for values in self.known.values()) > MOST_KEPT:
                self.known.clear()
            parts = [self.states.evaluate(x[start : start + PLACES]) for start in range(0, max(1, len(x)), PLACES)]
            self.known[key] = np.concatenate(parts, axis=1)
        return self.known[key]


def level_wave(
    spectrum: Spectrum, kept: Values, known: Callable[[Array], Values] | None = None, *, size: float = 1.0
) -> Wave:
    """Return the sum of levels with amplitudes proportional to `kept` (levels,); PhysicsError where there are none.

    `known` gives the eigenstates at places, where something remembers them; `size` is the norm of the sum, below 1 where a
    part of a state is missing from it.
    """
    states = spectrum.states
    norm = float(np.linalg.norm(kept)) if len(kept) else 0.0
    if states is None or not norm > 0:
        raise PhysicsError("this outcome has probability 0 in this state", mend="choose another outcome")
    rows = np.flatnonzero(kept)
    share = kept * (size / norm)
    shares, evaluate = share[rows], known or states.evaluate
    ends = states.places[:-1], states.places[1:]
    return Wave("x", lambda x: shares @ evaluate(x)[rows], *ends, (states, share))


def amplitudes(spectrum: Spectrum, wave: Wave, sample: Sample | None = None) -> Values:
    """Return <n|psi> for every level, shape (levels,), on the axis the wave is given on; `sample` is from `sampled`."""
    states = spectrum.states
    if states is None:
        return np.zeros(0, dtype=complex)
    if wave.origin is not None and wave.origin[0] is states:
        return wave.origin[1]
    total = np.zeros(len(spectrum.levels), dtype=complex)
    if wave.axis == "x":
        cut = wave.cut(states.places)
        x, source = cut.rule[0], cut.rule[1] * cut.values
        for start in range(0, len(x), PLACES):
            total += states.evaluate(x[start : start + PLACES]).conj() @ source[start : start + PLACES]
        return total
    x, psi = sampled(spectrum, wave) if sample is None else sample
    k, weight = wave.rule
    for start in range(0, len(k), BLOCK):
        some = slice(start, start + BLOCK)
        momentum = psi @ np.exp(-1j * np.outer(x, k[some]))
        total += momentum.conj() @ (weight * wave.values)[some]
    return total


def fineness(spectrum: Spectrum, wave: Wave) -> int:
    """Return in how many parts the levels are sampled for the plane waves of a wave over k, a power of two."""
    most = float(max(abs(wave.lows[0]), abs(wave.highs[-1])))
    return 1 << int((spectrum.right - spectrum.left) * most / 15 + 1).bit_length()


def sampled(spectrum: Spectrum, wave: Wave) -> Sample:
    """Return the levels sampled finely enough for a wave over k."""
    every = level_wave(spectrum, np.ones(len(spectrum.levels), dtype=complex))
    x, w = every.cut(np.linspace(spectrum.left, spectrum.right, fineness(spectrum, wave) + 1)).rule
    psi = spectrum.states.evaluate(x) if spectrum.states is not None else np.zeros((0, len(x)))
    return x, psi * w / math.sqrt(2 * math.pi)
