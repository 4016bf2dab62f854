"""Sheets solved, meshes made by hand, and integrals of states, for the tests of the engine."""

from functools import cache

import numpy as np

from specterm.discrete.chain import count_below
from specterm.discrete.elements import condense, grid
from specterm.discrete.mesh import Edge, Mesh
from specterm.discrete.reduce import problem_of
from specterm.language import parse
from specterm.model import build
from specterm.spectrum import solve
from specterm.spectrum.isolate import Ruler
from specterm.spectrum.setting import setting
from specterm.spectrum.vectors import solve_levels

EPS = float(np.finfo(float).eps)


@cache
def model(text):
    """Return the model of a sheet."""
    return build(parse(text))


@cache
def spectrum(text, count=None, **more):
    """Return levels of a sheet."""
    return solve(model(text), count=count, **more)


@cache
def ready(text):
    """Return a sheet's problem, looked over."""
    return setting(problem_of(model(text)))


def by_hand(text, places, order, count, left=None, right=None):
    """Return the lowest levels of a sheet on a mesh made by hand (walls unless said), V measured from the floor.

    Only those under the lowest level of an element's interior can be solved for: at most `count`, or None.
    """
    here = ready(text)
    mesh = Mesh(np.asarray(places, dtype=float), order, left or Edge(True), right or Edge(True), here.problem.phase)
    small = condense(mesh, grid(mesh, here.coefficients))
    least, most = float((small.grid.potential / small.grid.mass).min()), float(small.poles[:, 0].min()) * (1 - 1e-9)
    known = int(count_below(small, np.array([most]))[0])
    return solve_levels(small, 0, min(count, known) - 1, least - 10.0, most, Ruler(0.0)) if known else None


def points(found, order=24):
    """Return places and weights of Gauss rules between the places where the states are smooth."""
    t, w = np.polynomial.legendre.leggauss(order)
    places = found.states.places
    half = np.diff(places)[:, None] / 2
    return (places[:-1, None] + half * (1 + t)).ravel(), (half * w).ravel()


def gram(found):
    """Return the overlaps of all states."""
    x, w = points(found)
    psi = found.states.evaluate(x)
    return psi.conj() @ (w[:, None] * psi.T)


def within(found, expected, rounding=0.0):
    """Assert that all levels are as expected within their errors; `rounding` is that of the expected values."""
    for level, value in zip(found.levels, np.asarray(expected).tolist(), strict=True):
        off, slack = abs(level.value - value), level.error + 4 * EPS * abs(value) + rounding
        assert off <= slack, f"level {level.index}: {level.value!r}, expected {value!r}: off by {off:.1e}, allowed {slack:.1e}"
