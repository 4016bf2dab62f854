"""Lines without quantum numbers matched to the nearest transitions, one line to each."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from specterm.analysis.fit_levels import Levels
from specterm.analysis.observed import End, Observation, Settings
from specterm.errors import PhysicsError


@dataclass(frozen=True)
class Match:
    """A line as matched, what was computed for it, and how far off the next transition would have been (inf for none)."""

    line: Observation
    computed: float
    next_off: float


@dataclass(frozen=True)
class _Candidate:
    lower: End | None
    upper: End
    value: float


def assign(levels: Levels, lines: Sequence[Observation]) -> tuple[list[Observation], list[Match]]:
    """Return all lines with their quantum numbers, and the matches made, at the values the levels stand at.

    Together the matches have the least sum of distances; no transition is taken twice. PhysicsError where a line has none.
    """
    from scipy.optimize import linear_sum_assignment  # noqa: PLC0415 - only lines without numbers need it

    open_lines = [k for k, line in enumerate(lines) if not line.assigned]
    taken = {(line.lower, line.upper) for line in lines if line.assigned}
    choices = {k: [c for c in _candidates(levels, lines[k]) if (c.lower, c.upper) not in taken] for k in open_lines}
    every = list(dict.fromkeys((c.lower, c.upper) for some in choices.values() for c in some))
    columns = {pair: n for n, pair in enumerate(every)}
    far = 1e3 * max((abs(c.value - lines[k].value) for k, some in choices.items() for c in some), default=1.0) + 1.0
    costs = np.full((len(open_lines), max(len(every), len(open_lines))), far)
    for row, k in enumerate(open_lines):
        for choice in choices[k]:
            costs[row, columns[choice.lower, choice.upper]] = abs(choice.value - lines[k].value)
    done, matches = list(lines), []
    for row, column in zip(*linear_sum_assignment(costs), strict=True):
        k = open_lines[row]
        if costs[row, column] >= far:
            raise PhysicsError(
                f"no transition is left for line {lines[k].row} of the file", mend="compute more levels with -n, or drop it"
            )
        lower, upper = every[column]
        done[k] = replace(lines[k], lower=lower, upper=upper)
        value = next(c.value for c in choices[k] if (c.lower, c.upper) == (lower, upper))
        others = [abs(c.value - lines[k].value) for c in choices[k] if (c.lower, c.upper) != (lower, upper)]
        matches.append(Match(done[k], value, min(others, default=np.inf)))
    return done, matches


def _candidates(levels: Levels, line: Observation) -> list[_Candidate]:
    """Return the transitions that a line may be; those upwards where both levels are open."""
    uppers = _ends(levels, line.upper)
    if line.lower is None:
        return [_Candidate(None, end, value) for end, value in uppers]
    both_open = line.lower.level is None and line.upper.level is None
    return [
        _Candidate(low, high, up - down)
        for low, down in _ends(levels, line.lower)
        for high, up in uppers
        if (low != high) and not (both_open and (up - down) * line.value <= 0)
    ]


def _ends(levels: Levels, end: End) -> list[tuple[End, float]]:
    """Return the levels an end may be, with their values."""
    settings: Settings = end.settings
    _, spectrum = levels.spectrum(settings)
    return [
        (End(level.index, settings), level.value)
        for level in spectrum.levels
        if level.kind != "box" and end.level in (None, level.index)
    ]
