"""The number of bound levels of a problem with a continuum, counted at the threshold itself."""

from __future__ import annotations

import math

import numpy as np

from specterm.discrete.chain import count_below
from specterm.discrete.elements import condense, grid
from specterm.discrete.ends import FarEnd
from specterm.discrete.mesh import Edge
from specterm.discrete.meshing import Span, build
from specterm.spectrum.setting import DEEP, Setting, span_at

MARGIN = 1e-13
"""A state nearer to the threshold than this share of the depth is one that rounding made: not bound."""


def bound_levels(ready: Setting) -> int | None:
    """Return how many levels lie below the threshold, or None where there are infinitely many.

    A tail that falls faster than 1/x^2 lets a function go to zero at no cost far out, so the form on the mesh with free ends
    has as many negative directions as the whole one has (Sylvester); a 1/x^2 tail of strength c adds its least cost, -K s/X
    with s = (1 - sqrt(1 + 4 c))/2, at the end X (lengths by the integral of dx/sqrt(K)).
    """
    if any(isinstance(end, FarEnd) and end.limit == ready.threshold and end.endless for end in ready.ends):
        return None
    if ready.threshold - ready.floor <= MARGIN * abs(ready.threshold):
        return 0
    places, edges = [], []
    for side in (0, 1):
        end = ready.ends[side]
        if isinstance(end, FarEnd) and end.limit == ready.threshold:
            place = _reach(ready, end, side)
            places.append(place)
            edges.append(Edge(False, pull=_pull(ready, end, place, side)))
        else:
            one = _other(ready, side)
            places.append(one[0])
            edges.append(one[1])
    span = Span(places[0], places[1], edges[0], edges[1])
    mesh = build(ready.problem, ready.look, ready.coefficients, span, ready.threshold)
    condensed = condense(mesh, grid(mesh, ready.coefficients))
    height = ready.threshold - ready.floor
    return int(count_below(condensed, np.array([height * (1 - MARGIN)]))[0])


def _pull(ready: Setting, end: FarEnd, place: float, side: int) -> float:
    """Return the least cost of a tail beyond the place, times |psi|^2 there: sqrt(K) w'/w and K'/4, psi = w/K^(1/4)."""
    at = np.array([place])
    stiffness, slope = float(ready.problem.stiffness(at)[0]), float(ready.problem.slope(at)[0])
    power = (1 - math.sqrt(max(0.0, 1 + 4 * end.tail))) / 2
    return -math.sqrt(stiffness) * power / end.local + (slope if side == 1 else -slope) / 4


def _reach(ready: Setting, end: FarEnd, side: int) -> float:
    """Return a place where the tail is gone, beyond every place where a coefficient jumps or is centred."""
    marks = np.concatenate([ready.problem.edges, ready.problem.centres])
    marks = marks[np.isfinite(marks)]
    outer = (marks.min() if side == 0 else marks.max()) if len(marks) else 0.0
    width = max(float(np.ptp(marks)) if len(marks) else 0.0, abs(end.reach - outer)) or 1.0
    return float(min(end.reach, outer - 0.1 * width) if side == 0 else max(end.reach, outer + 0.1 * width))


def _other(ready: Setting, side: int) -> tuple[float, Edge]:
    """Return place and edge of an end above the threshold (cut where psi has died) or of a finite end."""
    apart = Setting(ready.problem, ready.look, ready.outer, _alone(ready, side), ready.extra, ready.floor, ready.threshold)
    span = span_at(apart, ready.threshold, (2 * DEEP, 2 * DEEP))
    if span is None:
        raise ArithmeticError("an end above the threshold must close")
    return (span.left, span.left_edge) if side == 0 else (span.right, span.right_edge)


def _alone(ready: Setting, side: int):  # type: ignore[no-untyped-def]  # noqa: ANN202 - a pair of ends
    """Return the ends with the other one left out."""
    return (ready.ends[0], None) if side == 0 else (None, ready.ends[1])
