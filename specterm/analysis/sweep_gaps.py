"""Smallest gaps refined, and avoided crossings told from true ones.

The square of a gap is smooth where the gap itself bends sharply or has a corner: for two levels that interact alone it is
(slope (v - v0))^2 + gap^2. Its minimum is found by polynomials fitted on smaller and smaller intervals.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from specterm.analysis.mirror import parities
from specterm.analysis.overlap import overlaps
from specterm.analysis.sweep_dips import Dip
from specterm.analysis.sweep_request import model_at
from specterm.arrays import Array
from specterm.errors import SpectermError, WorkStopped
from specterm.model import Model
from specterm.spectrum import Level, Spectrum, solve

NODES, DEGREE = 9, 6
SMALLER = 4.0
STAGES = 5
FOUND = 1e-3
"""The minimum is first found to this share of the bracket, and must be at least so far from its ends."""
REACH = 0.9
WIDTHS = 30.0
"""So many widths away from an avoided crossing the states are what they were before it."""


@dataclass(frozen=True)
class Gap:
    """A smallest gap of the levels of two numbers, `at` a value of the parameter, with the errors of both.

    `crossing`: the gap is zero as far as can be told, the states change places there, and a symmetry tells them apart. None
    where only the symmetry is missing: it may as well be avoided, by less than can be resolved.
    """

    pair: tuple[int, int]
    at: float
    gap: float
    at_error: float
    gap_error: float
    crossing: bool | None
    note: str = ""


@dataclass(frozen=True)
class _Place:
    """Where the minimum is by one fit: the place, its error, half the interval of the fit, the slope of the gap beside it."""

    at: float
    error: float
    half: float
    slope: float


def refine_gap(dip: Dip, should_stop: Callable[[], bool] | None = None) -> Gap | None:
    """Return the smallest gap inside a bracket to about 1e-9 of it, None where there is none or it cannot be computed."""
    search = _Search(dip, should_stop)
    try:
        for touching, value in zip(dip.touching, (dip.left, dip.right), strict=True):
            if touching:
                return _judged(dip, search, _Place(value, 0.0, 0.0, 0.0))
        place = _located(dip, search)
        return None if place is None else _judged(dip, search, place)
    except WorkStopped:
        raise
    except (SpectermError, _MissingError):
        return None


class _MissingError(Exception):
    """A level of the pair is not there, or has no error."""


class _Search:
    """The gap as a function of the parameter; each solve starts from the one before."""

    def __init__(self, dip: Dip, should_stop: Callable[[], bool] | None) -> None:
        self._dip, self._should_stop = dip, should_stop
        self._last: Spectrum | None = None
        self.blur = 0.0

    def model(self, value: float) -> Model:
        """Return the model at a value."""
        return model_at(self._dip.request, (value,))

    def spectrum(self, value: float) -> Spectrum:
        """Return the levels at a value, with the pair among them."""
        request = self._dip.request
        count = self._dip.lower + 2 if request.near is None and self._dip.lower >= 0 else request.count
        self._last = solve(
            self.model(value), count=count, near=request.near, tolerance=request.tolerance, should_stop=self._should_stop,
            like=self._last,
        )  # fmt: skip
        return self._last

    def pair(self, value: float) -> tuple[Level, Level]:
        """Return the two levels at a value."""
        some = {level.index: level for level in self.spectrum(value).levels}
        below, above = some.get(self._dip.lower), some.get(self._dip.lower + 1)
        if below is None or above is None:
            raise _MissingError
        return below, above

    def gap(self, value: float) -> float:
        """Return the gap at a value; `blur` is then the sum of the errors of the two levels."""
        below, above = self.pair(value)
        if below.error is None or above.error is None:
            raise _MissingError
        self.blur = below.error + above.error
        return abs(above.value - below.value)


def _located(dip: Dip, search: _Search) -> _Place | None:
    """Return the best place of the minimum over fits on smaller and smaller intervals, None where it is not inside."""
    from scipy.optimize import minimize_scalar  # noqa: PLC0415 - heavy, and only gaps need it

    width = dip.right - dip.left
    rough = minimize_scalar(
        lambda v: search.gap(float(v)) ** 2, bounds=(dip.left, dip.right), method="bounded",
        options={"xatol": FOUND * width / 4},
    )  # fmt: skip
    at = float(rough.x)
    half = REACH * min(at - dip.left, dip.right - at)
    if half < FOUND * width:
        return None
    best: _Place | None = None
    for _ in range(STAGES):
        place = _fitted(search, at, half)
        if place is None:
            break
        rounding = 8 * float(np.spacing(max(abs(dip.left), abs(dip.right))))
        place = _Place(place.at, place.error + abs(place.at - at) + rounding, half, place.slope)
        if best is not None and place.error >= best.error:
            break
        best, at, half = place, place.at, half / SMALLER
    return best


def _fitted(search: _Search, at: float, half: float) -> _Place | None:
    """Return the minimum of a polynomial fitted to the squared gap on an interval, with the error that blur makes."""
    nodes = np.cos(np.pi * (np.arange(NODES) + 0.5) / NODES)
    squares: Array = np.array([search.gap(at + half * float(t)) ** 2 for t in nodes])
    fit = np.polynomial.Polynomial.fit(nodes, squares, DEGREE, domain=(-1, 1))
    roots = fit.deriv().roots()
    real = roots[np.abs(roots.imag) < 1e-6].real
    inside = real[np.abs(real) <= 1]
    if len(inside) == 0:
        return None
    t = float(inside[np.argmin(fit(inside))])
    curve = float(fit.deriv(2)(t)) / 2
    if not curve > 0:
        return None
    noise = 2 * math.sqrt(max(float(squares.min()), 0.0)) * search.blur + search.blur**2
    return _Place(at + half * t, half * noise / curve, half, math.sqrt(curve) / half)


def _judged(dip: Dip, search: _Search, place: _Place) -> Gap:
    """Return the gap at its place: how far it can be off, and whether it is a crossing."""
    gap = search.gap(place.at)
    blur = search.blur
    drift = place.slope * place.error
    error = blur + (min(drift, drift**2 / (2 * gap)) if gap > 0 else drift)
    zero = gap <= 2 * error
    pair = (dip.lower, dip.lower + 1)
    if not zero:
        return Gap(pair, place.at, gap, place.error, error, crossing=False)
    model = search.model(place.at)
    if model.operator.order == 2 and not model.domain.is_ring:
        note = f"levels {pair[0]} and {pair[1]} come closer than can be told, but levels of this operator never cross"
        return Gap(pair, place.at, gap, place.error, error, crossing=False, note=note)
    if _told_apart(dip, search, place, model):
        return Gap(pair, place.at, gap, place.error, error, crossing=True)
    if any(dip.touching) or _swapped(dip, search, place):
        note = f"levels {pair[0]} and {pair[1]} come closer than can be told: they cross, or nearly so"
        return Gap(pair, place.at, gap, place.error, error, crossing=None, note=note)
    note = f"levels {pair[0]} and {pair[1]} touch, and their states do not change places"
    return Gap(pair, place.at, gap, place.error, error, crossing=False, note=note)


def _told_apart(dip: Dip, search: _Search, place: _Place, model: Model) -> bool:
    """Say whether symmetry keeps the pair apart: coefficients constant around a ring, or parities that change places."""
    if model.domain.is_ring and all(function.constant is not None for _, function in model.operator.form().terms):
        return True
    if any(dip.touching):
        return False
    found = []
    for value in _sides(dip, search, place):
        levels = search.spectrum(value)
        rows = [k for k, level in enumerate(levels.levels) if level.index in (dip.lower, dip.lower + 1)]
        found.append(parities(search.model(value), levels, rows))
    left, right = found
    return left is not None and right is not None and left[0] != left[1] and left == right[::-1]


def _sides(dip: Dip, search: _Search, place: _Place) -> tuple[float, float]:
    """Return values on both sides of a gap where the states are no longer mixed."""
    room = REACH * min(place.at - dip.left, dip.right - place.at)
    width = search.blur / place.slope if place.slope > 0 else 0.0
    step = min(room, max(place.half, WIDTHS * (width + place.error)))
    return place.at - step, place.at + step


def _swapped(dip: Dip, search: _Search, place: _Place) -> bool:
    """Say whether the states of the pair have changed places from one side of the gap to the other."""
    sides = [search.spectrum(value) for value in _sides(dip, search, place)]
    rows = [[k for k, level in enumerate(one.levels) if level.index in (dip.lower, dip.lower + 1)] for one in sides]
    shares = overlaps(*sides)[np.ix_(*rows)]
    return bool(shares.shape == (2, 2) and shares[0, 1] + shares[1, 0] > shares[0, 0] + shares[1, 1])
