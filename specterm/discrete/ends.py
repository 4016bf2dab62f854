"""What the coefficients do at the ends of the domain: singular ends, and the far ends of an open domain."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from specterm.arrays import Array
from specterm.discrete.problem import Problem
from specterm.errors import PhysicsError

NEAREST = 1e-250
"""Places nearer to an end than this are taken for the end itself."""
FEWEST = 3
"""With fewer values at doubling distances nothing can be said about an open end."""
STEEP = 6.0
"""From this power of the distance on, psi near a singular end is cut off where it has died instead of factored."""


@dataclass(frozen=True)
class NearEnd:
    """A finite end.

    `kind`: "wall" (psi = 0), "free" (zero slope), "power" (psi ~ d**power, K ~ d**alpha) or "steep" (psi dies before it).
    """

    kind: str
    power: float = 0.0
    alpha: float = 0.0


@dataclass(frozen=True)
class FarEnd:
    """An open end.

    `limit` is what V tends to (+inf where it confines), `reach` the place beyond which V - limit is lost in rounding. `local`
    is the distance to there measured by the integral of dx/sqrt(K), `tail` is (V - limit) times its square, `fall` the power
    with which V - limit falls there; `endless` says
    that infinitely many levels lie below the limit.
    """

    limit: float
    reach: float
    tail: float
    fall: float
    local: float
    endless: bool


def near_end(problem: Problem, side: int) -> NearEnd:
    """Classify the left (side 0) or right (side 1) finite end by the exponents of the equation there (Frobenius)."""
    end, kind = (problem.left, problem.left_end) if side == 0 else (problem.right, problem.right_end)
    sign = 1.0 if side == 0 else -1.0
    room = room_at(problem, end, side)
    smallest = max(room * 2.0**-40, abs(end) * 2.0**-26)
    d = np.geomspace(smallest, max(room * 2.0**-6, smallest * 4), 24)
    x = end + sign * d
    d = np.abs(x - end)
    with np.errstate(all="ignore"):
        stiffness, potential = problem.stiffness(x), problem.potential(x)
        alpha = 0.0 if not np.isfinite(stiffness[0]) else _power(d[0] * sign * problem.slope(x[:1])[0] / stiffness[0])
    blown = np.flatnonzero(~np.isfinite(potential))
    if len(blown) and blown[-1] + 1 < len(d) and potential[blown[-1] + 1] > 1e100:
        return NearEnd("steep")
    if not np.isfinite(stiffness[0]) or len(blown):
        raise PhysicsError(
            f"the operator has no value at the end x = {end:.6g} of the domain", mend="move the end of the domain"
        )
    if alpha < -1e-6 or alpha >= 2:
        raise PhysicsError(
            f"the coefficient between the momenta is too singular at the end {end:.6g}", mend="move that end inwards"
        )
    strength = _strength(problem, end, sign, d, stiffness, potential, (1 - alpha) ** 2)
    growth = math.log2(abs(potential[0] / potential[8])) / math.log2(d[8] / d[0]) if potential[0] * potential[8] > 0 else 0.0
    singular = growth > 0.2 and abs(potential[0]) > 4 * abs(potential[8]) * 0.999
    if abs(alpha) < 1e-6 and not singular:
        return NearEnd(kind)
    if growth > 2.05 and abs(strength) > 1 and potential[0] > 0:
        return NearEnd("steep")
    lowest = -((1 - alpha) ** 2) / 4
    if strength < lowest - 1e-9 * max(1.0, abs(lowest)) or (growth > 2.05 and potential[0] < 0):
        raise PhysicsError(
            f"the attraction at the end {end:.6g} is too strong: the operator is not bounded below, it has no lowest level",
            mend=f"an inverse square needs a strength of at least {lowest:g} times the coefficient between the momenta",
        )
    root = math.sqrt(max(0.0, (1 - alpha) ** 2 + 4 * strength))
    power = ((1 - alpha) + root) / 2
    if power > STEEP:
        return NearEnd("steep")
    if kind == "free" and strength == 0 and alpha < 1:
        return NearEnd("free") if alpha < 1e-6 else NearEnd("power", 0.0, alpha)
    return NearEnd("power", power, alpha)


def refuse_inner_poles(problem: Problem) -> None:
    """Raise PhysicsError where V grows as 1/d or faster towards a place inside the domain: what happens there is not fixed."""
    marks = np.unique(np.concatenate([problem.edges[:400], problem.centres[:400]]))
    marks = marks[(marks > problem.left) & (marks < problem.right)]
    if len(marks) == 0:
        return
    room = np.minimum.reduce([np.diff(marks, prepend=-np.inf), np.diff(marks, append=np.inf)])
    room = np.where(np.isfinite(room), room, 1.0) * 2.0**-34
    d = np.maximum(room, np.abs(marks) * 2.0**-36) * np.array([[1.0], [2.0**-6]])
    for sign in (-1.0, 1.0):
        with np.errstate(all="ignore"):
            values = np.abs(problem.potential((marks + sign * d).ravel()).reshape(d.shape))
            growth = np.log2(values[1] / values[0]) / 6
        pole = np.isfinite(growth) & (growth > 0.9)
        if pole.any():
            raise PhysicsError(
                f"the potential is singular at {marks[pole][0]:.9g}, inside the domain",
                mend="end the domain there: the two sides do not mix",
            )


def room_at(problem: Problem, end: float, side: int) -> float:
    """Return the distance from an end to the next edge or centre inwards, or to the other end."""
    marks = np.concatenate([problem.edges, problem.centres, [problem.left, problem.right]])
    distance = marks - end if side == 0 else end - marks
    distance = distance[np.isfinite(distance) & (distance > max(1e-9 * abs(end), NEAREST))]
    return float(distance.min()) if len(distance) else max(1.0, abs(end))


def _strength(
    problem: Problem, end: float, sign: float, d: Array, stiffness: Array, potential: Array, critical: float
) -> float:
    """Return the limit of V d^2 / K at the end: extrapolated from a short distance, or taken at the shortest.

    A multiple of 1/4 is taken where only rounding tells the limit from it; more strictly near the critical -critical/4, where
    the power of psi goes with the square root of the difference.
    """
    shortest = float(potential[0] * d[0] ** 2 / stiffness[0])
    steps = d[-1] * np.arange(1, 9) / 8
    with np.errstate(all="ignore"):
        x = end + sign * steps
        ratio = problem.potential(x) * (x - end) ** 2 / problem.stiffness(x)
    weights = np.array([(-1.0) ** (k + 1) * math.comb(8, k) for k in range(1, 9)])
    smooth = float(weights @ ratio)
    best = smooth if abs(smooth - shortest) <= 1e-3 * max(1e-3, abs(shortest)) else shortest
    straight = _limit_at(problem, end, sign, float(d[0]))
    best = straight if abs(straight - shortest) <= 1e-2 * max(1.0, abs(shortest)) else best
    if not abs(best) < 1e300:
        raise PhysicsError(
            f"what happens at the end {end:.6g} is out of the range of numbers",
            mend="choose units that make lengths nearer to 1",
        )
    near = round(4 * best) / 4
    slack = 1e-9 if critical + 4 * near > 0.01 else 4e-14
    return near if abs(best - near) <= slack * max(1.0, abs(near)) else best


def _limit_at(problem: Problem, end: float, sign: float, shortest: float) -> float:
    """Return the limit of V d^2 / K from three short distances by Aitken's extrapolation: exact for c + a d^q.

    The distances are those of the places as rounded, so that no rounding of the place enters. Where noise grows towards the
    end (the place of the singularity is itself rounded) the answer is nan.
    """
    x = end + sign * shortest * np.array([16.0, 4.0, 1.0])
    with np.errstate(all="ignore"):
        far, middle, near = problem.potential(x) * (x - end) ** 2 / problem.stiffness(x)
        first, second = middle - far, near - middle
    if not abs(second) > 8 * np.finfo(float).eps * abs(near):
        return float(near)
    if abs(second) >= abs(first):
        return math.nan
    return float(near - second * second / (second - first))


def _power(value: float) -> float:
    """Return the nearest multiple of 1/4 of a power read off at a short distance, if it is that near."""
    if not abs(value) < 1e300:
        return value
    near = round(4 * value) / 4
    return near if abs(value - near) <= 1e-6 else value


def far_end(problem: Problem, side: int) -> FarEnd:
    """Classify an open end by the effective potential far out; PhysicsError where it falls without limit or never settles."""
    sign = -1.0 if side == 0 else 1.0
    marks = np.concatenate(
        [problem.edges, problem.centres, [e for e in (problem.left, problem.right) if np.isfinite(e)], [0.0]]
    )
    middle = float(marks.min() if side == 0 else marks.max())
    d = np.exp2(np.arange(-130.0, 1000.0, 1.0))
    d = d[d > 4 * np.spacing(abs(middle))]
    x = middle + sign * d
    with np.errstate(all="ignore"):
        values, stiffness = problem.effective(x), problem.stiffness(x)
        finite = np.isfinite(values) & (stiffness > 1e-100) & (stiffness < 1e100)
    if not finite.any():
        if (values == np.inf).any():
            return FarEnd(math.inf, middle + sign * d[-1], math.inf, math.inf, math.inf, False)
        raise PhysicsError(f"the potential has no value beyond {middle:.6g}", mend="narrow the domain")
    start = int(np.argmax(finite))
    stop = len(d) if finite[start:].all() else start + int(np.argmin(finite[start:]))
    first_lost = values[stop] if stop < len(d) and 1e-100 < stiffness[stop] < 1e100 else np.nan
    values, d, stiffness = values[start:stop], d[start:stop], stiffness[start:stop]
    if len(values) < FEWEST and not np.isinf(first_lost):
        raise PhysicsError(f"the potential has no value beyond {middle:.6g}", mend="narrow the domain")
    verdict = _settles(values, first_lost)
    where = "x -> -inf" if side == 0 else "x -> inf"
    if verdict == "rises":
        return FarEnd(math.inf, middle + sign * d[-1], math.inf, math.inf, math.inf, False)
    if verdict == "falls":
        raise PhysicsError(
            f"the operator is not bounded below and has no lowest level: the potential falls without limit at {where}",
            mend="narrow the domain with a wall, or say `outgoing` for resonances (not available yet)",
        )
    if verdict == "wanders":
        raise PhysicsError(
            f"the potential does not settle at {where}: the spectrum there is made of bands",
            mend="use one period as a ring: x in ring(a, b), phase q",
        )
    return _tail(values, d, _local_lengths(d, stiffness), middle, sign)


def _local_lengths(d: Array, stiffness: Array) -> Array:
    """Return the integral of dx/sqrt(K) from the middle out to each distance: d/sqrt(K) where K is constant."""
    pieces = np.diff(d, prepend=0.0) / np.sqrt(stiffness)
    return np.cumsum(pieces)


def _settles(values: Array, first_lost: float) -> str:
    """Return "settles", "rises", "falls" or "wanders" for values at doubling distances."""
    if np.isinf(first_lost):
        return "rises" if first_lost > 0 else "falls"
    late = np.diff(values)[-256:]
    if _shrinking(late):
        return "settles"
    last = late[-int(np.clip(len(values) // 16, 4, 256)) :]
    if (last > 0).all():
        return "rises"
    return "falls" if (last < 0).all() else "wanders"


def _shrinking(steps: Array) -> bool:
    """Say whether the later half of the steps is far smaller than the earlier half."""
    half = len(steps) // 2
    late, early = np.abs(steps[half:]).max(initial=0.0), np.abs(steps[:half]).max(initial=0.0)
    return bool(late <= 0.1 * early)


def _tail(values: Array, d: Array, local: Array, middle: float, sign: float) -> FarEnd:
    """Return the limit with what is left of the tail where it can last be told from rounding."""
    limit = _limit(values)
    rest = values - limit
    seen = np.flatnonzero(np.abs(rest) > max(4e-16 * abs(limit), np.finfo(float).tiny * 1e10))
    if len(seen) == 0:
        return FarEnd(limit, middle, 0.0, math.inf, 1.0, False)
    last = int(seen[-1])
    large = np.flatnonzero(np.abs(rest) > 1e-7 * abs(limit)) if limit else seen
    clean = int(large[-1]) if len(large) else last
    power = _fall(rest, local, clean)
    with np.errstate(all="ignore"):
        pull = np.nan_to_num(rest * local * local, posinf=math.inf, neginf=-math.inf)
    endless = bool(rest[clean] < 0 and (power < 1.95 or (power < 2.05 and pull[clean] < -0.25)))
    size = np.abs(pull[: clean + 1])
    square = abs(power - 2) < 0.05
    small = np.abs(pull[: clean + 1] - pull[clean]) < 1e-9 if square else size < 1e-8 * min(1.0, float(size.max()))
    small &= np.arange(clean + 1) > int(np.argmax(size))
    if not small.any() and max(power, _fall(rest, local, last)) > 6:
        return FarEnd(limit, middle + sign * d[min(last + 1, len(d) - 1)], 0.0, math.inf, 1.0, False)
    place = int(np.argmax(small)) if small.any() else clean
    fall = 2.0 if square else _fall(rest, local, place)
    return FarEnd(limit, middle + sign * d[place], float(pull[place]), fall, float(local[place]), endless)


def _limit(values: Array) -> float:
    """Return the limit of settling values by one step of Aitken's extrapolation."""
    before, last = values[-2] - values[-3], values[-1] - values[-2]
    if last in {0, before}:
        return float(values[-1])
    limit = float(values[-1] - last * (last / (last - before)))
    return 0.0 if abs(limit) <= 1e-9 * abs(values[-1]) else limit


def _fall(rest: Array, d: Array, last: int) -> float:
    """Return the power with which the tail falls over the octave up to number `last`."""
    first = max(0, last - 1)
    if not d[last] > d[first] or np.sign(rest[first]) != np.sign(rest[last]):
        return math.inf
    return float(-math.log2(rest[last] / rest[first]) / math.log2(d[last] / d[first]))
