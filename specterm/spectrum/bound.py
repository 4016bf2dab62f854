"""The number of bound levels of a problem with a continuum, counted at the threshold itself."""

from __future__ import annotations

import math

import numpy as np

from specterm.discrete.chain import count_below
from specterm.discrete.elements import condense, grid
from specterm.discrete.ends import FarEnd, NearEnd
from specterm.discrete.mesh import Edge
from specterm.discrete.meshing import Span, build
from specterm.errors import PhysicsError
from specterm.spectrum.setting import DEEP, Setting, span_at

MARGIN = 1e-13
"""A state nearer to the threshold than this share of the depth is one that rounding made: not bound."""


def bound_levels(ready: Setting) -> int | None:
    """Return how many levels lie below the threshold, or None where there are infinitely many.

    A tail that falls faster than 1/x^2 lets a function go to zero at no cost far out, so the form on the mesh with free ends
    has as many negative directions as the whole one has (Sylvester); what is left of a slower tail adds its least cost at
    the end (`tail_cost`; lengths by the integral of dx/sqrt(K)).
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
            one = other_end(ready, side)
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
    return math.sqrt(stiffness) * tail_cost(end.tail, end.fall) / end.local + (slope if side == 1 else -slope) / 4


def tail_cost(tail: float, fall: float) -> float:
    """Return -t w'(t)/w(t) at the place t for the solution at the threshold that stays bounded, the tail being c/t^fall.

    `tail` is c t^(2 - fall). For an inverse square w = t^s; else w = f(z), z^2 = 4 |tail|/(fall - 2)^2, with the series of the
    Bessel function J or I of order 1/(fall - 2) without its power (Abramowitz and Stegun 9.1.53); a repulsion that falls more
    slowly ends all decay like exp(-integral of its root).
    """
    if tail == 0 or math.isinf(fall):
        return 0.0
    if abs(fall - 2) < 0.05:
        return -(1 - math.sqrt(max(0.0, 1 + 4 * tail))) / 2
    if fall < 2:
        return math.sqrt(max(0.0, tail))
    order, quarter = 1 / (fall - 2), tail / (fall - 2) ** 2
    term, value, slope = 1.0, 1.0, 0.0
    for k in range(1, 200):
        term *= quarter / (k * (order + k))
        value += term
        slope += 2 * k * term
        if abs(term) < 1e-17 * abs(value):
            break
    return (fall - 2) / 2 * slope / value


def _reach(ready: Setting, end: FarEnd, side: int) -> float:
    """Return a place where the tail is gone, beyond every place where a coefficient jumps or is centred."""
    marks = np.concatenate([ready.problem.edges, ready.problem.centres])
    marks = marks[np.isfinite(marks)]
    outer = (marks.min() if side == 0 else marks.max()) if len(marks) else 0.0
    width = max(float(np.ptp(marks)) if len(marks) else 0.0, abs(end.reach - outer)) or 1.0
    return float(min(end.reach, outer - 0.1 * width) if side == 0 else max(end.reach, outer + 0.1 * width))


def other_end(ready: Setting, side: int) -> tuple[float, Edge]:
    """Return place and edge of an end above the threshold (cut where psi has died) or of a finite end."""
    apart = Setting(ready.problem, ready.look, ready.outer, _alone(ready, side), ready.extra, ready.floor, ready.threshold)
    span = span_at(apart, ready.threshold, (2 * DEEP, 2 * DEEP))
    if span is None:
        raise PhysicsError(
            "states at the threshold reach farther out than numbers go", mend="choose units that make lengths nearer to 1"
        )
    return (span.left, span.left_edge) if side == 0 else (span.right, span.right_edge)


def _alone(ready: Setting, side: int) -> tuple[NearEnd | FarEnd | None, NearEnd | FarEnd | None]:
    """Return the ends with the other one left out."""
    return (ready.ends[0], None) if side == 0 else (None, ready.ends[1])
