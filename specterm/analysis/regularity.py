"""Where an observable can act on a wave: points that resolve it, and whether the result can be normalised."""

from __future__ import annotations

import cmath
import math
from collections.abc import Callable

import numpy as np

from specterm.analysis.observables import HIGHEST, Observable
from specterm.analysis.prepared import Prepared
from specterm.analysis.quadrature import Rule, resolve
from specterm.arrays import Array, Values
from specterm.discrete.quadrature import gauss_legendre
from specterm.errors import PhysicsError
from specterm.model import Model

JUMP = 1e-6
"""A wave or flux that jumps by this share of its largest value is taken to jump."""
DIVERGES = 1e-3
"""A share of the norm of A psi that halving the pieces 60 times does not resolve means that it has no norm."""
PRECISION = (1e-12, 1e-9, 1e-7)
"""How finely A psi is resolved by the order of A: derivatives of eigenstates carry noise."""
MOST_PIECES = 6_000
MOST_CENTRES = 64

Wave = Callable[[Array], Values]


def rule_for(asked: Observable, wave: Prepared) -> Rule:
    """Return points and weights that resolve the wave, each function of the observable times it, and A psi.

    `missed` of the rule has one entry for each, in that order.
    """
    ends = (float(wave.places[0]), float(wave.places[-1]))
    functions = [f for f in asked.functions() if f.constant is None]
    marks = [f.edges(*ends) for f in functions] + [f.centres(*ends)[:MOST_CENTRES] for f in functions]
    places = np.unique(np.concatenate([wave.places, *marks]))
    places = places[(places >= ends[0]) & (places <= ends[1])]
    scale = _scale(asked, wave, places)

    def every(x: Array) -> Values:
        psi = wave.jet(x, 0)
        with np.errstate(all="ignore"):
            products = [np.nan_to_num(f(x) * psi, nan=0.0, posinf=0.0, neginf=0.0) for f in functions]
        return np.array([psi, *products, asked.apply(wave.jet, x) + scale * psi])

    return resolve(every, places, [1e-13, *[1e-12] * len(functions), PRECISION[asked.order]], MOST_PIECES)


def _scale(asked: Observable, wave: Prepared, places: Array) -> float:
    """Return the size of the parts of A psi beside that of psi, so that noise where they are nothing is not resolved."""
    x, weight = _coarse(places)
    norm = float((weight * np.abs(wave.jet(x, 0)) ** 2).sum())
    total = natural_size(asked, places) ** 2
    with np.errstate(all="ignore"):
        for k, c in enumerate(asked.parts):
            values = np.nan_to_num(c(x), nan=0.0, posinf=0.0, neginf=0.0)
            total += float((weight * np.abs(values * wave.jet(x, k)) ** 2).sum()) / norm
    return math.sqrt(total) if math.isfinite(total) else 0.0


def natural_size(asked: Observable, places: Array) -> float:
    """Return the size of an observable by the median of its functions, a derivative counted as one over the extent."""
    x, weight = _coarse(places)
    total = 0.0
    with np.errstate(all="ignore"):
        for k, c in enumerate(asked.parts):
            values = np.nan_to_num(c(x), nan=0.0, posinf=0.0, neginf=0.0)
            order = np.argsort(np.abs(values))
            middle = order[np.searchsorted(np.cumsum(weight[order]), weight.sum() / 2)]
            total += float(np.abs(values[middle]) ** 2) / float(places[-1] - places[0]) ** (2 * k)
    return math.sqrt(total)


def _coarse(places: Array) -> tuple[Array, Array]:
    """Return points and weights of a Gauss rule of 8 points between the places."""
    t, w = gauss_legendre(8)
    half = np.diff(places)[:, None] / 2
    return (places[:-1, None] + half * (1 + t)).ravel(), (half * w).ravel()


def why_infinite(model: Model, asked: Observable, wave: Prepared, rule: Rule) -> list[str]:
    """Return why A psi cannot be normalised, in words: psi jumps, its flux does, or it is too steep at a singular place.

    Raises PhysicsError where even the mean is infinite.
    """
    notes = [] if asked.order == 0 else _jumps(model, asked, wave, rule)
    if not notes and rule.missed[-1] > DIVERGES:
        notes.append(f"the spread is infinite: `{asked.text}` makes of {wave.name} a function without norm")
    return notes


def _jumps(model: Model, asked: Observable, wave: Prepared, rule: Rule) -> list[str]:
    """Look for jumps of the state, then of what the observable differentiates next."""
    places, shift = _suspects(asked, wave)
    watched: tuple[tuple[str, Wave], ...] = (
        ("the state", lambda x: wave.jet(x, 0)),
        ("its slope", lambda x: asked.flux(wave.jet, x)),
    )
    steepest = max((float(np.abs(np.nan_to_num(c(rule.x))).max()) for (j, k), c in asked.terms if j + k > 1), default=0.0)
    floor = steepest * float(np.abs(wave.jet(rule.x, 0)).max()) / (rule.x[-1] - rule.x[0])
    for what, values in watched:
        largest = max(float(np.abs(values(rule.x)).max()), floor if what == "its slope" else 0.0)
        jump = np.abs(values(places + shift) - values(places - shift))
        where = [float(places[np.argmax(jump)])] if len(jump) and jump.max() > JUMP * largest else []
        where += _at_ends(model, asked, values, what, (largest, wave))
        if where and what == "the state" and asked.order == HIGHEST:
            raise PhysicsError(
                f"the mean of `{asked.text}` is infinite: {wave.name} jumps at {where[0]:.6g}",
                mend="prepare a state that is continuous, and zero at walls",
            )
        if where:
            return [f"the spread is infinite: {what} jumps at {where[0]:.6g}"]
    return []


def tiny_share(asked: Observable, wave: Prepared, rule: Rule) -> float:
    """Return the share of the mean in pieces shorter than 1e-14 of the state's extent: large where the integral diverges."""
    density = np.zeros(len(rule.x))
    psi = np.abs(wave.jet(rule.x, 0))
    with np.errstate(all="ignore"):
        for (j, k), c in asked.terms:
            density += np.nan_to_num(np.abs(c(rule.x) * wave.jet(rule.x, j) * wave.jet(rule.x, k)), posinf=0.0)
    extent = float((rule.w * psi**2).sum() ** 2 / (rule.w * psi**4).sum())
    tiny = np.repeat(np.diff(rule.places) < 1e-14 * extent, len(rule.x) // (len(rule.places) - 1))
    whole = float((rule.w * density).sum())
    return float((rule.w * density)[tiny].sum()) / whole if whole > 0 else 0.0


def _suspects(asked: Observable, wave: Prepared) -> tuple[Array, Array]:
    """Return the places where something may jump, and a distance small beside what lies around each."""
    ends = (float(wave.places[0]), float(wave.places[-1]))
    places = np.unique(np.concatenate([wave.places, *(f.edges(*ends) for f in asked.functions())]))
    gaps = np.diff(places)
    shift = np.maximum(1e-8 * np.minimum(gaps[1:], gaps[:-1]), 4 * np.spacing(np.abs(places[1:-1])))
    return places[1:-1], shift


def _at_ends(model: Model, asked: Observable, values: Wave, what: str, known: tuple[float, Prepared]) -> list[float]:
    """Return the ends of the domain where a wave that should vanish does not, or the two ends of a ring do not meet."""
    largest, wave = known
    domain = model.domain
    ends = np.array([wave.places[0], wave.places[-1]])
    if domain.is_ring:
        first, last = values(ends)
        turn = cmath.exp(2j * math.pi * (domain.phase or 0.0))
        return [domain.left] if abs(last - turn * first) > JUMP * largest else []
    held = "wall" if what == "the state" else "free"
    if held == "free" and asked.order < HIGHEST:
        return []
    leading = asked.parts[-1]
    return [
        float(place)
        for place, end, kind in zip(ends, (domain.left, domain.right), (domain.left_end, domain.right_end), strict=True)
        if kind == held
        and place == end
        and np.abs(leading(place)) > 0
        and np.abs(values(np.array([place]))[0]) > JUMP * largest
    ]
