"""Prepared states as normalised functions."""

from __future__ import annotations

import math
import re
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from specterm.analysis.quadrature import points_between, resolved_points
from specterm.arrays import Array, Values
from specterm.errors import SheetError
from specterm.language import decode, parse
from specterm.language.catalogue import refuse
from specterm.model import Domain, Function, Model, State, build
from specterm.model.function import number
from specterm.model.regular import regular_slope
from specterm.regular import NotRegularError, TooLargeError, read_regular
from specterm.spectrum import Spectrum, solve
from specterm.spectrum.result import States

LARGEST_SHEET = 1_000_000


STATE_ERROR = 1e-10
"""Error in norm granted to eigenstates of bases that do not estimate it."""


def slips(spectrum: Spectrum) -> Array:
    """Return a bound on the error of each eigenstate in norm, shape (levels,); 1 where its level has no error estimate."""
    known = spectrum.vector_error
    return known if len(known) else np.full(len(spectrum.levels), STATE_ERROR)


@dataclass(frozen=True)
class Prepared:
    """A prepared state: `wave` maps places (n,) to values (n,), normalised; `x` and `w` (m,) integrate its products.

    `jet` gives a derivative: jet(x, 0) is the wave, jet(x, 2) its second derivative between the `places`, where it may jump or
    bend. `missed` is the share of the norm the rule may have missed; `cut` the share of |psi|^2 pressed against the walls of
    the domain, as an estimate of what they cut off; `slip` bounds the error of the wave in norm, rounding aside.
    """

    name: str
    wave: Callable[[Array], Values]
    x: Array
    w: Array
    missed: float
    jet: Callable[[Array, int], Values]
    places: Array
    cut: float = 0.0
    slip: float = 0.0


def prepare(model: Model, spectrum: Spectrum, name: str, folder: Path | None = None) -> Prepared:
    """Return the state of that name, or of a level written `level(3)`.

    Raises SheetError for an unknown name, a level not computed, and a state that cannot be normalised.
    """
    if name in model.states:
        state = model.states[name]
        if state.function is not None:
            return _of_function(model, spectrum, state, state.function)
        return _of_levels(model, spectrum, name, state.levels, folder)
    level = re.fullmatch(r"\s*level\(\s*(-?\d{1,6})\s*\)\s*", name)
    if level and (int(level[1]) >= 0 or any(one.index < 0 for one in spectrum.levels)):
        return _of_levels(model, spectrum, name.strip(), ((number(1.0), int(level[1]), None),), folder)
    known = ", ".join(model.states) or "none"
    raise SheetError(f"the sheet has no state `{name}`", mend=f"states of the sheet: {known}; or a level, written level(0)")


def _of_function(model: Model, spectrum: Spectrum, state: State, function: Function) -> Prepared:
    """Return a state given by a function of the coordinate."""
    hull = _hull(model.domain, function, spectrum)
    if hull is None:
        raise refuse(
            "state-not-normalisable", state.span, name=state.name, reason="its square has no finite integral over the domain"
        )
    marks = [
        function.edges(*hull),
        function.centres(*hull),
        _inside(spectrum.states.places if spectrum.states is not None else np.empty(0), hull),
    ]
    places = np.unique(np.concatenate([np.array(hull), *marks, _scales(function, hull), np.linspace(*hull, 33)]))
    x, w, missed = resolved_points(function, places)
    values = np.nan_to_num(function(x))
    norm = float(np.sqrt((w * np.abs(values) ** 2).sum()))
    if not np.isfinite(norm) or norm == 0:
        raise refuse(
            "state-not-normalisable", state.span, name=state.name, reason="its square has no finite integral over the domain"
        )
    slope = regular_slope(function)
    jets = (function, slope, regular_slope(slope))
    cut = _pressed(model.domain, values, x, norm)
    return Prepared(
        state.name, lambda y: function(y) / norm, x, w, missed, lambda y, k: np.nan_to_num(jets[k](y)) / norm, places, cut
    )


def _inside(places: Array, hull: tuple[float, float]) -> Array:
    return places[(places > hull[0]) & (places < hull[1])]


def _scales(function: Function, hull: tuple[float, float]) -> Array:
    """Return places on every scale around the function's natural centres, so that no narrow part of it is passed over."""
    centres = function.centres(*hull)[:24]
    steps = (hull[1] - hull[0]) * np.exp2(-np.arange(1.0, 48.0))
    near = (centres[:, None] + np.concatenate([-steps, steps])).ravel()
    return _inside(near, hull)


def _densest(domain: Domain, function: Function, marks: Array) -> float:
    """Return the largest |f|^2 d over distances d around the marks inside the domain: an estimate of the integral of |f|^2."""
    d = np.exp2(np.arange(-60.0, 60.0, 0.5))
    x = marks[:, None] + np.concatenate([-d, d])
    with np.errstate(all="ignore"):
        shares = np.abs(function(x.ravel()).reshape(x.shape)) ** 2 * np.concatenate([d, d])
    inside = (x > domain.left) & (x < domain.right) & np.isfinite(shares)
    return float(np.max(shares[inside], initial=0.0))


def _hull(domain: Domain, function: Function, spectrum: Spectrum) -> tuple[float, float] | None:
    """Return an interval outside which |f|^2 holds nothing, or None where its integral does not exist."""
    left, right = domain.left, domain.right
    centres = function.centres(left, right)
    middle = (
        float(np.median(np.concatenate([centres, [np.clip(0.0, left, right)]])))
        if len(centres)
        else float(np.clip(0.0, left, right))
    )
    ends = [left, right]
    for side, sign in ((0, -1.0), (1, 1.0)):
        if np.isfinite(ends[side]):
            continue
        marks = [m for m in (*centres, spectrum.left, spectrum.right) if np.isfinite(m)]
        start = (min(marks) if side == 0 else max(marks)) if marks else middle
        d = np.exp2(np.arange(-60.0, 340.0, 0.25)) * max(
            1e-30, abs(spectrum.right - spectrum.left) if spectrum.unknowns else 1.0
        )
        with np.errstate(all="ignore"):
            values = np.abs(function(start + sign * d))
            shares = values**2 * d
        if not np.isfinite(shares[np.isfinite(values)]).all() or np.isinf(values).any() or np.isnan(values[:400]).any():
            return None
        shares = np.nan_to_num(shares)
        total = max(_densest(domain, function, np.array([*marks, start])), float(shares.max()))
        if shares[-1] > 1e-12 * total:
            return None
        alive = np.flatnonzero(shares > 1e-34 * total)
        ends[side] = start + sign * float(d[min(alive[-1] + 1, len(d) - 1)] if len(alive) else d[0])
    return ends[0], ends[1]


def _pressed(domain: Domain, values: Values, x: Array, norm: float) -> float:
    """Return an estimate of the share of |f|^2 that walls cut off: the density at each wall over a hundredth of the domain."""
    if domain.is_ring:
        return 0.0
    share = 0.0
    for end, place in ((domain.left, 0), (domain.right, -1)):
        if np.isfinite(end):
            share += float(np.abs(values[place]) ** 2 / norm**2 * 0.01 * (x[-1] - x[0]))
    return share


def _of_levels(
    model: Model, spectrum: Spectrum, name: str, parts: tuple[tuple[Function, int, str | None], ...], folder: Path | None
) -> Prepared:
    """Return a sum of levels, of this sheet or of others, with coefficients."""
    terms = [(_jet_of(coefficient), *_level(model, spectrum, index, path, folder)) for coefficient, index, path in parts]

    def raw(y: Array, k: int = 0) -> Values:
        return np.sum([_product(jet, states, row, y, k) for jet, states, row, _ in terms], axis=0)

    grids = [states.places for _, states, _, _ in terms] + ([spectrum.states.places] if spectrum.states is not None else [])
    low, high = max(model.domain.left, min(g[0] for g in grids)), min(model.domain.right, max(g[-1] for g in grids))
    edges = [jet[0].edges(low, high) for jet, _, _, _ in terms]
    places = np.unique(np.concatenate([_inside(g, (low, high)) for g in (*grids, *edges)] + [np.array([low, high])]))
    x, w, missed = resolved_points(raw, places)
    norm = float(np.sqrt((w * np.abs(raw(x)) ** 2).sum()))
    if norm == 0 or not np.isfinite(norm):
        raise SheetError(f"the state `{name}` cannot be normalised: it is zero on the domain", mend="check its coefficients")
    slip = sum(float(np.abs(jet[0](x)).max()) * off for jet, _, _, off in terms) / norm
    cut = _beyond(raw, (*grids, *edges), (low, high)) / norm**2
    return Prepared(name, lambda y: raw(y) / norm, x, w, missed, lambda y, k: raw(y, k) / norm, places, cut, slip)


def _beyond(raw: Callable[[Array], Values], grids: Sequence[Array], ends: tuple[float, float]) -> float:
    """Return the integral of |f|^2 over what levels of other sheets reach beyond the domain."""
    total = 0.0
    every = np.unique(np.concatenate([*grids, np.array(ends)]))
    for places in (every[every <= ends[0]], every[every >= ends[1]]):
        if len(places) > 1:
            x, w = points_between(places)
            total += float((w * np.abs(np.nan_to_num(raw(x))) ** 2).sum())
    return total


Jet = tuple[Function, Function, Function]


def _jet_of(function: Function) -> Jet:
    """Return a function and its first two derivatives between jumps."""
    slope = regular_slope(function)
    return function, slope, regular_slope(slope)


def _product(jet: Jet, states: States, row: int, y: Array, k: int) -> Values:
    """Return the k-th derivative of a coefficient times an eigenstate, by the product rule."""
    if jet[0].constant is not None:
        return complex(jet[0].constant) * states.evaluate(y, k)[row]
    parts = [math.comb(k, j) * jet[j](y) * states.evaluate(y, k - j)[row] for j in range(k + 1)]
    return np.asarray(np.sum(parts, axis=0))


def _level(model: Model, spectrum: Spectrum, index: int, path: str | None, folder: Path | None) -> tuple[States, int, float]:
    """Return the states a level belongs to, its row there, and a bound on its error in norm."""
    if path is None:
        rows = [row for row, level in enumerate(spectrum.levels) if level.index == index]
        if not rows or spectrum.states is None:
            raise SheetError(
                f"level({index}) is not among the {len(spectrum.levels)} levels computed", mend="ask for more with -n"
            )
        return spectrum.states, rows[0], float(slips(spectrum)[rows[0]])
    other = other_sheet(model, path, folder)
    found = solve(other, count=index + 1)
    if found.states is None or len(found.levels) <= index:
        raise SheetError(f"{path} has no level({index})", mend=f"it has {len(found.levels)}")
    return found.states, index, float(slips(found)[index])


def other_sheet(model: Model, path: str, folder: Path | None = None) -> Model:
    """Return the model of another sheet, its path relative to `folder`; SheetError where coordinate or units differ."""
    place = (folder or Path()) / path
    other = build(parse(_text(place)), folder=place.parent)
    if other.domain.coordinate != model.domain.coordinate or _units(other) != _units(model):
        raise SheetError(f"{path} has another coordinate or other units than this sheet", mend="give both sheets the same")
    return other


def _units(model: Model) -> tuple[str, str, str]:
    return model.units.energy, model.units.length, model.units.mass


def _text(place: Path) -> str:
    """Return the text of another sheet; SheetError where it is not a readable, regular, small file."""
    try:
        return decode(read_regular(place, LARGEST_SHEET))
    except (FileNotFoundError, NotRegularError, TooLargeError):
        raise SheetError(
            f"there is no sheet {place.name} here, or it is larger than 1 MB", mend="the path starts at the sheet's folder"
        ) from None
    except OSError as error:
        raise SheetError(f"{place.name} cannot be read: {error.strerror}", mend="check the path and its permissions") from None
