"""The search for the least sum of squares: steps of bounded length, told as they are made."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from specterm.analysis.fit_levels import Levels
from specterm.analysis.observed import Observation
from specterm.arrays import Array, Flags
from specterm.errors import PhysicsError, SheetError

TOLERANCE = 1e-11
"""Relative change of chi-square, and of the numbers, at which a fit ends."""
MOST_STEPS = 60
"""So many times at most the levels are computed for new numbers."""
FARTHEST = 0.5
"""A step changes no number by more than this share of itself (of what brings it straight to the lines where it starts at 0)."""
HARDLY = 3.0
"""A number that the straight way to the lines changes by more than this many times itself is told."""
WANDERS, GAINS, IDLE = 0.1, 0.02, 4
"""A number that so many steps running changes by this share of itself while chi-square falls by less than that wanders off."""

Bounds = Mapping[str, tuple[float, float]]
"""The numbers to vary, with their least and largest values, which may be infinite."""


@dataclass(frozen=True)
class Minimum:
    """Where the sum of squares is least, which numbers are at a bound, and how the search went."""

    values: Array
    held: Flags
    converged: bool
    steps: int
    notes: tuple[str, ...]


class _EndedError(Exception):
    """The search is given up: the levels have been computed often enough, or a number wanders off."""


class _Search:
    """The lines less what is computed for them, and derivatives, at any values of the numbers."""

    def __init__(self, levels: Levels, lines: Sequence[Observation], weights: Array, start: Array) -> None:
        self._levels, self._lines, self._weights = levels, lines, weights
        self._observed = np.array([line.value for line in lines])
        self._least = np.array([levels.written[name].size for name in levels.names])
        self._scaled = start != 0
        self._tell: Callable[[str], None] = levels.solver.progress or (lambda _: None)
        self.best, self.chi2, self.solves = start, np.inf, 0
        self.notes: tuple[str, ...] = ()
        self._first: Array | None = None
        self._idle = np.zeros(len(start), dtype=int)
        self._before: tuple[Array, float] | None = None

    def room(self, values: Array) -> Array:
        """Return how far each number may go in one step."""
        size: Array = FARTHEST * np.maximum(np.abs(values), self._least)
        return size

    def misfit(self, values: Array) -> Array:
        """Return the weighted differences; nan, which makes the step shorter, where it is too long or a level is lost."""
        lost = np.full(len(self._lines), np.nan)
        if self.solves and (np.abs(values - self.best) > self.room(self.best)).any():
            return lost
        if self.solves >= MOST_STEPS:
            raise _EndedError
        self.solves += 1
        self._levels.move(values.tolist())
        try:
            found: Array = (self._levels.computed(self._lines)[0] - self._observed) * self._weights
        except (PhysicsError, SheetError):
            return lost
        chi2 = float((found**2).sum())
        if chi2 < self.chi2:
            self.chi2, self.best = chi2, np.array(values)
        if self.solves == 1:
            self._first = found
        self._tell(f"step {self.solves}: chi-square {self.chi2:.6g}")
        return found

    def slopes(self, values: Array) -> Array:
        """Return the weighted derivatives where a step has ended; the first ones tell which numbers the lines hardly tell."""
        self._watch(values)
        self._levels.move(values.tolist())
        found: Array = self._levels.jacobian(self._lines) * self._weights[:, None]
        if self._first is not None:
            self.notes, self._first = self._hardly_told(values, found, self._first), None
            for note in self.notes:
                self._tell(note)
        return found

    def _watch(self, values: Array) -> None:
        """End the search where a number has changed much in several steps that gained little."""
        before, self._before = self._before, (np.array(values), self.chi2)
        if before is None:
            return
        moved = np.abs(values - before[0]) > WANDERS * np.maximum(np.abs(values), self._least)
        self._idle = np.where(moved & (self.chi2 > (1 - GAINS) * before[1]), self._idle + 1, 0)
        lost = [name for name, steps in zip(self._levels.names, self._idle, strict=True) if steps >= IDLE]
        if lost:
            idle = "changes on and on and the lines gain hardly anything: start nearer, bound it, or hold it"
            self.notes += tuple(f"`{name}` {idle}" for name in lost)
            raise _EndedError

    def _hardly_told(self, values: Array, slopes: Array, misfit: Array) -> tuple[str, ...]:
        """Return the numbers that a step straight to the lines would change many times over."""
        length = np.sqrt((slopes**2).sum(axis=0))
        length[length == 0] = 1.0
        step = np.linalg.lstsq(slopes / length, misfit, rcond=None)[0] / length
        self._least = np.where(self._scaled, self._least, np.maximum(self._least, np.abs(step)))
        far = np.abs(step) > HARDLY * np.maximum(np.abs(values), self._least)
        return tuple(
            f"the lines hardly tell `{name}`, or its start is far off: straight to the lines it would change by {-change:.3g}"
            for name, change, told in zip(self._levels.names, step, far, strict=True)
            if told
        )


def minimum(levels: Levels, lines: Sequence[Observation], weights: Array, vary: Bounds, starts: Array) -> Minimum:
    """Return where the sum of squares is least, from `starts` on; a step to where a level is lost counts as too long."""
    from scipy.optimize import least_squares  # noqa: PLC0415 - heavy

    levels.computed(lines)
    low, high = np.array(list(vary.values())).T
    inside = np.clip(starts, np.nextafter(low, np.inf), np.nextafter(high, -np.inf))
    search = _Search(levels, lines, weights, inside)
    try:
        done = least_squares(
            search.misfit, inside, jac=search.slopes, bounds=(low, high), x_scale="jac", ftol=TOLERANCE, xtol=TOLERANCE,
            gtol=1e-15, max_nfev=10 * MOST_STEPS,
        )  # fmt: skip
    except _EndedError:
        return Minimum(search.best, np.zeros(len(starts), dtype=bool), False, search.solves, search.notes)
    settled = bool(done.status > 0)
    return Minimum(np.asarray(done.x), np.asarray(done.active_mask) != 0, settled, search.solves, search.notes)
