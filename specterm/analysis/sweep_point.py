"""The work behind a sweep: the points of one stretch, solved one after the other, each from the one before."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from specterm.analysis.expectation import expectation
from specterm.analysis.overlap import amplitudes
from specterm.analysis.sweep_request import Quantity, SweepRequest, model_at
from specterm.analysis.transitions import transitions
from specterm.analysis.weights import project
from specterm.errors import PhysicsError, SpectermError, WorkStopped
from specterm.model import Model
from specterm.spectrum import Spectrum, solve

KEPT = 1e-3
"""Overlaps |<a|b>|^2 with the point before are kept from this size on."""
DIGITS = 7
Known = tuple[float | None, ...]


@dataclass(frozen=True)
class Point:
    """What is known at one point of a sweep.

    For each level: `numbers` (its index), `levels` (value), `errors` (None without one), `kinds`; `quantity` and
    `quantity_errors` (None where unknown). `links` are (a, b, re, im) for <a|b> with level a at the point before, by place,
    that is not negligible; none at the start of a row. `problem` says why there are no levels, or no quantity.
    """

    index: int
    numbers: tuple[int, ...]
    levels: tuple[float, ...]
    errors: Known
    kinds: tuple[str, ...]
    quantity: Known
    quantity_errors: Known
    links: tuple[tuple[int, int, float, float], ...] = ()
    problem: str = ""
    complete: bool = True


@dataclass(frozen=True)
class Stretch:
    """Points start ... stop - 1 of one row, of which those `wanted` are to be reported."""

    request: SweepRequest
    start: int
    stop: int
    wanted: tuple[int, ...]


def stretches(request: SweepRequest, missing: set[int]) -> list[Stretch]:
    """Return the stretches that hold missing points.

    They depend on the request alone, so that every point comes out the same to the last bit wherever and in whatever order the
    stretches are done.
    """
    row, length = request.row, max(4, min(25, request.size // 40))
    found = []
    for first in range(0, request.size, row):
        for start in range(first, first + row, length):
            stop = min(start + length, first + row)
            wanted = tuple(index for index in range(start, stop) if index in missing)
            if wanted:
                found.append(Stretch(request, start, stop, wanted))
    return found


def solve_stretch(stretch: Stretch) -> list[Point]:
    """Return the points wanted of a stretch; for other processes and machines."""
    return list(points_of(stretch))


def points_of(stretch: Stretch, should_stop: Callable[[], bool] | None = None) -> Iterator[Point]:
    """Yield the points wanted of a stretch as they are done.

    The point before the stretch is solved first, anew, for its states; each point then starts from the mesh and the levels of
    the one before. Raises WorkStopped.
    """
    request, before = stretch.request, None
    first = stretch.start - 1 if stretch.start % request.row else stretch.start
    for index in range(first, max(stretch.wanted) + 1):
        wanted = index in stretch.wanted
        point, before = _point(request, index, before, should_stop, whole=wanted)
        if wanted:
            yield point


def _point(
    request: SweepRequest,
    index: int,
    before: Spectrum | None,
    should_stop: Callable[[], bool] | None,
    *,
    whole: bool,
) -> tuple[Point, Spectrum | None]:
    """Return a point, its quantity and links where `whole`, and its spectrum; what cannot be solved becomes a problem."""
    try:
        model = model_at(request, request.place(index))
        spectrum = solve(
            model, count=request.count, near=request.near, tolerance=request.tolerance, should_stop=should_stop, like=before
        )
    except WorkStopped:
        raise
    except SpectermError as error:
        return Point(index, (), (), (), (), (), (), problem=error.message), None
    levels, problem = spectrum.levels, ""
    quantity: Known = ()
    errors: Known = ()
    try:
        quantity, errors = _quantity(model, spectrum, request.quantity, request.folder) if whole else ((), ())
    except SpectermError as error:
        quantity, errors, problem = (None,) * len(levels), (None,) * len(levels), error.message
    point = Point(
        index,
        tuple(level.index for level in levels),
        tuple(level.value for level in levels),
        tuple(_known(level.error) for level in levels),
        tuple(level.kind for level in levels),
        quantity,
        errors,
        _links(before, spectrum) if whole and before is not None else (),
        problem,
        spectrum.complete,
    )
    return point, spectrum


def _links(before: Spectrum, now: Spectrum) -> tuple[tuple[int, int, float, float], ...]:
    found = np.round(amplitudes(before, now), DIGITS)
    rows, columns = np.nonzero(np.abs(found) ** 2 > KEPT)
    kept = found[rows, columns]
    return tuple(zip(rows.tolist(), columns.tolist(), np.real(kept).tolist(), np.imag(kept).tolist(), strict=True))


def _quantity(model: Model, spectrum: Spectrum, asked: Quantity, folder: str) -> tuple[Known, Known]:
    """Return the quantity and its error for each level."""
    levels = spectrum.levels
    if asked.kind == "levels" or not levels:
        return (), ()
    if asked.kind == "weights":
        weights = project(model, spectrum, asked.detail, Path(folder)).weights
        return tuple(_known(one.weight) for one in weights), tuple(_known(one.error) for one in weights)
    if asked.kind == "expectation":
        means = [_mean(model, spectrum, asked.detail, level.index) for level in levels]
        return tuple(mean for mean, _ in means), tuple(error for _, error in means)
    if asked.kind == "strengths":
        lines = transitions(model, spectrum, (asked.start,), asked.detail or None).lines
        return tuple(_known(line.strength) for line in lines), tuple(_known(line.strength_error) for line in lines)
    lower = next((level for level in levels if level.index == asked.start), None)
    if lower is None:
        return (None,) * len(levels), (None,) * len(levels)
    errors = [None if one.error is None or lower.error is None else one.error + lower.error for one in levels]
    sure = tuple(0.0 if one is lower else error for one, error in zip(levels, errors, strict=True))
    return tuple(one.value - lower.value for one in levels), sure


def _mean(model: Model, spectrum: Spectrum, text: str, number: int) -> tuple[float | None, float | None]:
    """Return the mean of an observable in a level and its error, None where it has no finite mean."""
    try:
        found = expectation(model, spectrum, text, f"level({number})")
    except PhysicsError:
        return None, None
    return _known(found.mean), _known(found.error)


def _known(value: float | None) -> float | None:
    return None if value is None or not math.isfinite(value) else float(value)
