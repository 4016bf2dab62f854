"""Levels that cannot be told apart, and levels whose derivative means nothing."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from specterm.analysis.prepared import slips
from specterm.arrays import Array
from specterm.discrete.chain import count_below
from specterm.errors import PhysicsError
from specterm.model import Model
from specterm.spectrum import Spectrum, solve
from specterm.spectrum.engine import BLURRED
from specterm.spectrum.fourier import FourierStates
from specterm.spectrum.refine import MIXING
from specterm.spectrum.setting import DEEP
from specterm.spectrum.states import ElementStates

ALONE = "it cannot be told from a level not computed; ask for more levels"
DECAY = 2 * DEEP
"""Powers of e by which |psi|^2 has fallen where an open domain is cut."""
SHARP = 1e-9
"""Counts on a line tell levels apart by this share of them; on a ring only by `BLURRED`."""
RUNGS = 24
"""So many energies are looked at for the nearest level that was not computed."""
CLOSE = 4.0
"""Neighbours closer than so many of their errors count as one group."""


@dataclass(frozen=True)
class Group:
    """Rows of levels that cannot be told apart."""

    rows: tuple[int, ...]


@dataclass(frozen=True)
class Groups:
    """The groups of two levels and more, and why other rows have no derivative."""

    groups: tuple[Group, ...]
    without: dict[int, str]


def groups_of(model: Model, spectrum: Spectrum) -> Groups:
    """Return the groups among the levels of a spectrum, and the levels without a derivative."""
    levels = spectrum.levels
    without = {
        row: "a box level hangs on where the domain was cut" if level.kind == "box" else "its error is not known"
        for row, level in enumerate(levels)
        if level.kind == "box" or level.error is None
    }
    values = np.array([level.value for level in levels])
    errors = np.array([level.error or 0.0 for level in levels])
    gaps = np.abs(np.diff(values))
    tied = [
        bool(gap <= CLOSE * (errors[k] + errors[k + 1])) and not {k, k + 1} & set(without) for k, gap in enumerate(gaps)
    ]
    groups, start = [], 0
    for row in range(len(levels)):
        if row == len(levels) - 1 or not tied[row]:
            if row > start:
                groups.append(Group(tuple(range(start, row + 1))))
            start = row + 1
    without |= dict.fromkeys(_cut_off(model, spectrum, groups), ALONE)
    return Groups(tuple(g for g in groups if not set(g.rows) & set(without)), without)


def _cut_off(model: Model, spectrum: Spectrum, groups: list[Group]) -> list[int]:
    """Return the rows at either end whose group goes on among levels that were not computed."""
    states, levels = spectrum.states, spectrum.levels
    if isinstance(states, FourierStates) and model.domain.is_ring:
        return _cut_wave(model, spectrum, groups)
    if not isinstance(states, ElementStates):
        return []
    values, lost = states.solved.values, []
    blur = BLURRED if model.domain.is_ring else SHARP
    for row, sign in ((0, -1.0), (len(levels) - 1, 1.0)):
        reach = CLOSE * (levels[row].error or 0.0) + blur * max(abs(values[row]), float(states.solved.kinetic[row]))
        if spectrum.threshold is not None:
            reach = min(reach, abs(spectrum.threshold - levels[row].value) / 4)
        looked = values[row] + sign * reach * np.linspace(1, 3, 5)
        below = int(np.median(count_below(states.solved.condensed, looked)))
        number = states.solved.first + row
        if (below > number + 1) if sign > 0 else (below < number):
            lost += _with_partners(row, groups)
    return sorted(set(lost))


def _with_partners(row: int, groups: list[Group]) -> list[int]:
    return next((list(group.rows) for group in groups if row in group.rows), [row])


def _cut_wave(model: Model, spectrum: Spectrum, groups: list[Group]) -> list[int]:
    """Return the same for a basis without a count of its own: one level more is computed, where levels come in pairs."""
    last = len(spectrum.levels) - 1
    try:
        more = solve(model, count=last + 2, tolerance=spectrum.tolerance).levels
    except PhysicsError:
        return _with_partners(last, groups)
    reach = CLOSE * ((more[last].error or 0.0) + (more[last + 1].error or 0.0))
    return _with_partners(last, groups) if abs(more[last + 1].value - more[last].value) <= reach else []


@dataclass(frozen=True)
class Doubts:
    """What is doubted of each state, both (levels,).

    `mixed`: a bound on what it holds of others, in norm; within a group, of levels outside it. What no function of the basis
    can hold is not in it: `Carried.left_out` looks at that. `cut`: by what share of its terms a derivative can be off because
    an open domain was cut: the level's own error beside its depth under the threshold, times the decay to the cut.
    """

    mixed: Array
    cut: Array


def doubts_of(spectrum: Spectrum, groups: Groups) -> Doubts:
    """Return what is doubted of the states of a spectrum."""
    cut = np.zeros(len(spectrum.levels))
    if spectrum.threshold is not None:
        errors = np.array([level.error or 0.0 for level in spectrum.levels])
        depths = np.abs(spectrum.threshold - np.array([level.value for level in spectrum.levels]))
        cut = DECAY * errors / np.maximum(depths, np.finfo(float).tiny)
    return Doubts(_mixed(spectrum, groups), cut)


def _mixed(spectrum: Spectrum, groups: Groups) -> Array:
    """Return a bound on what each state holds of others, in norm."""
    off, states = np.array(slips(spectrum), dtype=float), spectrum.states
    if not isinstance(states, ElementStates):
        return off
    values = states.solved.values
    beyond = _beyond(states)
    rows = [group.rows for group in groups.groups]
    rows += [(row,) for row in range(len(values)) if not any(row in one for one in rows)]
    for some in rows:
        outside = np.delete(values, list(some))
        for row in some:
            size = abs(values[row]) + abs(states.solved.kinetic[row])
            seen = float(np.abs(outside - values[row]).min(initial=size))
            gap = float(np.abs(beyond - values[row]).min(initial=seen))
            if gap > 0:
                off[row] = min(off[row] * seen / gap, MIXING * (spectrum.levels[row].error or 0.0) / gap)
    return off


def _beyond(states: ElementStates) -> Array:
    """Return energies nearer to the levels than any level of the mesh that was not computed, below (if any) and above them."""
    solved = states.solved
    found = []
    for row, sign, count in ((0, -1.0, solved.first), (-1, 1.0, solved.first + len(solved.values))):
        if sign > 0 or count > 0:
            size = abs(float(solved.values[row])) + abs(float(solved.kinetic[row]))
            rungs = float(solved.values[row]) + sign * size * np.geomspace(BLURRED, 1.0, RUNGS)
            free = count_below(solved.condensed, rungs) == count
            found.append(rungs[max(int(np.argmin(free)) - 1, 0)] if not free.all() else rungs[-1])
    return np.array(found)
