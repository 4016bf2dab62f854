"""From a model to the problem the engine solves: coefficients made real, turned to have a lowest level."""

from __future__ import annotations

import math

import numpy as np

from specterm.arrays import Array
from specterm.discrete.problem import Problem
from specterm.discrete.quadrature import gauss_legendre
from specterm.errors import PhysicsError
from specterm.model import Function, Model


def problem_of(model: Model) -> Problem:
    """Return the problem of the model's main operator, which must be Hermitian and of second order.

    A first-order term B is taken into V as -B^2/(4 K), and into the phase of psi as the integral of -B/(2 K) (a gauge
    transformation).
    """
    sturm = model.operators[model.main].sturm()
    stiffness, potential, twist = sturm.K, sturm.V, None
    if sturm.B is not None and sturm.B.constant != 0:
        potential = potential - sturm.B * sturm.B / (4 * stiffness)
        twist = sturm.B / (-2 * stiffness)
    domain = model.domain
    if domain.is_finite and not math.isfinite(domain.right - domain.left):
        raise PhysicsError("the domain is wider than numbers go", mend="use open ends: x in (-inf, inf)")
    sign = _sign(stiffness, domain.left, domain.right)
    if sign < 0:
        stiffness, potential = -stiffness, -potential
    effective = potential
    if stiffness.constant is None and "open" in {domain.left_end, domain.right_end}:
        slope = stiffness.derivative()
        bend = slope.derivative()
        if not slope.has_edge and not bend.has_edge:
            effective = potential + bend / 4 - slope * slope / (16 * stiffness)
    functions = [f for f in (stiffness, potential, twist) if f is not None]
    ends = (domain.left, domain.right)
    return Problem(
        stiffness, stiffness.derivative() if stiffness.constant is None and not stiffness.derivative().has_edge else _flat,
        potential, effective, stiffness.rounding, potential.rounding, *ends, domain.left_end, domain.right_end,
        edges=np.unique(np.concatenate([f.edges(*ends) for f in functions])),
        centres=np.unique(np.concatenate([f.centres(*ends) for f in functions])),
        knots=sum(f.knots() for f in functions),
        phase=_phase(model, twist) if domain.is_ring else None,
        twist=twist, sign=sign, bloch=domain.phase is not None,
    )  # fmt: skip


def _flat(x: Array) -> Array:
    """Return zeros: the slope of a coefficient that is constant, or constant between its jumps."""
    return np.zeros_like(x)


def _sign(stiffness: Function, left: float, right: float) -> int:
    """Return 1 or -1, the sign of the coefficient between the momenta at a sample of places."""
    finite = [e for e in (left, right) if np.isfinite(e)]
    if len(finite) == 2:
        x = np.linspace(left, right, 64)[1:-1]
    else:
        start = finite[0] if finite else 0.0
        out = np.geomspace(1e-6, 1e6, 64) * max(1.0, abs(start))
        x = start + out if np.isfinite(left) or not finite else start - out
    signs = np.sign(stiffness(x))
    signs = signs[~np.isnan(signs)]
    return -1 if len(signs) and np.median(signs) < 0 else 1


def _phase(model: Model, twist: Function | None) -> float:
    """Return the phase of the real part of psi around the ring, in radians: the Bloch phase less what the gauge takes up."""
    domain = model.domain
    turn = 2 * math.pi * (domain.phase or 0.0)
    if twist is not None:
        turn -= integral(twist, domain.left, domain.right, twist.edges(domain.left, domain.right))
    if not math.isfinite(turn):
        raise PhysicsError("the phase around the ring is out of the range of numbers", mend="make ring or phase smaller")
    return math.remainder(turn, 2 * math.pi)


def integral(function: Function, left: float, right: float, edges: Array) -> float:
    """Return the integral over (left, right) by Gauss rules on ever more pieces, to 1e-14 of the integral of the modulus.

    Raises PhysicsError where it does not converge.
    """
    t, w = gauss_legendre(20)
    places = np.unique(np.concatenate([[left], edges, [right]]))
    before = math.inf
    for _ in range(14):
        half = np.diff(places)[:, None] / 2
        values = function((places[:-1, None] + half * (1 + t)).ravel()).reshape(len(half), -1)
        total = float(np.sum(half * w * values))
        if abs(total - before) <= 1e-14 * float(np.sum(half * w * np.abs(values))):
            return total
        before = total
        places = np.sort(np.concatenate([places, (places[:-1] + places[1:]) / 2]))
    raise PhysicsError("the vector potential cannot be integrated around the ring", mend="check the terms linear in p")
