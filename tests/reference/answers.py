"""Solving a sheet for the reference tests, each sheet once a session, and comparing levels with printed digits."""

from decimal import Decimal
from functools import cache
from pathlib import Path

import numpy as np

from specterm.analysis import Spectrum, solve
from specterm.language import parse
from specterm.model import Model, build

EPS = float(np.finfo(float).eps)


@cache
def ready(text: str, folder: Path | None = None) -> Model:
    """Return the model of a sheet."""
    return build(parse(text), folder=folder)


@cache
def spectrum(text: str, count: int, near: float | None = None, folder: Path | None = None) -> Spectrum:
    """Return `count` levels of a sheet."""
    return solve(ready(text, folder), count=count, near=near)


def unit(printed: str) -> float:
    """Return one unit of the last digit of a printed number: sources round or truncate, so a whole unit is granted."""
    return float(Decimal(1).scaleb(Decimal(printed).as_tuple().exponent))


def agree(found: Spectrum, printed: dict[int, str], scale: float = 1.0, offset: float = 0.0) -> None:
    """Assert that levels are `scale * printed + offset` within their reported errors and the source's last digit.

    4 eps of the sizes that were added here allow for the rounding of `scale` and `offset` themselves.
    """
    assert found.complete
    by_index = {level.index: level for level in found.levels}
    for index, text in printed.items():
        level = by_index[index]
        expected = scale * float(text) + offset
        rounding = 4 * EPS * (abs(scale * float(text)) + abs(offset))
        slack = level.error + unit(text) * abs(scale) + rounding
        assert level.kind in {"bound", "band"}, f"level {index} is {level.kind}"
        off = abs(level.value - expected)
        assert off <= slack, f"level {index}: {level.value!r}, expected {expected!r}: off by {off:.1e}, allowed {slack:.1e}"


def within(found: float, printed: str, error: float = 0.0) -> None:
    """Assert that a number derived from levels is as printed, within `error` and one unit of the printed last digit."""
    off = abs(found - float(printed))
    slack = error + unit(printed) + 4 * EPS * abs(float(printed))
    assert off <= slack, f"{found!r}, expected {printed}: off by {off:.1e}, allowed {slack:.1e}"


def step(found: Spectrum, low: int, high: int) -> tuple[float, float]:
    """Return the distance of two levels and a bound on its error."""
    by_index = {level.index: level for level in found.levels}
    a, b = by_index[low], by_index[high]
    return b.value - a.value, a.error + b.error


def wave(found: Spectrum, x: np.ndarray, derivative: int = 0) -> np.ndarray:
    """Return all eigenstates at the places x, shape (levels, n)."""
    return found.states.evaluate(x, derivative)


def points(*places: np.ndarray, order: int = 24) -> tuple[np.ndarray, np.ndarray]:
    """Return places and weights of Gauss rules between all the places given, for integrals of products of eigenstates."""
    low, high = max(p[0] for p in places), min(p[-1] for p in places)
    every = np.unique(np.concatenate(places))
    every = every[(every >= low) & (every <= high)]
    t, w = np.polynomial.legendre.leggauss(order)
    half = np.diff(every)[:, None] / 2
    return (every[:-1, None] + half * (1 + t)).ravel(), (half * w).ravel()
