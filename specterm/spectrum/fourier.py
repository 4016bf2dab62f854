"""Levels of operators of higher order than two, where everything is smooth: a Fourier basis on a ring or on a wide box.

Differentiation is exact in the basis; the box and the number of points follow from where the symbol h(x, k), the operator with
d/dx replaced by i k, lies below the energy sought (Boyd, Chebyshev and Fourier Spectral Methods, 2nd ed. 2001, chapter 17).
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np

from specterm.arrays import Array, Values
from specterm.discrete.memory import refuse_above
from specterm.errors import PhysicsError, WorkStopped
from specterm.model import Form, Model
from specterm.stopping import check

MOST_POINTS = 3001
NOISE = 30 * float(np.finfo(float).eps)
"""Rounding of a Rayleigh quotient relative to its parts."""


@dataclass(frozen=True)
class FourierStates:
    """States as coefficients (waves, states) of exp(i k x)/sqrt(length) on (left, right); 0 outside unless it is a ring."""

    waves: Array
    coefficients: Values
    left: float
    right: float

    @property
    def places(self) -> Array:
        """Return ascending places between which the states are smooth and hold few waves."""
        return np.linspace(self.left, self.right, max(2, len(self.waves) // 4))

    @property
    def count(self) -> int:
        """Return the number of states."""
        return self.coefficients.shape[1]

    def evaluate(self, x: Array, derivative: int = 0) -> Values:
        """Return psi or d psi/dx of every state at the places x: shape (states, len(x))."""
        check()
        x = np.asarray(x, dtype=float)
        waves = np.exp(1j * np.outer(x - self.left, self.waves)) / math.sqrt(self.right - self.left)
        if derivative:
            waves = waves * (1j * self.waves) ** derivative
        psi = (waves @ self.coefficients).T
        return np.where((x >= self.left) & (x <= self.right), psi, 0)


@dataclass(frozen=True)
class Box:
    """The interval, the number of points (odd) and the Bloch phase in radians."""

    left: float
    right: float
    points: int
    phase: float = 0.0


@dataclass(frozen=True)
class DenseLevels:
    """Values and errors (levels,), the states, and the box they were computed in.

    `agree` says that a finer box counts alike, `room` is the distance to the next level, `sign` -1 where levels are counted
    from the top.
    """

    values: Array
    error: Array
    states: FourierStates
    box: Box
    agree: bool
    room: float
    sign: int = 1


_Solution = tuple[Array, Values, Array, float]


def dense_levels(model: Model, last: int, tolerance: float, should_stop: Callable[[], bool]) -> DenseLevels:
    """Return levels 0 ... last of the model's operator, from the bottom, or from the top where there is no bottom.

    Raises PhysicsError where there is neither a lowest nor a highest level.
    """
    form, sign = _turned(model, model.operator.form())
    ring = model.domain.is_ring
    refuse_above(16.0 * 8 * (4.0 * last) ** 2, f"computing {last + 1} levels")
    box = _ring_box(model, last) if ring else _open_box(model, form, last)
    before = _solve(form, box, last)
    best: DenseLevels | None = None
    for _ in range(6):
        if should_stop():
            raise WorkStopped("stopped")
        wider = _more(box, ring)
        if wider.points > MOST_POINTS:
            break
        after = _solve(form, wider, last)
        found = _compared(before, after, wider, last)
        box, before = wider, after
        if best is None or found.error.max() < best.error.max():
            best = found
        elif found.error.max() > 30 * best.error.max():
            break
        scale = np.abs(found.values - min(after[3], found.values[0] - abs(found.values[0]) * 1e-3))
        if (found.error <= np.maximum(1e-2 * tolerance * scale, 8 * after[2][: last + 1])).all():
            break
    if best is None:
        raise PhysicsError(f"this needs more than the {MOST_POINTS} waves allowed", mend="ask for fewer levels")
    finer = _more(best.box, ring)
    agree = finer.points <= MOST_POINTS
    if agree:
        again = _solve(form, finer, last, vectors=False)[0]
        slack = 4 * best.error + NOISE * np.abs(again).max()
        top, bottom = best.values[-1] + slack[-1], best.values[0] - slack[0]
        agree = bool((again <= top).sum() >= last + 1 and (again < bottom).sum() == 0)
    return replace(best, values=sign * best.values, agree=agree, sign=sign)


def _compared(before: _Solution, after: _Solution, box: Box, last: int) -> DenseLevels:
    """Return the levels of the wider of two boxes, with the change from the other and rounding as their error."""
    values = after[0][: last + 1]
    error = 2 * np.abs(values - before[0][: last + 1]) + after[2][: last + 1]
    states = FourierStates(_waves(box), _phased(after[1][:, : last + 1], box), box.left, box.right)
    return DenseLevels(values, error, states, box, False, float(after[0][last + 1] - values[-1]))


def _turned(model: Model, form: Form) -> tuple[Form, int]:
    """Return the form and 1, or minus the form and -1 where it has a highest level only; PhysicsError where it has neither.

    The symbol is compared over a wide and a much wider part of the (x, k) plane: what falls on between them has no bottom.
    """
    domain = model.domain
    near, far = np.geomspace(1e-12, 1e6, 37), np.geomspace(1e7, 1e12, 11)
    waves = np.concatenate([[0.0], near, far, -near, -far])
    if domain.is_ring:
        x = domain.left + (domain.right - domain.left) * np.linspace(0.01, 0.99, 37)
        waves = waves / (domain.right - domain.left)
        wide = np.ones(len(x), dtype=bool)
    else:
        x = np.concatenate([near, far, -near, -far])
        wide = np.abs(x) <= 1e6
    inner = np.abs(waves) <= np.abs(waves).max() * 1e-6 * (1 + 1e-9)
    with np.errstate(all="ignore"):
        symbol = np.nan_to_num(_symbol(form, x, waves), nan=0.0, posinf=1e300, neginf=-1e300)
    middle = symbol[np.ix_(wide, inner)]
    falls = symbol.min() < 10 * min(float(middle.min()), 0.0) and symbol.min() < 0
    rises = symbol.max() > 10 * max(float(middle.max()), 0.0) and symbol.max() > 0
    if not falls:
        return form, 1
    if not rises:
        return Form(tuple((key, -coefficient) for key, coefficient in form.terms)), -1
    raise PhysicsError(
        "the operator is not bounded below and has no lowest level, nor a highest one",
        mend="check the signs of the highest powers of p and of the coordinate",
    )


def _more(box: Box, ring: bool) -> Box:
    """Return a box with more points, and on an open line a wider one."""
    points = int(box.points * (1.35 if ring else 1.6)) // 2 * 2 + 1
    middle, half = (box.left + box.right) / 2, (box.right - box.left) / 2 * (1.0 if ring else 1.18)
    return replace(box, left=box.left if ring else middle - half, right=box.right if ring else middle + half, points=points)


def _waves(box: Box) -> Array:
    """Return the wave numbers of the basis, shape (points,)."""
    numbers = np.arange(box.points) - box.points // 2
    return np.asarray((2 * math.pi * numbers + box.phase) / (box.right - box.left), dtype=np.float64)


def _solve(form: Form, box: Box, last: int, *, vectors: bool = True) -> _Solution:
    """Return all values, vectors in the wave basis, bounds on the rounding in each, and the least of the function part.

    The values up to `last` are Rayleigh quotients taken term by term, whose rounding goes with their parts, not with the
    largest wave.
    """
    n = box.points
    x = box.left + (box.right - box.left) * np.arange(n) / n
    waves = _waves(box)
    to_places = np.exp(1j * np.outer(x - box.left, waves)) / math.sqrt(n)
    matrix = np.zeros((n, n), dtype=complex)
    floor, terms = 0.0, []
    for (j, k), coefficient in form.terms:
        check()
        values = coefficient(x)
        if not np.isfinite(values).all():
            raise PhysicsError(
                f"the operator has no finite value at {x[~np.isfinite(values)][0]:.6g}", mend="narrow the domain"
            )
        terms.append((values, (1j * waves) ** j, (1j * waves) ** k))
        inner = (to_places.conj().T * values) @ to_places
        matrix += np.conj((1j * waves) ** j)[:, None] * inner * (1j * waves) ** k
        floor += float(np.min(values.real)) if j == k == 0 else 0.0
    matrix = (matrix + matrix.conj().T) / 2
    check()
    if not vectors:
        return np.asarray(np.linalg.eigvalsh(matrix), dtype=np.float64), matrix[:0], np.zeros(1), floor
    values, states = np.linalg.eigh(matrix)
    if last + 1 >= len(values):
        raise PhysicsError("more levels are asked for than the basis holds", mend="ask for fewer levels")
    some = states[:, : last + 2]
    parts = [(to_places @ (a[:, None] * some)).conj() * (c[:, None] * (to_places @ (b[:, None] * some))) for c, a, b in terms]
    values[: last + 2] = np.sum([part.sum(axis=0).real for part in parts], axis=0)
    noise = NOISE * np.sum([np.abs(part).sum(axis=0) for part in parts], axis=0)
    return values, states, noise, floor


def _phased(states: Values, box: Box) -> Values:
    """Return the states with phases that make them real where they can be, positive on the first lobe from the left."""
    waves, parts = _waves(box), []
    for x in np.array_split(np.linspace(box.left, box.right, 4 * box.points), 1 + box.points // 250):
        check()
        parts.append(np.exp(1j * np.outer(x - box.left, waves)) @ states)
    psi = np.concatenate(parts)
    size = np.abs(psi)
    largest = psi[np.argmax(size, axis=0), np.arange(psi.shape[1])]
    psi = psi * np.abs(largest) / largest
    first = np.argmax(size > 1e-4 * size.max(axis=0), axis=0)
    sign = np.sign(psi[first, np.arange(psi.shape[1])].real)
    return states * (np.abs(largest) / largest) * np.where(sign == 0, 1, sign)


def _ring_box(model: Model, last: int) -> Box:
    """Return the first box of a ring: some points for each level and for the coefficients."""
    domain = model.domain
    return Box(domain.left, domain.right, 2 * (last + 24) + 1, 2 * math.pi * (domain.phase or 0.0))


def _open_box(model: Model, form: Form, last: int) -> Box:
    """Return a box on the open line with a margin around the region where the symbol is below the energy of level `last`."""
    domain = model.domain
    if domain.left_end != "open" or domain.right_end != "open":
        raise PhysicsError(
            "operators of order above two are available on the open line and on rings only: psi = 0 alone fixes no wall",
            mend="use x in (-inf, inf) or x in ring(a, b)",
        )
    marks = np.unique(np.concatenate([c.centres(domain.left, domain.right) for _, c in form.terms] or [np.zeros(1)]))
    middle = float(np.median(marks)) if len(marks) else 0.0
    spread = float(np.ptp(marks)) if len(marks) else 0.0
    out = np.geomspace(1e-12 * max(spread, 1e-12 * abs(middle), 1e-18), 1e18, 400)
    x = np.concatenate([middle - out[::-1], middle + out])
    waves = np.concatenate([-np.geomspace(1e-14, 1e18, 260)[::-1], np.geomspace(1e-14, 1e18, 260)])
    with np.errstate(all="ignore"):
        symbol = _symbol(form, x, waves)
    symbol = np.where(np.isnan(symbol), np.inf, symbol)
    energy = _energy(symbol, x, waves, last + 2.5)
    inside = symbol <= energy
    rows, columns = np.flatnonzero(inside.any(axis=1)), np.flatnonzero(inside.any(axis=0))
    if rows[0] == 0 or rows[-1] == len(x) - 1:
        raise PhysicsError(
            "the operator has a continuous spectrum, which for orders above two is not available yet",
            mend="use a confining potential",
        )
    left, right = x[rows[0] - 1], x[rows[-1] + 1]
    reach = np.abs(waves[columns]).max()
    width = right - left
    pad = 0.25 * width + 6 / reach
    reach = 1.5 * reach + 6 / width
    points = int((width + 2 * pad) * reach / math.pi) // 2 * 2 + 25
    if points > MOST_POINTS:
        raise PhysicsError(f"this needs {points} waves, more than the {MOST_POINTS} allowed", mend="ask for fewer levels")
    return Box(left - pad, right + pad, points)


def _symbol(form: Form, x: Array, waves: Array) -> Array:
    """Return the real part of the symbol, shape (places, waves)."""
    total = np.zeros((len(x), len(waves)), dtype=complex)
    for (j, k), coefficient in form.terms:
        total += coefficient(x)[:, None] * (np.conj((1j * waves) ** j) * (1j * waves) ** k)
    return total.real


def _energy(symbol: Array, x: Array, waves: Array, count: float) -> float:
    """Return an energy below which the symbol covers 2 pi times `count` of the (x, k) plane."""
    area = np.gradient(x)[:, None] * np.gradient(waves)[None, :] / (2 * math.pi)
    order = np.argsort(symbol, axis=None)
    covered = np.cumsum(area.ravel()[order])
    place = int(np.searchsorted(covered, count))
    return float(symbol.ravel()[order][min(place, len(order) - 1)])
