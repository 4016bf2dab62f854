"""Places on the coordinate that matter for a mesh: edges, where a function or a derivative jumps, and centres, its zeros."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterable

import numpy as np
from numpy.typing import NDArray

from specterm.model.polynomial import coefficients, roots
from specterm.model.rounding import rounding
from specterm.model.tape import compile_term
from specterm.model.term import NIL, Term, subtract
from specterm.model.walk import leaves_first

Places = NDArray[np.float64]
Key = Callable[[Places], NDArray[np.float64]]
MOST_CENTRES = 12
MOST_PLACES = 20_000
_STEPS = np.geomspace(1e-40, 1e40, 801)


def edges(root: Term, left: float, right: float) -> Places:
    """Return the sorted places strictly between left and right where the function or one of its derivatives jumps.

    Affine and quadratic differences are solved in closed form; the others are bracketed on a sample that is log-geometric
    around every centre (and even over a finite interval) and bisected to neighbouring floating-point numbers: the right
    one is returned.
    """
    found: list[Places] = []
    for term in leaves_first(root):
        if term.varies:
            found.extend(_edges_of(term, root, left, right))
    if not found:
        return np.empty(0)
    every = np.unique(np.concatenate(found))
    return every[(every > left) & (every < right)]


def _edges_of(term: Term, root: Term, left: float, right: float) -> Iterable[Places]:
    if term.kind == "pieces":
        yield term.data.boundaries
    elif term.kind == "spline":
        yield term.data.breaks()
    elif term.kind == "call" and term.data in ("floor", "ceil"):
        yield _changes(_values(term), _sample(root, left, right))
    else:
        for difference in switches(term):
            yield crossings(difference, root, left, right)


def switches(term: Term) -> Iterable[Term]:
    """Return the terms at whose zeros this one switches."""
    args = term.args
    if term.kind == "compare":
        yield subtract(args[0], args[1])
    elif term.kind == "call" and term.data in ("step", "sign", "abs"):
        yield args[0]
    elif term.kind == "call" and term.data in ("min", "max"):
        for k, a in enumerate(args):
            yield from (subtract(a, b) for b in args[k + 1 :])
    elif term.kind == "where" and args[0].kind not in ("compare", "logic"):
        yield args[0]
    elif term.kind == "logic":
        yield from (a for a in args if a.kind not in ("compare", "logic"))


def crossings(difference: Term, root: Term, left: float, right: float) -> Places:
    """Return where a real term changes sign (`root` supplies the centres of the sample)."""
    polynomial = coefficients(difference, 2)
    if polynomial is not None:
        return roots(polynomial)
    return _sign_changes(difference, _sample(root, left, right))


def _sign_changes(term: Term, sample: Places) -> Places:
    """Return where a term changes sign: of the two neighbouring numbers the one where it is smaller."""
    values = _values(term)
    high = _changes(lambda x: _is_positive(values(x)), sample)
    low = np.nextafter(high, -np.inf)
    return np.where(np.abs(values(low)) < np.abs(values(high)), low, high)


def _is_positive(values: Places) -> Places:
    return np.where(np.isnan(values), np.nan, values >= 0)


def _values(term: Term) -> Key:
    if term.broken:
        return lambda x: np.full(x.shape, np.nan)
    tape = compile_term(term)
    return lambda x: np.real(np.broadcast_to(np.asarray(tape(x)), x.shape)).astype(float)


def _changes(key: Key, sample: Places) -> Places:
    """Return the places where key changes between neighbours of the sample: the first number of the new state."""
    states = key(sample)
    changed = np.flatnonzero((states[1:] != states[:-1]) & ~np.isnan(states[1:]) & ~np.isnan(states[:-1]))
    low, high = sample[changed], sample[changed + 1]
    start = states[changed]
    for _ in range(2200):
        middle = _between(low, high)
        if not np.any((middle > low) & (middle < high)):
            break
        same = key(middle) == start
        low, high = np.where(same, middle, low), np.where(same, high, middle)
    return high[:MOST_PLACES]


def _between(low: Places, high: Places) -> Places:
    """Return a place between: the geometric mean of magnitudes far apart (fast towards 0), else the arithmetic one."""
    with np.errstate(all="ignore"):
        even = low + (high - low) / 2
        apart = (low > 0) & (high > 4 * low) | (high < 0) & (low < 4 * high)
        return np.where(apart, np.sign(high) * np.sqrt(np.abs(low)) * np.sqrt(np.abs(high)), even)


def _sample(root: Term, left: float, right: float) -> Places:
    """Return sorted places in [left, right], log-geometric around 0, the ends and the zeros of affine parts, and even ones."""
    around = _anchors(root, left, right)
    parts = [around]
    for centre in around[:MOST_CENTRES]:
        parts += [centre + _STEPS, centre - _STEPS]
    if math.isfinite(left) and math.isfinite(right):
        parts.append(np.linspace(left, right, 4001))
    every = np.unique(np.concatenate(parts))
    return every[(every >= left) & (every <= right)]


def _anchors(root: Term, left: float, right: float) -> Places:
    """Return 0, the zeros of every affine part and the finite ends, in that order, without repetition."""
    found = [0.0]
    for term in leaves_first(root):
        polynomial = coefficients(term, 1) if term.varies and term.kind in ("sum", "coordinate") else None
        if polynomial is not None:
            found += [float(r) for r in roots(polynomial)]
    found += [end for end in (left, right) if math.isfinite(end)]
    return np.array(list(dict.fromkeys(found)))


def centres(root: Term, left: float, right: float) -> Places:
    """Return the sorted zeros within [left, right] of every sum in the expression that depends on the coordinate.

    Affine and quadratic sums in closed form, the others by sign changes on the sample of `_sample`, refined to the last bit;
    the zero of the coordinate itself counts. At most 64 for one sum, those of smallest magnitude.
    """
    parts = leaves_first(root)
    found = [np.zeros(1)] if any(t.kind == "coordinate" for t in parts) else []
    sums = [t for t in parts if t.kind == "sum" and len(t.args) > 1 and t.varies and t.real and not t.broken]
    polynomials = [coefficients(t, 2) for t in sums]
    sample = _sample(root, left, right) if None in polynomials else np.empty(0)
    for term, polynomial in zip(sums, polynomials, strict=True):
        zeros = _sign_changes(term, sample) if polynomial is None else roots(polynomial)
        found.append(zeros[np.argsort(np.abs(zeros), kind="stable")][:64])
    every = np.unique(np.concatenate(found)) if found else np.empty(0)
    return every[(every >= left) & (every <= right)]


def knots(root: Term) -> int:
    """Return how many knots of tables are in the expression."""
    return sum(len(t.data.x) for t in leaves_first(root) if t.kind == "spline")


def branches_meet(term: Term) -> bool:
    """Say whether the two branches of a `where` agree, to rounding, at every place where the condition switches."""
    condition, a, b = term.args
    pieces = leaves_first(condition)
    if any(t.kind in ("pieces", "spline") or (t.kind == "call" and t.data in ("floor", "ceil")) for t in pieces):
        return False
    gap = subtract(a, b)
    if gap == NIL:
        return True
    found = [crossings(d, term, -math.inf, math.inf) for t in pieces for d in switches(t) if d.varies]
    places = np.concatenate(found) if found else np.empty(0)
    if not places.size or term.broken:
        return False
    return bool(np.all(np.abs(_values(gap)(places)) <= 8 * rounding(gap, places)))
