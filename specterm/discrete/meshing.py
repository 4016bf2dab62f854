"""Choosing a mesh for an energy: lengths follow wavelength and decay length, and the coefficients must be resolved."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from specterm.arrays import Array, Flags
from specterm.discrete.elements import Coefficients, Grid, grid
from specterm.discrete.mesh import Edge, Mesh
from specterm.discrete.problem import Problem
from specterm.discrete.quadrature import gauss_jacobi, legendre_projector
from specterm.discrete.scan import Scan
from specterm.errors import PhysicsError
from specterm.stopping import check

ALLOWED = 2.0
"""Phase of the wave in one element, in radians; below pi, so that interiors have no level under the energies sought."""
FORBIDDEN = 4.5
"""Decay across one element, in powers of e."""
ORDER, ORDER_BETWEEN_KNOTS = 12, 6
GROWTH = 2.5
"""How much longer than its neighbour an element may be."""
MOST_ELEMENTS = 400_000
AT_ONCE = 20_000
"""The rounding of the coefficients is worked out in so many elements at once."""


@dataclass(frozen=True)
class Span:
    """The part of the domain to be meshed and what holds at its ends."""

    left: float
    right: float
    left_edge: Edge
    right_edge: Edge


def build(problem: Problem, look: Scan, coefficients: Coefficients, span: Span, energy: float) -> Mesh:
    """Return a mesh that resolves the coefficients and waves up to `energy` (measured like the scan's V)."""
    places = graded(_first_places(problem, look, span, energy, 1e-14 * abs(energy - coefficients.origin)))
    order = ORDER_BETWEEN_KNOTS if problem.knots > 40 and problem.knots > len(places) // 3 else ORDER
    mesh = Mesh(places, order, span.left_edge, span.right_edge, problem.phase)
    return resolve(mesh, coefficients, energy - coefficients.origin, look)


def _first_places(problem: Problem, look: Scan, span: Span, energy: float, rounding: float) -> Array:
    """Return element boundaries by equal shares of phase and decay between the places where coefficients jump.

    Kinetic energies below `rounding` count as none.
    """
    inner = (look.x > span.left) & (look.x < span.right)
    x = np.concatenate([[span.left], look.x[inner], [span.right]])
    with np.errstate(all="ignore"):
        smooth = _without_powers(look, span)
        rate = smooth.wave_number(energy - rounding)[inner] / ALLOWED + smooth.decay(energy)[inner] / FORBIDDEN
        scale = 4 / np.maximum(span.right - span.left, np.finfo(float).tiny)
    rate = np.where(np.isfinite(rate), rate, scale)
    rate = np.concatenate([rate[:1], rate, rate[-1:]]) if len(rate) else np.full(2, scale)
    share = np.concatenate([[0.0], np.cumsum((rate[1:] + rate[:-1]) / 2 * np.diff(x))])
    marks = np.concatenate(
        [[span.left], problem.edges[(problem.edges > span.left) & (problem.edges < span.right)], [span.right]]
    )
    at = np.interp(marks, x, share)
    wanted = np.maximum(1 if len(marks) > 2 else 2, np.ceil(np.diff(at) - 1e-9))
    if not wanted.sum() <= MOST_ELEMENTS:
        worst = x[int(np.argmax(np.diff(share)))]
        raise PhysicsError(
            f"this needs some {wanted.sum():.2g} elements, more than the {MOST_ELEMENTS} allowed, most near {worst:.6g}",
            mend="ask for fewer or lower levels; if the potential is singular there, end the domain there",
        )
    pieces = wanted.astype(int)
    if pieces.sum() == len(marks) - 1:
        return marks
    fresh = [
        np.interp(a + (b - a) * np.arange(1, n) / n, share, x) for a, b, n in zip(at[:-1], at[1:], pieces, strict=True) if n > 1
    ]
    return np.unique(np.concatenate([marks, *fresh]))


def _without_powers(look: Scan, span: Span) -> Scan:
    """Return the scan with V less the inverse square that the power of psi at an end takes care of."""
    potential = look.potential
    for place, edge in ((span.left, span.left_edge), (span.right, span.right_edge)):
        if edge.power is not None:
            potential = potential - edge.power * (edge.power - 1 + edge.alpha) * look.stiffness / (look.x - place) ** 2
    return Scan(look.x, look.stiffness, potential)


def graded(places: Array) -> Array:
    """Return places with more between them, so that no element is much longer than its neighbours and tails are held."""
    while True:
        lengths = np.diff(places)
        beside = np.minimum(np.append(lengths[1:], np.inf), np.append(np.inf, lengths[:-1]))
        long = lengths > GROWTH * beside
        if not long.any():
            return places
        middles = places[:-1][long] + lengths[long] / 2
        places = np.sort(np.concatenate([places, middles]))


def resolve(mesh: Mesh, coefficients: Coefficients, energy: float, look: Scan | None = None) -> Mesh:
    """Split elements until polynomials hold the coefficients; `energy` is measured from the origin of `coefficients`."""
    for _ in range(80):
        here = grid(mesh, coefficients)
        rough = unresolved(mesh, here, coefficients, energy)
        if look is not None:
            rough |= _missed(mesh, here, look, coefficients.origin, energy)
        if not rough.any():
            return mesh
        check()
        _refuse_poles(mesh, rough)
        mesh = replace(mesh, places=graded(mesh.split(rough).places))
        if len(mesh.places) > MOST_ELEMENTS:
            break
    raise PhysicsError("the coefficients vary too fast to be resolved", mend="narrow the domain or smooth the potential")


def _refuse_poles(mesh: Mesh, rough: Flags) -> None:
    """Raise PhysicsError where an element inside the domain has shrunk to rounding: the potential has a pole there."""
    reach = np.maximum(np.abs(mesh.places[:-1]), np.abs(mesh.places[1:]))
    lost = rough & (mesh.lengths < 64 * np.spacing(reach))
    lost[0] &= mesh.left.power is None
    lost[-1] &= mesh.right.power is None
    if lost.any():
        place = mesh.places[int(np.argmax(lost))]
        raise PhysicsError(
            f"the potential is singular at {place:.9g}, inside the domain",
            mend="end the domain there: the two sides do not mix",
        )


def unresolved(mesh: Mesh, here: Grid, coefficients: Coefficients, energy: float) -> Flags:
    """Say of each element whether its coefficients, or waves of this energy, are too rough for its length and order."""
    check()
    with np.errstate(all="ignore"):
        potential = here.potential / here.mass - energy
        stiffness = here.kinetic / here.mass * (mesh.lengths[:, None] / 2) ** 2
        kinetic = stiffness.max(axis=1) * (np.pi / mesh.lengths) ** 2
        size = kinetic + np.abs(potential).max(axis=1)
        plain = np.ones(len(size), dtype=bool)
        plain[0], plain[-1] = mesh.left.power is None, mesh.right.power is None
        high_potential, high_stiffness = unseen(mesh, here, coefficients)
        rough = high_potential > np.where(plain, 1e-10, 1e-6) * size
        rough |= high_stiffness > 1e-9 * np.abs(here.kinetic / here.mass).max(axis=1)
        check()
        low = stiffness.min(axis=1)
        rounding = 1e-14 * np.abs(energy)
        phase = np.sqrt(np.maximum(-potential - rounding, 0).max(axis=1) / low) * mesh.lengths
        decay = np.sqrt(np.maximum(potential, 0).min(axis=1) / stiffness.max(axis=1)) * mesh.lengths
        rough |= plain & ((phase > 1.3 * ALLOWED) | (decay > 2 * FORBIDDEN))
    if not np.isfinite(size).all():
        rows = here.x[~np.isfinite(here.potential / here.mass) | ~np.isfinite(here.kinetic / here.mass)]
        raise PhysicsError(
            f"the potential is not a finite number at {rows[0] if rows.size else here.x[~np.isfinite(size)].flat[0]:.9g}",
            mend="narrow the domain: where the potential is infinite, say so with a wall",
        )
    return rough


def unseen(mesh: Mesh, here: Grid, coefficients: Coefficients) -> tuple[Array, Array]:
    """Return the parts of V and K (as under phi_t^2) of too high a degree for the Gauss rules: each of shape (elements,).

    The size of the last coefficients in polynomials orthogonal under the rule's weight, less what rounding makes. Components of
    so high a degree are what the rule gets wrong against a squared eigenfunction.
    """
    with np.errstate(all="ignore"):
        check()
        potential, stiffness = here.potential / here.mass, here.kinetic / here.mass
        parts = [_high(potential), _high(stiffness)]
        steep = np.ones(here.x.shape), np.broadcast_to((2 / mesh.lengths[:, None]) ** 2, here.x.shape)
        for part, noise, scale in (
            (parts[0], coefficients.noise_potential, steep[0]),
            (parts[1], coefficients.noise_stiffness, steep[1]),
        ):
            seen = np.flatnonzero(part > 0)
            for start in range(0, len(seen), AT_ONCE):
                some = seen[start : start + AT_ONCE]
                level = (noise(here.x[some].ravel()).reshape(-1, here.x.shape[1]) * scale[some]).max(axis=1)
                part[some] = np.maximum(0, part[some] - 2 * level)
        for side, end, place in ((0, mesh.left, mesh.places[0]), (-1, mesh.right, mesh.places[-1])):
            if end.power is not None:
                distance = np.abs(here.x[side] - place) / mesh.lengths[side]
                beta = 2 * end.power + end.alpha - 1
                for part, values, power in ((parts[0], potential, 1 - end.alpha), (parts[1], stiffness, -end.alpha)):
                    part[side] = _high_powered(values[side] * distance**power, beta)
    return parts[0], parts[1]


def _high(values: Array) -> Array:
    """Return the size of the last Legendre coefficients of values at Gauss points (elements, points)."""
    check()
    points = values.shape[1]
    tail = np.abs((values - values[:, points // 2, None]) @ legendre_projector(points)[:, points - 4 :]).max(axis=1)
    noise: Array = np.where(tail > 4 * np.finfo(float).eps * np.abs(values).max(axis=1), tail, 0.0)
    return noise


def _high_powered(values: Array, beta: float) -> float:
    """Return the same for one element with a power taken out, from values at the Gauss-Jacobi points."""
    t, w = gauss_jacobi(len(values), beta)
    basis, _ = np.linalg.qr(np.sqrt(w)[:, None] * np.polynomial.legendre.legvander(t, len(values) - 1))
    coefficients = basis.T @ (np.sqrt(w) * values) / np.sqrt(w.sum())
    return float(max(0.0, np.abs(coefficients[-4:]).max() - 16 * np.finfo(float).eps * np.abs(coefficients).max()))


def _missed(mesh: Mesh, here: Grid, look: Scan, origin: float, energy: float) -> Flags:
    """Mark elements in which the scan saw values of V far from what the Gauss points of the element tell."""
    check()
    rough = np.zeros(len(mesh.lengths), dtype=bool)
    inside = (look.x > mesh.places[0]) & (look.x < mesh.places[-1]) & np.isfinite(look.potential)
    x, v = look.x[inside], look.potential[inside] - origin - energy
    element = np.searchsorted(mesh.places, x, side="right") - 1
    plain = np.ones(len(rough), dtype=bool)
    plain[0], plain[-1] = mesh.left.power is None, mesh.right.power is None
    near = np.minimum(x - mesh.places[element], mesh.places[element + 1] - x) < 1e-12 * np.maximum(
        np.abs(x), mesh.lengths[element]
    )
    small = 1e-8 * (mesh.places[-1] - mesh.places[0])
    near |= (mesh.left.power is not None) & (x - mesh.places[0] < small)
    near |= (mesh.right.power is not None) & (mesh.places[-1] - x < small)
    keep = plain[element] & ~near
    x, v, element = x[keep], v[keep], element[keep]
    local = here.potential / here.mass - energy
    at = 2 * (x - mesh.places[element]) / mesh.lengths[element] - 1
    coefficients = local @ legendre_projector(local.shape[1])[:, :10]
    guess = np.einsum("kn,kn->k", coefficients[element], np.polynomial.legendre.legvander(at, 9))
    size = np.abs(local).max(axis=1) + look.stiffness.min() * (np.pi / mesh.lengths) ** 2
    spread = np.ptp(local, axis=1)
    off = np.abs(guess - v) > 1e-6 * size[element] + 0.5 * spread[element]
    rough[element[off]] = True
    return rough
