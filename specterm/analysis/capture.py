"""As many levels as it takes to hold a given share of a prepared state."""

from __future__ import annotations

import math
from collections.abc import Callable
from pathlib import Path

from specterm.analysis.weights import Weights, project
from specterm.errors import PhysicsError
from specterm.model import Model
from specterm.spectrum import Spectrum, solve

FIRST = 16
SLOW = 0.02
"""A doubling of the levels that adds less than this share of what is missing ends the search under a threshold."""
ENOUGH = 128
"""So many levels are computed at least before a share is given up."""
SETTLED = 0.9
"""The rate at which levels add to a state is told from when they held this share of it."""
MOST_LEVELS = 1_000
"""Where it stops; a state with a kink needs this many for about 1 - 1e-8, one that jumps for about 1 - 1e-3."""


def captured_by(
    model: Model,
    state: str,
    share: float,
    folder: Path | None = None,
    *,
    near: float | None = None,
    tolerance: float = 1e-8,
    least: int = 1,
    most: int = MOST_LEVELS,
    should_stop: Callable[[], bool] | None = None,
    progress: Callable[[str], None] | None = None,
) -> tuple[Spectrum, Weights]:
    """Return the fewest levels, doubled from 16 on, that hold at least `share` of a state, and its weights on them.

    Where the bound levels hold less, or `most` do, or twice as many of an endless series under a threshold add next to
    nothing, or the rate of the doublings says that `most` will not do (states that jump), what there is comes back:
    `Weights.captured` says how much.
    """
    if not 0 < share <= 1:
        raise PhysicsError(f"a share of {share:g} makes no sense", mend="give one above 0 and up to 1, such as 0.999")
    count, before = max(FIRST, least), 0.0
    while True:
        spectrum = solve(model, count=count, near=near, tolerance=tolerance, should_stop=should_stop, progress=progress)
        if _has_box(spectrum) and spectrum.bound:
            spectrum = solve(
                model, count=max(spectrum.bound, least), tolerance=tolerance, should_stop=should_stop, progress=progress
            )
        found = project(model, spectrum, state, folder)
        bound_only = spectrum.bound is not None and len(spectrum.levels) >= spectrum.bound
        series = spectrum.threshold is not None and 0 < found.captured - before < SLOW * (1 - found.captured)
        series = series or (count >= ENOUGH and out_of_reach((before, found.captured), share, most / count))
        if found.captured >= share or count >= most or bound_only or series or not spectrum.levels:
            return spectrum, found
        before = found.captured
        count = min(2 * count, most)


def out_of_reach(captured: tuple[float, float], share: float, room: float) -> bool:
    """Say whether a share cannot be had with `room` times the levels, by the rate of the last doubling."""
    missing = (1 - captured[0], 1 - captured[1])
    if captured[0] < SETTLED or missing[1] <= 0:
        return False
    return missing[1] * (missing[1] / missing[0]) ** math.log2(max(room, 1.0)) > 4 * (1 - share)


def _has_box(spectrum: Spectrum) -> bool:
    return any(level.kind == "box" for level in spectrum.levels)
