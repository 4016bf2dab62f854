"""Which part of the plane a figure shows: the places where the states live, the energies around the levels."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]
Window = tuple[float, float]
_TAIL = 5e-4
_WIDEST = 5.0
_PEAKS = 8
_NEIGHBOURS = 6
_AT_ONCE = 100_000


def extents(density: Callable[[Floats], Floats], left: float, right: float) -> Floats:
    """Return for every state the interval that holds all but 0.1 % of it, shape (levels, 2); NaN where it cannot be told.

    `density` maps places (n,) to |psi|^2, shape (levels, n). The places reach over many scales around zero, both ends and the
    highest points of the states (8 of them at most), so that a state far smaller than the domain computed on is found.
    """
    if not (np.isfinite(left) and np.isfinite(right) and left < right):
        return np.full((len(density(np.array([0.0]))), 2), np.nan)
    first = _places(left, right, np.array([left, right, 0.0, (left + right) / 2]))
    peaks = np.unique(first[_highest(density, first)])
    if len(peaks) > _PEAKS:
        peaks = peaks[np.linspace(0, len(peaks) - 1, _PEAKS).astype(int)]
    places = np.union1d(first, _places(left, right, peaks))
    return np.array([_holding(places, row) for row in np.nan_to_num(_in_pieces(density, places), posinf=0.0)]).reshape(-1, 2)


def _highest(density: Callable[[Floats], Floats], places: Floats) -> NDArray[np.intp]:
    """Return for each state the number of the place where it is highest."""
    return np.argmax(np.nan_to_num(_in_pieces(density, places)), axis=1)


def _in_pieces(density: Callable[[Floats], Floats], places: Floats) -> Floats:
    """Return the density at many places, some at a time: with a thousand levels all at once would take hundreds of MB."""
    start = density(places[:1])
    piece = max(8, _AT_ONCE // max(1, len(start)))
    return np.concatenate([density(places[first : first + piece]) for first in range(0, len(places), piece)], axis=1)


def _places(left: float, right: float, centres: Floats) -> Floats:
    """Return places in [left, right]: evenly spread ones, and some around every centre on all scales."""
    length = right - left
    reach = length * np.logspace(-12, 0, 97)
    around = (np.unique(centres)[:, None] + np.concatenate((-reach, [0.0], reach))).ravel()
    places = np.union1d(np.linspace(left, right, 401), around)
    return places[(places >= left) & (places <= right)]


def _holding(places: Floats, density: Floats) -> Window:
    """Return the interval between the tails of one density sampled at `places`."""
    steps = np.diff(places) * (density[1:] + density[:-1]) / 2
    total = float(np.sum(steps))
    if not np.isfinite(total) or total <= 0:
        return (np.nan, np.nan)
    held = np.concatenate(([0.0], np.cumsum(steps))) / total
    first = int(np.searchsorted(held, _TAIL, side="right")) - 1
    last = int(np.searchsorted(held, 1 - _TAIL, side="left"))
    return (float(places[max(first, 0)]), float(places[min(last, len(places) - 1)]))


def x_window(
    found: Floats, chosen: int | None, left: float, right: float, closed: tuple[bool, bool], *, whole: bool = False
) -> Window:
    """Return the places to show: where the states of `found` (levels, 2) live, at most 5 times the chosen one's own interval.

    `closed` says which ends are walls or a ring's seam; an end is shown when it is near, and the whole domain when `whole`
    is true or nothing is known of the states.
    """
    known = found[np.isfinite(found).all(axis=1)]
    if whole or not len(known):
        return _spread(left, right)
    low, high = float(known[:, 0].min()), float(known[:, 1].max())
    if chosen is not None and chosen < len(found) and np.isfinite(found[chosen]).all():
        start, stop = (float(end) for end in found[chosen])
        if high - low > _WIDEST * (stop - start) > 0:
            middle, half = (start + stop) / 2, _WIDEST / 2 * (stop - start)
            low, high = max(low, middle - half), min(high, middle + half)
    margin = 0.06 * (high - low)
    near = 0.35 * (high - low)
    low = left - margin / 3 if closed[0] and low - left < near else max(left, low - margin)
    high = right + margin / 3 if closed[1] and right - high < near else min(right, high + margin)
    return _spread(low, high)


def energy_window(values: Floats, potential: Floats, threshold: float | None, *, from_top: bool = False) -> Window:
    """Return the energies to show: from the potential's lowest point to a little above the highest level, both in one unit.

    `values` (levels,) and `potential` (n,) may hold NaN and infinities. A bottom without end is cut below the lowest level; the
    potential's highest point and the threshold are taken in when they are near.
    """
    if from_top:
        low, high = energy_window(-values, -potential, None if threshold is None else -threshold)
        return (-high, -low)
    levels = values[np.isfinite(values)]
    ground = potential[np.isfinite(potential)]
    if not len(levels):
        return _bare_window(ground)
    lowest, highest = float(levels.min()), float(levels.max())
    floor = min(_floor(ground, lowest, highest), lowest)
    room = highest - floor
    if not room > 1e-13 * max(abs(highest), abs(floor)):
        room = float(np.ptp(ground)) / 2 if len(ground) and np.ptp(ground) > 0 else max(abs(highest), 1.0)
    top = highest + 0.2 * room
    for edge in (float(ground.max()) if len(ground) else top, top if threshold is None else threshold):
        if top < edge <= highest + 0.6 * room:
            top = edge + 0.05 * room
    return _spread(floor - 0.05 * room, top)


def zoomed(values: Floats, chosen: float, whole: Window) -> Window:
    """Return the part of an energy window around the chosen value that holds its neighbours, where that is far narrower.

    Levels that crowd, as those below a threshold do, are told apart only so; a window less than three times as wide as that
    part is kept whole.
    """
    distances = np.sort(np.abs(values[np.isfinite(values)] - chosen))
    if not np.isfinite(chosen) or len(distances) <= _NEIGHBOURS:
        return whole
    half = 1.5 * float(distances[_NEIGHBOURS])
    below, above = min(half, chosen - values[np.isfinite(values)].min()), min(half, values[np.isfinite(values)].max() - chosen)
    margin = 0.12 * (below + above)
    low, high = max(whole[0], chosen - below - margin), min(whole[1], chosen + above + margin)
    if not half > 1e-12 * abs(chosen) or 3 * (high - low) > whole[1] - whole[0]:
        return whole
    return low, high


def _floor(ground: Floats, lowest: float, highest: float) -> float:
    """Return the potential's lowest point, or a place below the lowest level where that point is a narrow spike."""
    if not len(ground):
        return lowest
    floor, usual = float(ground.min()), float(np.quantile(ground, 0.05))
    spread = highest - lowest
    if floor < lowest - 2 * spread and usual - floor > 0.5 * (highest - floor):
        return max(floor, min(usual, lowest - 0.6 * spread))
    return floor


def _bare_window(ground: Floats) -> Window:
    """Return the energies to show when there is no level: most of the potential."""
    if not len(ground):
        return (0.0, 1.0)
    low, high = (float(value) for value in np.quantile(ground, (0.02, 0.98)))
    return _spread(low - 0.05 * (high - low), high + 0.05 * (high - low))


def _spread(low: float, high: float) -> Window:
    """Return two finite ends that differ."""
    if not (np.isfinite(low) and np.isfinite(high)):
        return (0.0, 1.0)
    if high - low > 4e-16 * max(abs(low), abs(high)):
        return (low, high)
    half = max(abs(low) * 1e-12, 1e-300) if low else 1.0
    return (low - half, high + half)
