"""Derivatives of the levels of operators of order two and more: one number at a time, on shared points."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from specterm.analysis.carried_states import Carried, Totals
from specterm.analysis.displaced import Displaced, Shape, Written, displaced, shape_of, used_names
from specterm.analysis.extrapolate import FIRST, LONGER, LONGEST, Steps, derivative, find_steps
from specterm.analysis.level_groups import Doubts, Groups
from specterm.analysis.samples import Moved, Samples, moved
from specterm.analysis.state_points import ElementSampler, Sampler, StatePoints, WaveSampler
from specterm.arrays import Array
from specterm.errors import PhysicsError, WorkStopped
from specterm.model import Model
from specterm.spectrum import Spectrum
from specterm.spectrum.accuracy import NOISE
from specterm.spectrum.states import ElementStates

UNSETTLED = 1e-2
"""A derivative with a larger error than this share of its terms has no value to speak of."""


@dataclass(frozen=True)
class Slope:
    """Derivatives of every level with respect to one number, and bounds on their errors, both (levels,)."""

    value: Array
    error: Array


@dataclass
class Neighbours:
    """The shapes around a model along one number, each made once; `hull` is where the states live."""

    base: Shape
    around: Displaced
    hull: tuple[float, float]
    origin: float
    known: dict[float, Moved | str]

    def at(self, step: float) -> Moved | str:
        """Return the shape at a displacement, or why there is none."""
        if step not in self.known:
            self.known[step] = self._made(step)
        return self.known[step]

    def _made(self, step: float) -> Moved | str:
        model = self.around.model(step)
        if isinstance(model, str):
            return model
        if model.operator.order < 2:
            return "it changes the order of the operator"
        try:
            return moved(self.base, shape_of(model), self.hull, self.origin)
        except PhysicsError as error:
            return error.message

    def sampler(self, points: StatePoints) -> Callable[[float], Samples | str]:
        """Return what samples the shapes at the points, each once."""
        known: dict[float, Samples | str] = {}

        def sample(step: float) -> Samples | str:
            if step not in known:
                shape = self.at(step)
                found = shape if isinstance(shape, str) else shape.at(points)
                known[step] = found if isinstance(found, str) or found.finite else "the operator has no finite value near it"
            return known[step]

        return sample


def slopes_of(
    model: Model,
    spectrum: Spectrum,
    folder: Path | None,
    places: Mapping[str, Written],
    groups: Groups,
    doubts: Doubts,
    stop: Callable[[], bool],
) -> Sequence[Slope | str]:
    """Return the derivatives with respect to each number, or why there is none; `doubts` are those about the states."""
    base = shape_of(model)
    carried, origin = _carried(spectrum, base, groups)
    hull = (spectrum.left, spectrum.right)
    points = carried.sampler.points(carried.sampler.whole(), base.highest, spare=True)
    size = carried.mean_size(points)
    here = moved(base, base, hull, origin)
    assert isinstance(here, Moved)
    noise = here.noise(points)
    plans: list[tuple[Neighbours, Steps] | str | None] = []
    used = used_names(model)
    for name, place in places.items():
        if stop():
            raise WorkStopped("stopped")
        if name not in used:
            plans.append(None)
            continue
        around = Neighbours(base, displaced(model, name, place, folder), hull, origin, {0.0: here})
        plans.append(_plan(around, points, size, FIRST * place.size, size(noise)))
    live = [plan for plan in plans if isinstance(plan, tuple)]
    done = iter(_slopes(carried, points, live, groups, doubts) if live else [])
    none = np.zeros(len(spectrum.levels))
    return [next(done) if isinstance(plan, tuple) else Slope(none, none) if plan is None else plan for plan in plans]


def _carried(spectrum: Spectrum, base: Shape, groups: Groups) -> tuple[Carried, float]:
    """Return the states with their sampler, and the energy functions are measured from."""
    values = np.array([level.value for level in spectrum.levels])
    origin = float(values.mean())
    rows = np.arange(len(values))
    inner = [(a, b) for group in groups.groups for a in group.rows for b in group.rows if a != b]
    pairs = np.concatenate([np.column_stack([rows, rows]), np.array(inner, dtype=np.int64).reshape(-1, 2)])
    states = spectrum.states
    assert states is not None
    sampler: Sampler = ElementSampler(states) if isinstance(states, ElementStates) else WaveSampler(states)
    return Carried(sampler, values - origin, pairs, base.highest), origin


def _plan(
    around: Neighbours, points: StatePoints, size: Callable[[Samples], float], first: float, noise: float
) -> tuple[Neighbours, Steps] | str | None:
    """Return how to differentiate along one number, None where the number does nothing, or why it cannot be done."""
    step = _felt(around, first)
    if step is None:
        return None
    steps = find_steps(around.sampler(points), size, step, noise)
    return steps if isinstance(steps, str) else (around, steps)


def _felt(around: Neighbours, first: float) -> float | None:
    """Return the first step, made longer until the operator is not the same to the last bit; None where it always is."""
    here, step = around.at(0.0), first
    for _ in range(LONGEST):
        up = around.at(step)
        if isinstance(up, str) or isinstance(here, str) or not up.shape.same(here.shape):
            return step
        step *= LONGER
    return None


def _slopes(
    carried: Carried, points: StatePoints, plans: Sequence[tuple[Neighbours, Steps]], groups: Groups, doubts: Doubts
) -> list[Slope | str]:
    """Return the derivatives along each number of the plans."""

    def slopes(at: StatePoints) -> list[tuple[Samples, Samples]]:
        return [derivative(_sure(around, at), steps) for around, steps in plans]

    here = plans[0][0].at(0.0)
    assert isinstance(here, Moved)
    sample = here.at(points)
    totals = carried.integrate(slopes, len(plans))
    missing = carried.left_out(slopes, sample, points)
    whole = NOISE * (_whole(carried, points, sample) + np.abs(carried.values)) + 2 * _whole(carried, points, here.noise(points))
    levels = len(carried.values)
    errors = totals.missed + 2 * totals.doubt
    errors = errors[:, :levels] + missing + 2 * doubts.mixed * np.sqrt(totals.steep[:, :levels])
    shortest = np.array([steps.shortest for _, steps in plans])
    sizes = totals.size[:, :levels]
    rounding = whole / shortest[:, None]
    errors = errors + (NOISE + doubts.cut) * sizes + rounding
    rows = range(len(plans))
    return [_settled(_branches(carried, totals, groups, row), errors[row], sizes[row], rounding[row]) for row in rows]


def _sure(around: Neighbours, points: StatePoints) -> Callable[[float], Samples]:
    """Return what samples shapes that are known to be there; each step is asked for once."""

    def sample(step: float) -> Samples:
        shape = around.at(step)
        assert isinstance(shape, Moved)
        return shape.at(points)

    return sample


def _whole(carried: Carried, points: StatePoints, sample: Samples) -> Array:
    """Return the integral of the moduli of the samples over each level, shape (levels,)."""
    total = np.zeros(len(carried.values))
    for a in range(len(points.jets)):
        for b in range(len(points.jets)):
            part = np.abs(sample.parts[a, b])
            total += (points.w * part * np.abs(points.jets[a]) * np.abs(points.jets[b])).sum(axis=(1, 2))
    return total


def _branches(carried: Carried, totals: Totals, groups: Groups, row: int) -> Array:
    """Return the derivatives along one number: within a group, the eigenvalues of its matrix."""
    levels = len(carried.values)
    value = np.array(totals.value[row, :levels].real)
    place = {(int(a), int(b)): k for k, (a, b) in enumerate(carried.pairs)}
    for group in groups.groups:
        matrix = np.array([[totals.value[row, place[a, b]] for b in group.rows] for a in group.rows])
        value[list(group.rows)] = np.linalg.eigvalsh((matrix + matrix.conj().T) / 2)
    return value


def _settled(value: Array, error: Array, size: Array, rounding: Array) -> Slope | str:
    """Return a slope, or why it has no value to speak of; `rounding` is a part of the error."""
    if not np.isfinite(value).all() or not np.isfinite(error).all():
        return "it is not finite"
    if len(value) and (error > UNSETTLED * np.maximum(size, np.abs(value))).all():
        return "rounding hides it" if (2 * rounding > error).all() else "it cannot be integrated: it may be infinite"
    return Slope(value, error)
