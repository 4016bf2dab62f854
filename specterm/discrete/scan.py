"""A first look at K and V: values on a sample that covers every scale, and semiclassical estimates from it."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from specterm.arrays import Array, Flags
from specterm.discrete.ends import room_at
from specterm.discrete.problem import Problem
from specterm.errors import PhysicsError

OCTAVES = 133
"""Octaves covered above and below the unit of length around each centre of an open domain (1e-40 to 1e40)."""


@dataclass(frozen=True)
class Scan:
    """Ascending places x inside the domain with K and V there, shapes (n,); V is +inf where it overflows."""

    x: Array
    stiffness: Array
    potential: Array

    def wave_number(self, energy: float) -> Array:
        """Return sqrt((E - V) / K) where that is real, else 0."""
        with np.errstate(all="ignore"):
            return np.sqrt(np.maximum(energy - self.potential, 0) / self.stiffness)

    def decay(self, energy: float) -> Array:
        """Return sqrt((V - E) / K) where that is real, else 0."""
        with np.errstate(all="ignore"):
            return np.sqrt(np.maximum(self.potential - energy, 0) / self.stiffness)


def scan(problem: Problem) -> Scan:
    """Sample K and V; raise PhysicsError where K is not positive or V is not a number."""
    x = _with_minima(problem, _places(problem))
    with np.errstate(all="ignore"):
        stiffness, potential = problem.stiffness(x), problem.potential(x)
    lost = np.isnan(potential)
    lone = lost & ~np.append(lost[1:], False) & ~np.append(False, lost[:-1])
    x, stiffness, potential = x[~lone], stiffness[~lone], potential[~lone]
    good = _trusted(x, stiffness, potential, problem)
    x, stiffness, potential = x[good], stiffness[good], potential[good]
    if len(x) < 2:
        raise PhysicsError(
            "there is hardly a place in the domain where the operator has a value",
            mend="move the domain, or choose units that make lengths nearer to 1",
        )
    _refuse_poles(problem, x, potential)
    if np.isnan(potential).any():
        place = x[np.flatnonzero(np.isnan(potential))[0]]
        raise PhysicsError(
            f"the potential is not a number at {place:.6g}", mend="narrow the domain or mend the expression there"
        )
    if np.isnan(stiffness).any() or (stiffness <= 0).any():
        place = x[np.flatnonzero(~(stiffness > 0))[0]]
        raise PhysicsError(
            f"the coefficient between the two momenta is not of one sign: it vanishes or changes sign near {place:.6g}",
            mend="it must be positive all over the domain (zero only at an end)",
        )
    return Scan(x, stiffness, potential)


def _refuse_poles(problem: Problem, x: Array, potential: Array) -> None:
    """Raise PhysicsError where |V| has a sharp maximum inside the sample that grows without end when looked at closer."""
    size = np.where(np.isfinite(potential), np.abs(potential), 0.0)
    peaks = np.flatnonzero((size[1:-1] > size[:-2]) & (size[1:-1] > size[2:]) & (size[1:-1] > 30 * np.median(size))) + 1
    for side, end in ((0, problem.left), (1, problem.right)):
        if np.isfinite(end):
            peaks = peaks[np.abs(x[peaks] - end) > 1e-10 * room_at(problem, end, side)]
    peaks = peaks[np.argsort(-size[peaks])][:24]
    if len(peaks) == 0:
        return
    left, right = x[peaks - 1], x[peaks + 1]
    spans = right - left
    with np.errstate(all="ignore"):
        for _ in range(24):
            places = left[:, None] + (right - left)[:, None] * np.arange(9) / 8
            values = np.nan_to_num(np.abs(problem.potential(places.ravel()).reshape(places.shape)), posinf=1e300)
            best = np.clip(np.argmax(values, axis=1), 1, 7)
            rows = np.arange(len(peaks))
            left, right = places[rows, best - 1], places[rows, best + 1]
        centre = (left + right) / 2
        steps = np.maximum(spans, 1e-4 * np.abs(centre))[:, None] * 10.0 ** -np.arange(1, 7)
        both = [np.abs(problem.potential((centre[:, None] + side * steps).ravel()).reshape(steps.shape)) for side in (-1, 1)]
        growth = [np.diff(np.log10(values), axis=1)[:, -3:] for values in both]
    poles = np.any([np.isfinite(rise).all(axis=1) & (rise > 0.7).all(axis=1) for rise in growth], axis=0)
    if poles.any():
        place = float(centre[poles][0])
        raise PhysicsError(
            f"the potential is singular near {place:.9g}, inside the domain",
            mend="end the domain there: the two sides do not mix",
        )


def _trusted(x: Array, stiffness: Array, potential: Array, problem: Problem) -> Flags:
    """Leave out the outermost places where only overflow makes K or V useless: far out on an open side, or at a steep end."""
    bad = ~(np.isfinite(stiffness) & (stiffness > 0)) | np.isnan(potential) | np.isinf(potential)
    good = np.ones(len(x), dtype=bool)
    if not bad.any() or bad.all():
        return good
    first, last = int(np.argmin(bad)), len(bad) - 1 - int(np.argmin(bad[::-1]))
    middle = float(np.median(np.concatenate([problem.centres, problem.edges, [0.0]])))
    for end, inner, outer in ((problem.left_end, first, slice(0, first)), (problem.right_end, last, slice(last + 1, None))):
        far = end == "open" and abs(x[inner] - middle) > 1e6 * max(1.0, abs(middle))
        if far or potential[inner] > 1e100 or stiffness[inner] < 1e-290:
            good[outer] = False
    return good


def _with_minima(problem: Problem, x: Array) -> Array:
    """Return the sample with places on every smaller scale around its deepest minima, which may lie at no natural centre."""
    with np.errstate(all="ignore"):
        potential = problem.potential(x)
    potential = np.where(np.isfinite(potential), potential, np.inf)
    lows = np.flatnonzero((potential[1:-1] < potential[:-2]) & (potential[1:-1] < potential[2:])) + 1
    marks = np.concatenate([problem.centres, problem.edges, [0.0]])
    lows = lows[~np.isin(x[lows], marks)]
    lows = lows[np.argsort(potential[lows])][:8]
    if len(lows) == 0:
        return x
    left, right = x[lows - 1], x[lows + 1]
    span = right - left
    rows = np.arange(len(lows))
    with np.errstate(all="ignore"):
        for _ in range(12):
            places = left[:, None] + (right - left)[:, None] * np.arange(9) / 8
            values = problem.potential(places.ravel()).reshape(places.shape)
            best = np.clip(np.argmin(values, axis=1), 1, 7)
            left, right = places[rows, best - 1], places[rows, best + 1]
    steps = span[:, None] * np.exp2(-np.arange(1, 36, 0.5))
    near = ((left + right)[:, None] / 2 + np.concatenate([-steps, steps], axis=1)).ravel()
    return np.unique(np.concatenate([x, (left + right) / 2, near]))


def _places(problem: Problem) -> Array:
    """Return the sample: even between neighbouring marks, and geometric around every mark."""
    finite = [end for end in (problem.left, problem.right) if np.isfinite(end)]
    marks = np.unique(np.concatenate([problem.edges[:400], problem.centres[:60], finite]))
    inside = problem.left <= 0 <= problem.right
    marks = np.unique(np.append(marks, 0.0)) if inside and not np.isfinite(problem.right - problem.left) else marks
    pieces = [marks]
    if np.isfinite(problem.right - problem.left):
        pieces.append(np.linspace(problem.left, problem.right, 257))
    if len(marks) > 1:
        per = int(np.clip(1024 // len(marks), 4, 64))
        pieces.append((marks[:-1, None] + np.diff(marks)[:, None] * (np.arange(per) + 0.5) / per).ravel())
    pieces += [_around(mark, problem, len(marks)) for mark in marks[:: max(1, len(marks) // 40)]]
    x = np.unique(np.concatenate(pieces))
    return x[(x > problem.left) & (x < problem.right)]


def _around(mark: float, problem: Problem, marks: int) -> Array:
    """Return places at geometric distances on both sides of a mark."""
    span = problem.right - problem.left
    top = np.log2(span) if np.isfinite(span) else float(OCTAVES)
    bottom = max(-float(OCTAVES), np.log2(abs(mark)) - 46 if mark else -np.inf, top - 60 if np.isfinite(span) else -np.inf)
    density = 4 if marks <= 8 else 2
    distances = np.exp2(np.arange(bottom, top, 1 / density))
    return np.concatenate([mark - distances, mark + distances])


def semiclassical_count(look: Scan, energies: Array, extra: Array) -> Array:
    """Return the phase integral over pi at each energy; `extra` (n,) is added to V (the Langer term at singular ends)."""
    with np.errstate(all="ignore"):
        level = look.potential + extra
        k = np.sqrt(np.maximum(energies[:, None] - level, 0) / look.stiffness)
    k[~np.isfinite(k)] = 0
    count: Array = ((k[:, 1:] + k[:, :-1]) / 2 * np.diff(look.x)).sum(axis=1) / np.pi
    return count


def energy_for(look: Scan, count: float, extra: Array, floor: float, ceiling: float) -> float:
    """Return an energy in (floor, ceiling] below which the phase integral promises `count` levels.

    `ceiling` may be inf. Where even the ceiling does not reach the count, the ceiling is returned.
    """
    if np.isfinite(ceiling):
        if semiclassical_count(look, np.array([ceiling]), extra)[0] <= count:
            return ceiling
        low, high = floor, ceiling
    else:
        low, high = _bracket(look, count, extra, floor)
    with np.errstate(all="ignore"):
        allowed = np.flatnonzero(look.potential + extra < high)
    part = slice(max(0, int(allowed[0]) - 1), int(allowed[-1]) + 2)
    look, extra = Scan(look.x[part], look.stiffness[part], look.potential[part]), extra[part]
    over = math.inf
    while over > max(0.5, 0.03 * count) and high - low > 8 * np.spacing(max(abs(high), abs(high - floor))):
        rungs = np.linspace(low, high, 10)
        counts = semiclassical_count(look, rungs, extra)
        first = max(1, int(np.argmax(counts > count))) if (counts > count).any() else len(rungs) - 1
        low, high, over = float(rungs[first - 1]), float(rungs[first]), float(counts[first]) - count
    return high


def _bracket(look: Scan, count: float, extra: Array, floor: float) -> tuple[float, float]:
    """Return two energies, a factor of four apart from the floor, between which the phase integral passes the count."""
    step = _first_step(look, floor)
    for _ in range(80):
        rungs = np.asarray(floor + step * 4.0 ** np.arange(12), dtype=np.float64)
        reached = semiclassical_count(look, rungs, extra) > count
        if reached.any():
            first = int(np.argmax(reached))
            return (float(rungs[first - 1]) if first else floor), float(rungs[first])
        step *= 4.0**12
    raise PhysicsError("the operator seems to have no such level: the phase integral stays finite at all energies")


def _first_step(look: Scan, floor: float) -> float:
    """Return an energy small against the lowest level's: that of a packet as wide as its distance from the deepest place."""
    deepest = look.x[int(np.argmin(np.where(np.isfinite(look.potential), look.potential, np.inf)))]
    width = np.maximum(np.abs(look.x - deepest), (look.x[-1] - look.x[0]) * 1e-18)
    with np.errstate(all="ignore"):
        packet = look.stiffness / width**2 + np.maximum(look.potential - floor, 0)
    if np.isnan(packet).all():
        raise PhysicsError("energies on this domain are out of the range of numbers", mend="choose units nearer to the problem")
    return max(float(np.nanmin(packet)) / 64, np.finfo(float).tiny * 1e20)
