"""A problem made ready to be solved: what its ends do, where its continuum begins, how high to look and how far out."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from specterm.arrays import Array
from specterm.discrete.elements import Coefficients
from specterm.discrete.ends import FarEnd, NearEnd, far_end, near_end, refuse_inner_poles
from specterm.discrete.mesh import Edge
from specterm.discrete.meshing import Span
from specterm.discrete.problem import Problem
from specterm.discrete.scan import Scan, energy_for, scan
from specterm.errors import PhysicsError

FINER = 8
"""Into so many pieces the intervals of the scan are cut where the decay of a state is added up."""
DEEP = 20.0
"""An open domain is cut where psi has fallen by exp(-DEEP) at least: what is lost then is of order exp(-2 DEEP) = 4e-18."""


@dataclass(frozen=True)
class Setting:
    """A problem looked over.

    The scan, the same with the effective potential for what happens far out (`outer`), the ends classified, the Langer term
    `extra` (n,) on the scan's places (K/4d^2 at a singular end, twice that where psi falls off slower than d), `floor` (an
    energy below all levels, roughly the minimum of V) and `threshold` (inf where the spectrum is discrete).
    """

    problem: Problem
    look: Scan
    outer: Scan
    ends: tuple[NearEnd | FarEnd | None, NearEnd | FarEnd | None]
    extra: Array
    floor: float
    threshold: float

    @property
    def coefficients(self) -> Coefficients:
        """Return the coefficients with V measured from the floor."""
        problem, floor = self.problem, self.floor
        return Coefficients(
            problem.stiffness,
            problem.slope,
            lambda x: problem.potential(x) - floor,
            problem.noise_potential,
            problem.noise_stiffness,
            floor,
        )

    def energy(self, count: float, span: Span | None = None) -> float:
        """Return an energy under the threshold that should have `count` levels below it, or the threshold itself."""
        look, extra = self.look, self.extra
        ceiling = self.threshold
        if span is not None:
            inside = (look.x >= span.left) & (look.x <= span.right)
            if not inside.any():
                raise PhysicsError(
                    f"places between {span.left:.9g} and {span.right:.9g} cannot be told apart",
                    mend="move the domain nearer to 0",
                )
            look, extra = Scan(look.x[inside], look.stiffness[inside], look.potential[inside]), extra[inside]
            ceiling = math.inf
        return energy_for(look, count, extra, self.floor, ceiling)


def setting(problem: Problem) -> Setting:
    """Look the problem over; PhysicsError where it has no lowest level or no value."""
    ends: tuple[NearEnd | FarEnd | None, ...] = (None, None)
    if not problem.ring:
        ends = tuple(_end(problem, side) for side in (0, 1))
    refuse_inner_poles(problem)
    look = scan(problem)
    extra = np.zeros(len(look.x))
    for end, place in zip(ends, (problem.left, problem.right), strict=True):
        if isinstance(end, NearEnd) and end.kind in ("power", "steep"):
            share = 0.5 if end.kind == "power" and end.power < 1 else 0.25
            extra = extra + share * look.stiffness / (look.x - place) ** 2
    height = (look.potential + extra)[np.isfinite(look.potential)]
    if not len(height):
        raise PhysicsError("the potential is nowhere a finite number", mend="mend the expression, or move the domain")
    floor = float(height.min())
    if not ends[0] and not ends[1]:
        floor = float(look.potential.min())
    limits = [end.limit for end in ends if isinstance(end, FarEnd)]
    outer = look
    if problem.effective is not problem.potential:
        outer = Scan(look.x, look.stiffness, problem.effective(look.x))
    return Setting(problem, look, outer, (ends[0], ends[1]), extra, floor, min(limits, default=math.inf))


def _end(problem: Problem, side: int) -> NearEnd | FarEnd:
    kind = problem.left_end if side == 0 else problem.right_end
    return far_end(problem, side) if kind == "open" else near_end(problem, side)


def span_at(ready: Setting, energy: float, actions: tuple[float, float] = (DEEP, DEEP)) -> Span | None:
    """Return the span on which states of this energy have died at each end that is cut, or None where they never do."""
    places, edges = [], []
    for side in (0, 1):
        end = ready.ends[side]
        place = ready.problem.left if side == 0 else ready.problem.right
        if isinstance(end, NearEnd) and end.kind != "steep":
            power = end.power if end.kind == "power" else None
            places.append(place)
            edges.append(Edge(end.kind == "wall", power, end.alpha))
        elif end is None:
            places.append(place)
            edges.append(Edge(False))
        else:
            cut = _death(ready, energy, side, actions[side])
            if cut is None:
                return None
            places.append(cut)
            edges.append(Edge(True))
    return Span(places[0], places[1], edges[0], edges[1])


def _death(ready: Setting, energy: float, side: int, action: float) -> float | None:
    """Return where the decay outward from the outermost turning point reaches `action` powers of e."""
    look = ready.outer
    decay = look.decay(energy)
    decay[~np.isfinite(decay)] = 1e300
    allowed = np.flatnonzero(look.potential < energy)
    start = len(look.x) // 2 if len(allowed) == 0 else int(allowed[0] if side == 0 else allowed[-1])
    part = slice(start, None) if side == 1 else slice(start, None, -1)
    found = _grown(look.x[part], decay[part], action)
    if found is None:
        return None
    last = found[0]
    coarse = look.x[part][: last + 1]
    x = np.append((coarse[:-1, None] + np.diff(coarse)[:, None] * np.arange(FINER) / FINER).ravel(), coarse[-1])
    fine = Scan(x, ready.problem.stiffness(x), ready.problem.effective(x)).decay(energy)
    fine[~np.isfinite(fine)] = 1e300
    again = _grown(x, fine, action)
    return again[1] if again is not None else float(x[-1])


def _grown(x: Array, rate: Array, action: float) -> tuple[int, float] | None:
    """Return the first place of x, by number, up to which the rate adds up to `action`, and where it does; None if nowhere."""
    with np.errstate(all="ignore"):
        grown = np.concatenate([[0.0], np.cumsum(np.minimum((rate[1:] + rate[:-1]) / 2, 1e300) * np.abs(np.diff(x)))])
    beyond = np.flatnonzero(grown >= action)
    if len(beyond) == 0:
        return None
    last = int(beyond[0])
    share = (action - grown[last - 1]) / (grown[last] - grown[last - 1])
    return last, float(x[last - 1] + share * (x[last] - x[last - 1]))
