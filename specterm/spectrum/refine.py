"""Solve, estimate, refine: until every level asked for meets the tolerance or nothing more can be gained."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from specterm.arrays import Array, Flags
from specterm.discrete.chain import count_below
from specterm.discrete.elements import Condensed, condense, gentlest, grid
from specterm.discrete.ends import FarEnd
from specterm.discrete.memory import refuse_above
from specterm.discrete.mesh import Mesh
from specterm.discrete.meshing import MOST_ELEMENTS, Span, build, graded, resolve
from specterm.errors import PhysicsError, WorkStopped
from specterm.spectrum.accuracy import SAFETY, Accuracy, accuracy
from specterm.spectrum.isolate import Group, Ruler
from specterm.spectrum.setting import DEEP, Setting, span_at
from specterm.spectrum.start import Start, brackets
from specterm.spectrum.vectors import Solved, solve_levels

OVERSHOOT = 1e-3
"""Levels are refined to this share of the tolerance: it costs little, and the error left is mostly rounding."""
ROUNDS = 14
MIXING = 30.0
"""Rounding of the vertex matrix, which mixes neighbours, over that of the Rayleigh quotients; twice the largest seen."""
BOLD = 0.01
"""Elements are split that hold more than this share of their part of the error wanted: few rounds rather than few elements."""
NEARER = 4.0 ** -np.arange(12)
"""Shares of a distance at which neighbours that were not computed are looked for."""
LARGE = 20_000
"""From so many elements on, memory is asked for before a mesh is condensed."""


@dataclass(frozen=True)
class Request:
    """Levels number `first` ... `last`, to `tolerance` times their distance to the floor."""

    first: int
    last: int
    tolerance: float
    should_stop: Callable[[], bool]
    progress: Callable[[str], None]

    def check(self) -> None:
        """Raise WorkStopped when the work is to stop."""
        if self.should_stop():
            raise WorkStopped("stopped")


@dataclass(frozen=True)
class Refined:
    """Levels on the final mesh with their errors (levels,), the errors of their states in norm (levels,), and the span."""

    solved: Solved
    error: Array
    vector_error: Array
    span: Span


def refine(
    ready: Setting, request: Request, energy: float, span: Span | None, start: Start | None = None
) -> Refined:
    """Return the levels asked for, with errors; `energy` is a guess above them, `span` is given where the box is fixed.

    `start` is where to begin instead of a mesh made for the energy.
    """
    fixed = span is not None
    actions = (DEEP, DEEP)
    groups = None
    known = None if start is None else _begun(ready, request, start)
    if known is None:
        energy, span, condensed = first_mesh(ready, request, energy, span)
    else:
        energy, span, condensed, groups = known
    levels = request.last - request.first + 1
    refuse_above(8.0 * len(condensed.poles) * (60 * levels + 3000), f"computing {levels} levels")
    high = energy - ready.floor
    last: tuple[Solved, Accuracy, Span] | None = None
    ruler = Ruler(0.0, ready.threshold - ready.floor if not fixed else np.inf)
    for number in range(ROUNDS):
        _report(request, number, condensed)
        low = _low(condensed, request.first, high) if groups is None else groups[0].low
        try:
            solved = solve_levels(condensed, request.first, request.last, low, high, ruler, request.check, groups)
        except np.linalg.LinAlgError:
            if last is None:
                raise PhysicsError(
                    "the levels asked for cannot be told apart in double precision", mend="ask for fewer levels"
                ) from None
            return _refined(*last)
        found = accuracy(ready, solved, request.check)
        target = _targets(solved, request.tolerance, found)
        coarse = _coarse(found, target, condensed)
        wider, actions = (None, actions) if fixed else _wider(ready, found, target, solved, span, actions)
        last = (solved, found, span)
        if (not coarse.any() and wider is None) or number == ROUNDS - 1:
            return _refined(*last)
        mesh = condensed.mesh.split(coarse)
        if wider is not None:
            span = wider
            mesh = _widened(ready, mesh, wider, energy)
        if len(mesh.places) > MOST_ELEMENTS:
            return _refined(*last)
        condensed, groups = _without_poles(ready, mesh, energy), None
    raise AssertionError("the last round returns")


def _begun(ready: Setting, request: Request, start: Start) -> tuple[float, Span, Condensed, list[Group] | None] | None:
    """Return energy, span, mesh and brackets to begin with from a nearby operator; None where too few levels are below."""
    condensed = _without_poles(ready, start.mesh, start.energy)
    groups = brackets(start, condensed)
    if groups is None and count_below(condensed, np.array([start.energy - ready.floor]))[0] <= request.last:
        return None
    mesh = condensed.mesh
    return start.energy, Span(float(mesh.places[0]), float(mesh.places[-1]), mesh.left, mesh.right), condensed, groups


def _refined(solved: Solved, found: Accuracy, span: Span) -> Refined:
    """Return levels with their errors and those of their states."""
    return Refined(solved, found.total, _vector_error(solved, found), span)


def _vector_error(solved: Solved, found: Accuracy) -> Array:
    """Return a bound on the error of each state in norm, from the error of its value and the distance to its neighbours."""
    values = solved.values
    gap = np.full(len(values), np.inf)
    steps = np.diff(values)
    gap[:-1] = np.minimum(gap[:-1], steps)
    gap[1:] = np.minimum(gap[1:], steps)
    gap = np.where(np.isfinite(gap), gap, np.abs(values) + np.abs(solved.kinetic))
    gap[[0, -1]] = np.minimum(gap[[0, -1]], _room(solved, gap[0], gap[-1]))
    with np.errstate(all="ignore"):
        off = np.sqrt((SAFETY * found.residual.sum(axis=0) + 2 * found.cut.sum(axis=0)) / gap)
        off = off + (SAFETY * found.unseen.sum(axis=0) + MIXING * found.noise) / gap
    return np.where(np.isfinite(off), np.minimum(off, 1.0), 1.0)


def _room(solved: Solved, below: float, above: float) -> Array:
    """Return how far the levels that were not asked for keep from the first and the last one: at least so much, by counts.

    Looked for no farther than `below` and `above`.
    """
    first, last = float(solved.values[0]), float(solved.values[-1])
    down = first - below * NEARER if solved.first else np.empty(0)
    counts = count_below(solved.condensed, np.concatenate([last + above * NEARER, down]))
    free = counts == np.array([solved.first + len(solved.values)] * len(NEARER) + [solved.first] * len(down))
    free_above, free_below = free[: len(NEARER)], free[len(NEARER) :]
    return np.array(
        [
            below * float(np.max(NEARER[free_below], initial=0.0)) if solved.first else np.inf,
            above * float(np.max(NEARER[free_above], initial=0.0)),
        ]
    )


def _report(request: Request, number: int, condensed: Condensed) -> None:
    request.check()
    request.progress(f"mesh {number + 1}: {condensed.mesh.unknowns} unknowns")


def first_mesh(ready: Setting, request: Request, energy: float, span: Span | None) -> tuple[float, Span, Condensed]:
    """Return an energy with enough levels below it, and the span and mesh that go with it."""
    fixed, depth = span, 0.3
    wanted = request.last + 1
    for _ in range(80):
        request.check()
        at_threshold = energy >= ready.threshold and fixed is None
        below = ready.threshold - depth * (ready.threshold - ready.floor) / (wanted + 1) ** 2 if at_threshold else energy
        span = fixed or span_at(ready, below)
        if span is None:
            raise PhysicsError(
                "the states asked for reach farther out than numbers go", mend="ask for fewer levels, or narrow the domain"
            )
        condensed = _without_poles(ready, build(ready.problem, ready.look, ready.coefficients, span, energy), energy)
        if count_below(condensed, np.array([energy - ready.floor]))[0] >= wanted:
            return energy, span, condensed
        if at_threshold:
            depth /= 16
        else:
            energy = min(
                energy + 0.25 * (energy - ready.floor) + 1e-12 * abs(ready.floor), ready.threshold if fixed is None else np.inf
            )
    raise PhysicsError("the levels asked for were not found", mend="ask for fewer levels")


def _without_poles(ready: Setting, mesh: Mesh, energy: float) -> Condensed:
    """Condense the mesh, splitting elements whose interior has a level of its own below the energy."""
    high = energy - ready.floor
    elements = len(mesh.places) - 1
    if elements > LARGE:
        refuse_above(64.0 * elements * (mesh.order + 1) ** 2, f"a mesh of {elements} elements")
    for _ in range(60):
        condensed = condense(mesh, grid(mesh, ready.coefficients))
        stiffness = (condensed.grid.kinetic / condensed.grid.mass).min(axis=1) / 4
        low = condensed.poles[:, 0] <= high + 0.02 * np.pi**2 * stiffness
        if not low.any():
            return condensed
        mesh = mesh.split(low)
    return condensed


def _low(condensed: Condensed, first: int, high: float) -> float:
    """Return an energy with at most `first` levels below it, not far under the level of that number."""
    least = float((condensed.grid.potential / condensed.grid.mass).min())
    rungs = high - (high - least) * 1.0625 * 2.0 ** -np.arange(16.0)
    counts = count_below(condensed, rungs)
    good = np.flatnonzero(counts <= first)
    return float(rungs[good].max()) if len(good) else least - abs(high - least)


def _targets(solved: Solved, tolerance: float, found: Accuracy) -> Array:
    """Return the error wanted for each level; never below what rounding leaves."""
    scale = np.maximum(np.maximum(np.abs(solved.values), solved.kinetic), 1e-3 * gentlest(solved.condensed))
    return np.maximum(OVERSHOOT * tolerance * np.maximum(scale, 1e-3 * scale.max()), found.noise)


def _coarse(found: Accuracy, target: Array, condensed: Condensed) -> Flags:
    """Mark the elements that make up too much of the error of some level."""
    over = SAFETY * found.share.sum(axis=0) > 0.5 * target
    limit = BOLD * target / (SAFETY * found.share.shape[0])
    marked: Flags = np.any(found.share > np.where(over, limit, np.inf), axis=1)
    mesh = condensed.mesh
    small = 1e-9 * (mesh.places[-1] - mesh.places[0])
    marked &= (mesh.places[1:] - mesh.places[0] > small) | (mesh.left.power is None)
    marked &= (mesh.places[-1] - mesh.places[:-1] > small) | (mesh.right.power is None)
    tiny = condensed.mesh.lengths < 64 * np.spacing(np.abs(condensed.mesh.places).max() * np.finfo(float).eps)
    return marked & ~tiny


def _wider(
    ready: Setting, found: Accuracy, target: Array, solved: Solved, span: Span, actions: tuple[float, float]
) -> tuple[Span | None, tuple[float, float]]:
    """Return a span cut farther out, where the cut costs some level more than its share of the error; else None."""
    worst = found.cut / target
    if worst.max() <= 0.125:
        return None, actions
    level = int(np.argmax(worst.max(axis=0)))
    energy = min(float(solved.values[level]) + ready.floor, ready.threshold)
    left, right = span.left, span.right
    for _ in range(40):
        actions = (actions[0] + 4 * (worst[0, level] > 0.125), actions[1] + 4 * (worst[1, level] > 0.125))
        wider = span_at(ready, energy, actions)
        if wider is None:
            return _farther(ready, span), actions
        left, right = min(left, wider.left), max(right, wider.right)
        if left < span.left or right > span.right:
            return Span(left, right, wider.left_edge, wider.right_edge), actions
    return None, actions


def _farther(ready: Setting, span: Span) -> Span | None:
    """Return a span eight times as wide at its open ends, for states so near the threshold that no decay is in sight yet.

    None where the box's own levels could no longer be told from the threshold.
    """
    width = span.right - span.left
    stiffness = float(ready.problem.stiffness(np.array([span.left + 0.5 * width]))[0])
    if stiffness * (np.pi / width) ** 2 < 64 * np.spacing(ready.threshold - ready.floor):
        return None
    left = span.left - 4 * width if isinstance(ready.ends[0], FarEnd) else span.left
    right = span.right + 4 * width if isinstance(ready.ends[1], FarEnd) else span.right
    return Span(left, right, span.left_edge, span.right_edge)


def _widened(ready: Setting, mesh: Mesh, span: Span, energy: float) -> Mesh:
    """Return a mesh of the wider span that keeps the places of the one refined so far."""
    wide = build(ready.problem, ready.look, ready.coefficients, span, energy)
    outer = wide.places[(wide.places < mesh.places[0]) | (wide.places > mesh.places[-1])]
    places = np.unique(np.concatenate([outer, mesh.places, [span.left, span.right]]))
    merged = Mesh(graded(places), mesh.order, span.left_edge, span.right_edge, mesh.phase)
    return resolve(merged, ready.coefficients, energy - ready.floor)
