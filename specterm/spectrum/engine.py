"""The engine's front: a model in, a certified spectrum out."""

from __future__ import annotations

import math
import time
from collections.abc import Callable
from dataclasses import replace

import numpy as np

from specterm.arrays import Array
from specterm.discrete.chain import count_below
from specterm.discrete.elements import condense, gentlest, grid
from specterm.discrete.ends import FarEnd, NearEnd
from specterm.discrete.mesh import Edge, Mesh
from specterm.discrete.meshing import Span
from specterm.discrete.reduce import problem_of
from specterm.discrete.scan import semiclassical_count
from specterm.errors import PhysicsError
from specterm.model import Model
from specterm.spectrum.bound import bound_levels, other_end
from specterm.spectrum.firstorder import running_levels
from specterm.spectrum.fourier import dense_levels
from specterm.spectrum.refine import Refined, Request, first_mesh, refine
from specterm.spectrum.result import Level, Spectrum
from specterm.spectrum.setting import Setting, setting
from specterm.spectrum.start import start_from
from specterm.spectrum.states import ElementStates
from specterm.spectrum.symmetry import parities
from specterm.spectrum.vectors import Solved
from specterm.stopping import stopping

FROM_TOP = "the operator has a highest level and no lowest: levels are counted from the top"
MISSED = "some levels do not reach the tolerance: kind unresolved"
COUNTED = 1e-14
"""Counts are trusted to tell levels apart by this share of them, and on meshes graded to tiny elements, by `BLURRED`."""
BLURRED = 1e-7
FELT = 0.05
"""A box reaches as far as the potential, times the square of the distance over the coefficient of the momenta, is more."""
USUAL = 10
"""How many levels are computed when nobody says."""


def solve(
    model: Model,
    *,
    count: int | None = None,
    near: float | None = None,
    tolerance: float = 1e-8,
    should_stop: Callable[[], bool] | None = None,
    progress: Callable[[str], None] | None = None,
    like: Spectrum | None = None,
) -> Spectrum:
    """Return levels of the model's operator with errors and kinds.

    Parameters
    ----------
    model
        A sheet made ready.
    count
        How many levels; without it, up to `USUAL` of the true ones. When more are asked for than are bound, the rest are of
        kind "box".
    near
        Return the levels nearest to this energy instead of the lowest.
    tolerance
        Error asked for, as a share of each level's distance to the potential's minimum.
    should_stop, progress
        Asked now and then whether to give up (WorkStopped), and told in words how far the work is.
    like
        Levels of a nearby operator, to begin with: where they fit, the same levels are found in about half the time. Parities
        may stay unknown where the operator has moved.

    Raises
    ------
    PhysicsError
        Where the operator is not Hermitian or not self-adjoint on the domain, has no lowest or highest level, or has no value
        somewhere.

    Notes
    -----
    Spectral elements of order 12, condensed onto their vertices; levels bracketed by inertia counts, values as Rayleigh
    quotients by element; error from a hierarchical estimate, the wall's force at each cut and a bound on rounding. Tested to n
    = 1000 levels, lengths and energies from 1e-9 to 1e9 and splittings to 1e-14 of the level.
    """
    start = time.perf_counter()
    _refuse_bad(count, tolerance, near)
    stop, tell = should_stop or (lambda: False), progress or (lambda _: None)
    try:
        with np.errstate(all="ignore"), stopping(should_stop):
            _refuse_asymmetric(model)
            found = _by_order(model, count, near, tolerance, stop, tell, like)
    except np.linalg.LinAlgError:
        raise PhysicsError(
            "the operator cannot be solved in double precision on this domain",
            mend="shift a singular end to 0, or narrow the domain",
        ) from None
    except MemoryError:
        raise PhysicsError(
            "there is not enough memory for this", mend="ask for fewer levels, narrow the domain, or use a larger machine"
        ) from None
    return _timed(found, time.perf_counter() - start)


def _by_order(
    model: Model,
    count: int | None,
    near: float | None,
    tolerance: float,
    stop: Callable[[], bool],
    tell: Callable[[str], None],
    like: Spectrum | None,
) -> Spectrum:
    """Solve with what fits the order of the operator."""
    if model.operator.order > 2:
        found = _dense(model, count or USUAL, near, tolerance, stop)
    elif model.operator.order < 2:
        found = _running(model, count or USUAL, near, tolerance)
    else:
        found = _elements(model, count, near, tolerance, stop, tell, like)
    return found


def _refuse_bad(count: int | None, tolerance: float, near: float | None) -> None:
    if count is not None and count < 1:
        raise PhysicsError(f"{count} levels cannot be computed", mend="ask for 1 or more")
    if near is not None and not math.isfinite(near):
        raise PhysicsError(f"there are no levels near {near:g}", mend="look near a finite energy")
    if not 0 < tolerance < 1:
        raise PhysicsError(f"a tolerance of {tolerance:g} makes no sense", mend="use one between 0 and 1, such as 1e-8")


def _refuse_asymmetric(model: Model) -> None:
    fault = model.operator.hermitian()
    if fault is not None:
        raise PhysicsError(fault.reason, mend=fault.mend)


def _timed(spectrum: Spectrum, seconds: float) -> Spectrum:
    return replace(spectrum, seconds=seconds)


def _elements(
    model: Model,
    count: int | None,
    near: float | None,
    tolerance: float,
    stop: Callable[[], bool],
    tell: Callable[[str], None],
    like: Spectrum | None,
) -> Spectrum:
    """Solve an operator of second order on spectral elements."""
    ready = setting(problem_of(model))
    bound = bound_levels(ready) if math.isfinite(ready.threshold) else None
    finite = math.isfinite(ready.threshold) and bound is not None
    wanted = count or (min(USUAL, bound) if bound is not None else USUAL)
    true = min(wanted, bound) if bound is not None else wanted
    notes = list(model.warnings)
    start = start_from(ready, like, 0, true - 1) if like is not None and near is None and true else None
    if near is not None and not (finite and bound == 0):
        first, true, energy = _nearest(ready, near * ready.problem.sign, wanted, bound)
    elif start is not None:
        first, energy = 0, start.energy
    else:
        first, energy = 0, ready.energy(true + 1.5) if true else ready.threshold
    request = Request(first, first + true - 1, tolerance, stop, tell)
    refined = refine(ready, request, energy, None, start) if true else None
    if near is not None and refined is not None:
        first, refined = _nearest_of(refined, near * ready.problem.sign - ready.floor, wanted)
    boxes = wanted - true if near is None else 0
    if boxes > 0:
        notes.append(f"{boxes} of the levels lie in the continuum: kind box, their place means nothing")
        refined = _with_boxes(ready, request, refined, wanted)
    if finite and not bound:
        notes.append("no level is bound: the spectrum is a continuum from the threshold on")
    if refined is None:
        return _nothing(ready, tolerance, notes)
    return _spectrum(ready, refined, first, bound, tolerance, notes)


def _nearest(ready: Setting, near: float, wanted: int, bound: int | None) -> tuple[int, int, float]:
    """Return the number of the first of the levels nearest to an energy, how many, and an energy above them all."""
    if near >= ready.threshold:
        raise PhysicsError("that energy lies in the continuum", mend=f"look below {ready.threshold:.6g}")
    guess = max(0.0, float(semiclassical_count(ready.look, np.array([near]), ready.extra)[0]))
    margin = wanted + 3 + 0.02 * guess
    top = max(ready.energy(guess + margin), near)
    enough = int(guess) + wanted if bound is None else min(int(guess) + wanted, bound - 1)
    top, _, condensed = first_mesh(ready, Request(0, enough, 1e-8, lambda: False, lambda _: None), top, None)
    below = int(count_below(condensed, np.array([near - ready.floor]))[0])
    most = int(count_below(condensed, np.array([top - ready.floor]))[0])
    first = max(0, below - wanted)
    last = min(below + wanted, most) - 1
    if bound is not None:
        last = min(last, bound - 1)
    if last < first:
        first = last = max(0, most - 1)
    return first, last - first + 1, top


def _nearest_of(refined: Refined, near: float, wanted: int) -> tuple[int, Refined]:
    """Return the number of the first of the `wanted` levels nearest to an energy measured from the floor, and those levels."""
    solved = refined.solved
    order = np.sort(np.argsort(np.abs(solved.values - near), kind="stable")[:wanted])
    some = slice(int(order[0]), int(order[-1]) + 1)
    kept = Solved(
        solved.condensed, solved.first + some.start, solved.values[some], solved.coefficients[:, :, some], solved.kinetic[some]
    )
    return kept.first, Refined(kept, refined.error[some], refined.vector_error[some], refined.span)


def _with_boxes(ready: Setting, request: Request, refined: Refined | None, wanted: int) -> Refined:
    """Return levels 0 ... wanted - 1 on one mesh, the span being that of the bound ones or the reach of the potential."""
    span = refined.span if refined is not None else _reach(ready)
    energy = ready.energy(wanted + 1.5, span)
    whole = Request(0, wanted - 1, request.tolerance, request.should_stop, request.progress)
    return refine(ready, whole, energy, span)


def _reach(ready: Setting) -> Span:
    """Return a span that holds all of the potential that differs from its limits, with as much room again."""
    problem, look = ready.problem, ready.look
    marks = np.clip(np.concatenate([problem.edges, problem.centres]), problem.left, problem.right)
    if not len(marks):
        marks = np.array([e for e in (problem.left, problem.right) if np.isfinite(e)] or [0.0])
    ends = [float(marks.min()), float(marks.max())]
    for side, sign in ((0, -1.0), (1, 1.0)):
        end = ready.ends[side]
        if isinstance(end, FarEnd) and np.isfinite(end.limit):
            beyond = (sign * (look.x - ends[side]) > 0) & np.isfinite(look.potential)
            with np.errstate(all="ignore"):
                pull = np.abs(look.potential - end.limit) * (look.x - ends[side]) ** 2 / look.stiffness
            alive = look.x[beyond & (pull > FELT)]
            reach = sign * float(np.max(sign * alive, initial=sign * ends[side]))
            ends[side] = reach if abs(reach - ends[side]) < 1e6 * max(1.0, abs(ends[side])) else ends[side]
    width = (ends[1] - ends[0]) or 1.0
    places, edges = [], []
    for side, sign in ((0, -1.0), (1, 1.0)):
        near = ready.ends[side]
        if isinstance(near, NearEnd):
            place, edge = other_end(ready, side)
            places.append(place)
            edges.append(edge)
        else:
            places.append(ends[side] + sign * width)
            edges.append(Edge(True))
    return Span(places[0], places[1], edges[0], edges[1])


def _nothing(ready: Setting, tolerance: float, notes: list[str]) -> Spectrum:
    """Return the spectrum without levels of an operator that binds nothing."""
    sign = ready.problem.sign
    return Spectrum(
        (), None, 0, sign * ready.threshold, True, ready.problem.left, ready.problem.right, "spectral elements", 0, tolerance,
        notes=tuple(notes), from_top=sign < 0,
    )  # fmt: skip


def _spectrum(ready: Setting, refined: Refined, first: int, bound: int | None, tolerance: float, notes: list[str]) -> Spectrum:
    """Dress the levels: kinds, nodes, parities, the independent count."""
    solved, problem = refined.solved, ready.problem
    values = problem.sign * (solved.values + ready.floor)
    nodes_known = not problem.ring
    parity = parities(problem, solved)
    scales = _scales(solved)
    complete, errors = _verified(ready, refined, first)
    levels = []
    for k, value in enumerate(values):
        index = first + k
        boxed = bound is not None and index >= bound
        error = None if boxed else _near_threshold(float(errors[k]), ready.threshold - ready.floor - float(solved.values[k]))
        kind = "box" if boxed else _kind(problem.bloch, error, scales[k], tolerance)
        levels.append(Level(index, float(value), error, kind, index if nodes_known else None, parity[k]))
    if problem.sign < 0:
        notes = [*notes, FROM_TOP]
    notes = [*notes, *_unresolved(tuple(levels))]
    mesh = solved.condensed.mesh
    threshold = problem.sign * ready.threshold if math.isfinite(ready.threshold) else None
    return Spectrum(
        tuple(levels), ElementStates(solved, problem.twist), bound, threshold, complete,
        float(mesh.places[0]), float(mesh.places[-1]), f"spectral elements, {len(mesh.places) - 1} of order {mesh.order}",
        mesh.unknowns, tolerance, notes=tuple(notes), from_top=problem.sign < 0, values=values,
        vector_error=refined.vector_error,
    )  # fmt: skip


def _near_threshold(error: float, depth: float) -> float:
    """Return the error of a level `depth` below the threshold: where it is not far smaller, the state itself is uncertain."""
    return error + depth if error > 0.1 * depth > 0 else error


def _scales(solved: Solved) -> Array:
    """Return what the errors are judged by: the distance to the potential's minimum, or to the next level if larger."""
    scale = np.maximum(np.maximum(np.abs(solved.values), solved.kinetic), gentlest(solved.condensed))
    steps = np.diff(solved.values)
    scale[:-1] = np.maximum(scale[:-1], steps)
    scale[1:] = np.maximum(scale[1:], steps)
    return scale


def _kind(band: bool, error: float | None, scale: float, tolerance: float) -> str:
    """Return the kind of a level that is not a box level."""
    if error is None or not error <= tolerance * scale:
        return "unresolved"
    return "band" if band else "bound"


def _verified(ready: Setting, refined: Refined, first: int) -> tuple[bool, Array]:
    """Count the levels again on a mesh of higher order, below and above each level: return whether all agree, and the errors.

    A level that the counts do not find within its error gets the distance within which they do.
    """
    mesh = refined.solved.condensed.mesh
    finer = Mesh(mesh.places, mesh.order + 2, mesh.left, mesh.right, mesh.phase)
    again = condense(finer, grid(finer, ready.coefficients))
    values, error = refined.solved.values, refined.error
    numbers = first + np.arange(len(values))
    rounding = 16 * np.finfo(float).eps * float(np.abs(again.stiff[:, (0, 1), (0, 1)]).max())
    blur = np.maximum(COUNTED * np.abs(values), np.minimum(rounding, BLURRED * np.abs(values)))
    blur = np.maximum(blur, COUNTED * float(_scales(refined.solved).max()))
    slack = np.maximum(4 * np.where(np.isfinite(error), error, 0.0), blur) + 64 * np.spacing(np.abs(values))
    start = slack.copy()
    for _ in range(14):
        low, high = np.split(count_below(again, np.concatenate([values - slack, values + slack])), 2)
        lost = (low > numbers) | (high <= numbers)
        if not lost.any():
            break
        slack[lost] *= 10
    return not bool(lost.any()), np.where(slack > start, np.maximum(error, slack), error)


def _dense(model: Model, count: int, near: float | None, tolerance: float, stop: Callable[[], bool]) -> Spectrum:
    """Solve an operator of higher order in a Fourier basis."""
    if near is not None:
        raise PhysicsError("--near is not available for operators of order above two", mend="ask for enough levels with -n")
    found = dense_levels(model, count - 1, tolerance, stop)
    steps = np.append(np.abs(np.diff(found.values)), found.room)
    scales = np.maximum(np.abs(found.values), np.maximum(steps, np.append(0.0, steps[:-1])))
    band = model.domain.phase is not None
    levels = tuple(
        Level(k, float(value), float(error), _kind(band, float(error), float(scale), tolerance))
        for k, (value, error, scale) in enumerate(zip(found.values, found.error, scales, strict=True))
    )
    notes = [*model.warnings, *([FROM_TOP] if found.sign < 0 else []), *_unresolved(levels)]
    return Spectrum(
        levels, found.states, None, None, found.agree, found.box.left, found.box.right,
        f"Fourier basis, {found.box.points} waves", found.box.points, tolerance, notes=tuple(notes), from_top=found.sign < 0,
        values=found.values,
    )  # fmt: skip


def _unresolved(levels: tuple[Level, ...]) -> list[str]:
    """Return a note where some level does not reach the tolerance."""
    return [MISSED] if any(level.kind == "unresolved" for level in levels) else []


def _running(model: Model, count: int, near: float | None, tolerance: float) -> Spectrum:
    """Solve an operator of first order on a ring in closed form."""
    found = running_levels(model, count, near)
    kind = "band" if model.domain.phase is not None else "bound"
    levels = tuple(
        Level(int(n), float(v), float(e), kind) for n, v, e in zip(found.numbers, found.values, found.error, strict=True)
    )
    return Spectrum(
        levels, found.states, None, None, True, model.domain.left, model.domain.right, "closed form", count, tolerance,
        notes=model.warnings, values=found.values,
    )  # fmt: skip
