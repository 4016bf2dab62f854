"""Parity of the levels of an operator that is its own mirror image."""

from __future__ import annotations

import numpy as np

from specterm.arrays import Array
from specterm.discrete.problem import Coefficient, Problem
from specterm.spectrum.vectors import Solved


def parities(problem: Problem, solved: Solved) -> list[str | None]:
    """Return "even" or "odd" for each level, or None: in one dimension levels of a mirror-symmetric operator alternate.

    Rings are left out (their levels may be degenerate), and operators with a phase in their states.
    """
    count = len(solved.values)
    if problem.ring or problem.twist is not None or problem.left_end != problem.right_end or _centre(problem, solved) is None:
        return [None] * count
    return ["odd" if (solved.first + k) % 2 else "even" for k in range(count)]


def _centre(problem: Problem, solved: Solved) -> float | None:
    """Return the place about which both coefficients are even, if there is one."""
    left, right = solved.condensed.mesh.places[[0, -1]]
    if np.isfinite(problem.left) and np.isfinite(problem.right):
        candidates = [(problem.left + problem.right) / 2]
    else:
        marks = np.concatenate([problem.centres, problem.edges])
        ends = [(marks.min() + marks.max()) / 2] if len(marks) else []
        candidates = [(left + right) / 2, *ends, *marks[:20].tolist(), 0.0]
    for centre in candidates:
        reach = min(centre - left, right - centre)
        if reach <= 0.45 * (right - left):
            continue
        own = np.abs(np.concatenate([problem.centres, problem.edges]) - centre) * (1 + 1e-9)
        d = reach * np.array([0.9134, 0.7071, 0.5321, 0.3847, 0.2718, 0.1618, 0.0577, 0.0123, 0.0014])
        d = np.concatenate([d, own[(own > 0) & (own < reach)][:200]])
        if all(_even(f, noise, centre, d) for f, noise in _coefficients(problem)):
            return float(centre)
    return None


def _coefficients(problem: Problem) -> tuple[tuple[Coefficient, Coefficient], ...]:
    """Return each coefficient with the bound on its rounding."""
    return ((problem.stiffness, problem.noise_stiffness), (problem.potential, problem.noise_potential))


def _even(function: Coefficient, noise: Coefficient, centre: float, d: Array) -> bool:
    """Say whether a coefficient has the same values at centre + d and centre - d, to rounding."""
    with np.errstate(all="ignore"):
        right, left = function(centre + d), function(centre - d)
        slack = 4 * (noise(centre + d) + noise(centre - d)) + 1e-15 * (np.abs(left) + np.abs(right))
    return bool(np.all(np.abs(right - left) <= slack))
