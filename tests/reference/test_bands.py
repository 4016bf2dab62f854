"""Particles in standing light: bands of p^2 + (V0/2)(1 - cos 2x) in recoil energies.

Table I of Bloch, Dalibard, Zwerger, Rev. Mod. Phys. 80 (2008) 885 was not reached; all entries were
recomputed (plane waves, Mathieu functions).
"""

import math
from functools import cache

import numpy as np
import pytest
from answers import agree, spectrum, step, within

LATTICE = {  # V0 -> 4J, W, J2/J, E(k=0), E(edge), gap at the edge, J of the deep-lattice formula
    3: ["0.444109", "0.451894", "0.101075", "1.234122", "1.686016", "1.486959", "0.161022"],
    5: ["0.263069", "0.264211", "0.051641", "1.818774", "2.082985", "2.440830", "0.086196"],
    10: ["0.076730", "0.076747", "0.011846", "2.846922", "2.923668", "4.572262", "0.022739"],
    15: ["0.026075", "0.026076", "0.003459", "3.589238", "3.615314", "6.280560", "0.007439"],
    20: ["0.009965", "0.009965", "0.001184", "4.199954", "4.209919", "7.648268", "0.002785"],
}
PERIODS = 24
"""Phases per band in the Fourier sum for J; the neglected amplitudes J_22, J_23 are below 1e-9 even at V0 = 3."""


@cache
def band(depth, phase):
    """Return two levels at a phase."""
    return spectrum(f"V0 = {depth}\nH = p^2 + V0/2*(1 - cos(2*x))\nx in ring(0, pi), phase {phase!r}", 2)


@pytest.mark.parametrize("depth", LATTICE)
def test_band_edges(depth):
    """E(0), E(edge), the width of the first band and the gap above it."""
    _, width, _, bottom, top, gap, _ = LATTICE[depth]
    centre, edge = band(depth, 0.0), band(depth, 0.5)
    agree(centre, {0: bottom})
    agree(edge, {0: top})
    within(edge.levels[0].value - centre.levels[0].value, width, edge.levels[0].error + centre.levels[0].error)
    difference, error = step(edge, 0, 1)
    within(difference, gap, error)


@pytest.mark.parametrize("depth", LATTICE)
def test_tunnelling_amplitudes(depth):
    """J and J2 are the Fourier amplitudes of the first band, -E(k) = 2 J cos k - 2 J2 cos 2k ... about the mean."""
    half = [band(depth, k / PERIODS).levels[0].value for k in range(PERIODS // 2 + 1)]
    energies = np.array(half + half[-2:0:-1])
    waves = np.fft.rfft(energies).real / PERIODS
    within(-4 * waves[1], LATTICE[depth][0], 1e-12)
    within(abs(waves[2] / waves[1]), LATTICE[depth][2], 1e-10)


def test_deep_lattice_formula():
    """J = (4/sqrt pi) V0^(3/4) exp(-2 sqrt V0) (Zwerger 2003, from memory) is 12 % above a quarter of the width at V0 = 20."""
    for depth, (*_, printed) in LATTICE.items():
        within(4 / math.sqrt(math.pi) * depth**0.75 * math.exp(-2 * math.sqrt(depth)), printed)
    difference = band(20, 0.5).levels[0].value - band(20, 0.0).levels[0].value
    assert float(LATTICE[20][-1]) / (difference / 4) == pytest.approx(1.12, abs=0.005)


def test_bands_are_even_in_the_phase():
    """E(-k) = E(k) for a real potential, and a phase is taken modulo 1 (closed form)."""
    for phase in (0.11, 0.31):
        here = band(5, phase).levels
        for other in (band(5, -phase).levels, band(5, 1 + phase).levels):
            for a, b in zip(here, other, strict=True):
                assert abs(a.value - b.value) <= a.error + b.error
