"""A first guess from the spectrum of a nearby operator: its mesh, and brackets around where its levels have gone."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

import numpy as np

from specterm.arrays import Counts
from specterm.discrete.chain import count_below
from specterm.discrete.elements import Condensed
from specterm.discrete.ends import FarEnd, NearEnd
from specterm.discrete.mesh import Edge, Mesh
from specterm.discrete.meshing import resolve
from specterm.spectrum.isolate import Group
from specterm.spectrum.result import Spectrum
from specterm.spectrum.setting import Setting
from specterm.spectrum.states import ElementStates
from specterm.spectrum.vectors import Solved, quotients

APART = 1e-5
"""Levels nearer to each other than this share of theirs are left to counting from afar."""
ABOVE = 1.5
"""So many spacings above the last level the mesh must hold."""
REACH = 0.25
"""How far a level may be from where it is guessed, as a share of the distance to the next guess."""


@dataclass(frozen=True)
class Start:
    """A mesh fit for the problem, an energy above the levels asked for, and the levels of the nearby operator on the mesh."""

    mesh: Mesh
    energy: float
    before: Solved


def start_from(ready: Setting, like: Spectrum, first: int, last: int) -> Start | None:
    """Return what the spectrum of a nearby operator gives to begin with, or None where it does not fit the problem.

    The problem must have the same kind of ends at the same places and no jump inside an element; elements that do not resolve
    the coefficients are split, as those of a mesh made anew are.
    """
    if not isinstance(like.states, ElementStates):
        return None
    before, problem = like.states.solved, ready.problem
    mesh = before.condensed.mesh
    if before.first != first or len(before.values) != last - first + 1 or len(before.values) < 2:
        return None
    for side, place, edge in ((0, mesh.places[0], mesh.left), (1, mesh.places[-1], mesh.right)):
        if not _same_end(ready, side, float(place), edge):
            return None
    inner = problem.edges[(problem.edges > mesh.places[0]) & (problem.edges < mesh.places[-1])]
    if not np.isin(inner, mesh.places).all() or (problem.phase is None) != (mesh.phase is None):
        return None
    values = problem.sign * like.values
    step = float(max(values[-1] - values[-2], (values[-1] - values[0]) / (len(values) - 1)))
    energy = float(values[-1]) + ABOVE * step
    if energy >= ready.threshold or step <= APART * abs(energy - ready.floor):
        return None
    mesh = resolve(replace(mesh, phase=problem.phase), ready.coefficients, energy - ready.floor, ready.look)
    return Start(mesh, energy, before)


def _same_end(ready: Setting, side: int, place: float, edge: Edge) -> bool:
    """Say whether one end of the mesh is what this problem wants there; where an open end is cut is judged later."""
    end = ready.ends[side]
    true_place = ready.problem.left if side == 0 else ready.problem.right
    if isinstance(end, FarEnd) or (isinstance(end, NearEnd) and end.kind == "steep"):
        return edge == Edge(True) and place != true_place
    if isinstance(end, NearEnd):
        power = end.power if end.kind == "power" else None
        return place == true_place and edge == Edge(end.kind == "wall", power, end.alpha)
    return place == true_place and edge == Edge(False)


def brackets(start: Start, condensed: Condensed) -> list[Group] | None:
    """Return brackets with one level in each, from the means of the operator in the old states; None where counts disagree.

    The mean is off by the square of the change of the state. The first and the last count say that no level is left out.
    """
    before, mesh = start.before, condensed.mesh
    if mesh.phase is not None or len(mesh.places) != len(before.condensed.mesh.places):
        return None
    guess = quotients(condensed, before.coefficients)[0]
    steps = np.diff(guess)
    if not np.isfinite(guess).all() or (steps <= APART * np.abs(guess).max()).any():
        return None
    room = REACH * np.minimum(np.append(steps, math.inf), np.append(math.inf, steps))
    low, high = guess - room, guess + room
    numbers = before.first + np.arange(len(guess))
    counts: Counts = count_below(condensed, np.concatenate([low, high]))
    if (counts != np.concatenate([numbers, numbers + 1])).any():
        return None
    return [Group(int(n), 1, float(a), float(b)) for n, a, b in zip(numbers, low, high, strict=True)]
