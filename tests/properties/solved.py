"""Solving sheets and comparing levels, for the property tests."""

import numpy as np

from specterm.analysis import Level, Spectrum, solve
from specterm.language import parse
from specterm.model import build

EPS = float(np.finfo(float).eps)


def spectrum(text: str, count: int | None, **more) -> Spectrum:
    """Return `count` levels of a sheet (None: the usual number), none missed."""
    found = solve(build(parse(text)), count=count, **more)
    assert found.complete
    return found


def same(a: Level, b: Level, scale: float = 1.0, shift: float = 0.0) -> None:
    """Assert b = scale a + shift within the reported errors; 4 eps of each size pay for this line's own rounding."""
    expected = a.value * scale + shift
    slack = a.error * abs(scale) + b.error + 4 * EPS * (abs(a.value * scale) + abs(shift))
    off = abs(b.value - expected)
    assert off <= slack, f"level {b.index}: {b.value!r}, expected {expected!r}: off by {off:.1e}, allowed {slack:.1e}"


def all_same(a: Spectrum, b: Spectrum, scale: float = 1.0, shift: float = 0.0) -> None:
    """Assert that every level of b is scale times the one of a, plus shift."""
    assert [level.index for level in a.levels] == [level.index for level in b.levels]
    for one, other in zip(a.levels, b.levels, strict=True):
        same(one, other, scale, shift)


def points(found: Spectrum, order: int = 24) -> tuple[np.ndarray, np.ndarray]:
    """Return places and weights of Gauss rules between the places where the states are smooth."""
    places = found.states.places
    t, w = np.polynomial.legendre.leggauss(order)
    half = np.diff(places)[:, None] / 2
    return (places[:-1, None] + half * (1 + t)).ravel(), (half * w).ravel()


def sign_changes(psi: np.ndarray) -> int:
    """Return how often a sampled wave changes its sign, tails below 1e-7 of its maximum left out."""
    loud = psi[np.abs(psi) > 1e-7 * np.abs(psi).max()]
    return int(np.count_nonzero(np.diff(np.sign(loud))))
