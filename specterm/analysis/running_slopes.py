"""Derivatives of the levels of first-order operators on rings, from their closed form."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from pathlib import Path

import numpy as np

from specterm.analysis.displaced import Displaced, Written, displaced
from specterm.analysis.extrapolate import FIRST, Steps, derivative, find_steps
from specterm.analysis.samples import Samples
from specterm.analysis.slopes import Slope
from specterm.arrays import Array
from specterm.errors import SpectermError, WorkStopped
from specterm.model import Model
from specterm.spectrum import Spectrum
from specterm.spectrum.firstorder import running_integrals

NOISE = 1e-14
"""Rounding of a level in closed form beside its parts."""


def running_slopes(
    model: Model, spectrum: Spectrum, folder: Path | None, places: Mapping[str, Written], stop: Callable[[], bool]
) -> Sequence[Slope | str]:
    """Return the derivatives of the levels with respect to each number, or why there is none."""
    around, offset, turn = running_integrals(model)
    values = np.array([level.value for level in spectrum.levels])
    numbers = np.round((values * around - offset) / (2 * np.pi) - turn)
    found: list[Slope | str] = []
    for name, place in places.items():
        if stop():
            raise WorkStopped("stopped")
        found.append(_slope(displaced(model, name, place, folder), numbers, FIRST * place.size))
    return found


def _slope(models: Displaced, numbers: Array, first: float) -> Slope | str:
    known: dict[float, Samples | str] = {}

    def sample(step: float) -> Samples | str:
        if step not in known:
            known[step] = _sampled(models.model(step), numbers)
        return known[step]

    def sure(step: float) -> Samples:
        got = sample(step)
        assert not isinstance(got, str)
        return got

    steps = find_steps(sample, lambda got: float(np.abs(got.mass).sum()), first)
    if not isinstance(steps, Steps):
        return steps
    slope, doubt = derivative(sure, steps)
    rounding = NOISE * np.abs(sure(0.0).parts).sum(axis=(0, 1)) / steps.shortest
    return Slope(slope.mass, 2 * np.abs(doubt.mass) + rounding)


def _sampled(model: Model | str, numbers: Array) -> Samples | str:
    """Return the levels of these quantum numbers as samples, with the sizes of their parts, or why there are none."""
    if isinstance(model, str):
        return model
    try:
        around, offset, turn = running_integrals(model)
    except SpectermError as error:
        return error.message
    values = (2 * np.pi * (numbers + turn) + offset) / around
    size = np.abs(2 * np.pi * (numbers + turn) / around) + abs(offset / around)
    return Samples(size[None, None], values, np.zeros(0))
