"""The density of a state over momentum: continuous on a line, at discrete momenta on a ring."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from specterm.analysis.measured_wave import TURNS, Wave, of_prepared
from specterm.analysis.plane_waves import plane_sums
from specterm.analysis.prepared import Prepared, prepare
from specterm.analysis.quadrature import POINTS
from specterm.arrays import Array
from specterm.discrete.quadrature import gauss_legendre
from specterm.model import Model
from specterm.spectrum import Spectrum

HELD = 0.999
"""The probability a window on a line is chosen to hold."""
HELD_ON_RING = 0.9999
ALIVE = 1e-20
"""Pieces with less than this share of the state do not count in its extent."""
PANELS = 32
"""The window is searched in at least so many steps."""
MOST_PRODUCTS = 1e7
"""Places times momenta, at most: a state that jumps may end here with less held."""
MOST_SAMPLES = 20_000
LEAST_STICKS = 2
"""Momenta shown at least on either side of the middle one on a ring."""


@dataclass(frozen=True)
class MomentumDensity:
    """Density over momentum: `k` (n,) ascending, in hbar over the unit of length, named by `unit`, and `density` (n,).

    On a line |phi(k)|^2 with integral 1 over all k; on a ring (`discrete`) the probabilities of the momenta `k`. `held` is the
    probability inside the window shown: tails fall off as 1/k^4 where the state has a kink and as 1/k^2 where it jumps.
    """

    k: Array
    density: Array
    discrete: bool
    unit: str
    held: float


def level_momentum(model: Model, spectrum: Spectrum, row: int, samples: int = 400) -> MomentumDensity:
    """Return the momentum density of the level in that row of a spectrum, as `momentum_density` does."""
    return momentum_density(model, prepare(model, spectrum, f"level({spectrum.levels[row].index})"), samples)


def momentum_density(model: Model, wave: Prepared, samples: int = 400, held: float | None = None) -> MomentumDensity:
    """Return the momentum density of a prepared state in a window that holds the share `held`: 0.999, or 0.9999 on a ring.

    phi(k) is the integral of psi exp(-i k x)/sqrt(2 pi) over the domain, psi being 0 beyond walls, by Gauss rules resolved for
    the largest |k|; on a ring k = 2 pi (n + phase)/L. At least `samples` momenta on a line, more where the density oscillates.
    Tested against closed forms for wells, oscillators, hydrogen and rings.
    """
    whole = of_prepared(wave)
    mean, spread = _slope_moments(wave)
    if model.domain.is_ring:
        return _on_ring(model, whole, mean, held or HELD_ON_RING)
    return _on_line(model, whole, (mean, spread), samples, held or HELD)


def unit_of_momentum(model: Model) -> str:
    """Return what momenta are shown in: hbar over the unit of length, hbar for an angle, "" where hbar is 1."""
    if model.coordinate_unit:
        return f"hbar/{model.coordinate_unit}"
    return "hbar" if model.units.energy or model.hbar != 1 else ""


def _slope_moments(wave: Prepared) -> tuple[float, float]:
    """Return mean and spread of the wave number from the slope of the wave between its jumps."""
    psi, slope = wave.jet(wave.x, 0), np.nan_to_num(wave.jet(wave.x, 1))
    mean = float((wave.w * np.imag(psi.conj() * slope)).sum())
    square = float((wave.w * np.abs(slope) ** 2).sum())
    return mean, math.sqrt(max(0.0, square - mean**2))


def _on_ring(model: Model, whole: Wave, mean: float, wanted: float) -> MomentumDensity:
    """Return the probabilities of the momenta around the mean one."""
    length = model.domain.right - model.domain.left
    step, phase = 2 * math.pi / length, model.domain.phase or 0.0
    middle, reach = round(mean / step - phase), 8
    while True:
        k: Array = step * (np.arange(middle - reach, middle + reach + 1, dtype=np.float64) + phase)
        finer = whole.finer(float(np.abs(k).max()))
        x, w = finer.rule
        shares = np.abs(plane_sums(x, w * finer.values, k, np.zeros(1))[:, 0]) ** 2 / length
        if shares.sum() >= wanted or len(x) * len(k) > MOST_PRODUCTS / 4:
            break
        reach *= 2
    rising = np.cumsum(np.concatenate([[shares[reach]], shares[reach - 1 :: -1] + shares[reach + 1 :]]))
    kept = min(max(int(np.searchsorted(rising, wanted)), LEAST_STICKS), reach)
    some = slice(reach - kept, reach + kept + 1)
    return MomentumDensity(k[some], shares[some], True, unit_of_momentum(model), float(shares[some].sum()))


def _on_line(model: Model, whole: Wave, moments: tuple[float, float], samples: int, wanted: float) -> MomentumDensity:
    """Return the density in the smallest window about the mean that holds enough."""
    alive = whole.shares > ALIVE * whole.norm
    whole = Wave(whole.axis, whole.at, whole.lows[alive], whole.highs[alive])
    extent = float(whole.highs[-1] - whole.lows[0])
    mean = moments[0]
    reach = _first_reach(whole, moments, extent)
    while True:
        finer = whole.finer(abs(mean) + reach)
        half = _half_panel(reach, extent)
        shares = _panel_shares(finer, mean, reach, half)
        if shares.sum() >= wanted or len(finer.rule[0]) * len(shares) * POINTS > MOST_PRODUCTS / 4:
            break
        reach *= 2
    middle = len(shares) // 2
    rising = np.cumsum(shares[middle - 1 :: -1] + shares[middle:])
    kept = min(int(np.searchsorted(rising, wanted)) + 1, middle)
    window = kept * 2 * half
    count = int(np.clip(2 * window * extent / 1.5, samples, max(samples, MOST_SAMPLES)))
    k, density = _sampled(finer, mean, window, count)
    return MomentumDensity(k, density, False, unit_of_momentum(model), float(rising[kept - 1]))


def _first_reach(whole: Wave, moments: tuple[float, float], extent: float) -> float:
    """Return half a window to begin with: 3.5 spreads, or less where the slope of the wave is that of a singular place."""
    x, w = whole.rule
    share = w * np.abs(whole.values) ** 2 / whole.norm
    place = float((share * x).sum())
    width = math.sqrt(float((share * (x - place) ** 2).sum()))
    reach = 3.5 * moments[1]
    work = len(x) * (1 + reach * extent / TURNS) ** 2 * POINTS
    return reach if 0 < reach < math.inf and work < MOST_PRODUCTS / 16 else 2 / width


def _half_panel(reach: float, extent: float) -> float:
    """Return half the length of the panels that -reach to reach is cut into, an even number of them."""
    return reach / (2 * max(PANELS // 2, math.ceil(reach * extent / TURNS)))


def _panel_shares(finer: Wave, mean: float, reach: float, half: float) -> Array:
    """Return the probability on each panel of wave numbers from mean - reach to mean + reach, by a Gauss rule of 20 points."""
    t, weight = gauss_legendre(POINTS)
    panels = round(reach / half)
    centres: Array = mean - reach + half * (2 * np.arange(panels, dtype=np.float64) + 1)
    x, w = finer.rule
    phi = plane_sums(x, w * finer.values / math.sqrt(2 * math.pi), centres, half * t)
    shares: Array = (half * weight * np.abs(phi) ** 2).sum(axis=1)
    return shares


def _sampled(finer: Wave, mean: float, window: float, count: int) -> tuple[Array, Array]:
    """Return `count` wave numbers from mean - window to mean + window, evenly apart, and the density there."""
    step = 2 * window / (count - 1)
    columns = math.isqrt(count) + 1
    rows = -(-count // columns)
    x, w = finer.rule
    coarse: Array = mean - window + step * columns * np.arange(rows, dtype=np.float64)
    fine: Array = step * np.arange(columns, dtype=np.float64)
    phi = plane_sums(x, w * finer.values / math.sqrt(2 * math.pi), coarse, fine)
    return np.linspace(mean - window, mean + window, count), np.abs(phi.ravel()[:count]) ** 2
