"""Levels converge at the rate of the order: 2 p in the element's length for polynomials of degree p (Strang and Fix, An
Analysis of the Finite Element Method, 1973, theorem 6.1), where jumps lie on element edges.

The level with a power is the square of the first zero of the spherical Bessel function j_1 (A. and S., 10.1.59).
"""

import numpy as np
import pytest
from discrete_making import FREE, WALL, bisected, coefficients, even
from scipy import optimize, special

from specterm.discrete.mesh import Edge


def slope_of(sizes, errors):
    """Return the slope of log(error) against log(element length)."""
    return -np.polyfit(np.log(sizes), np.log(errors), 1)[0]


def well_level():
    """Return the ground level of -f'' + 30 step(|x| - 1) f on (-2, 2): k tan k = q coth q (matching, recomputed here)."""

    def misfit(energy):
        k, q = np.sqrt(energy), np.sqrt(30 - energy)
        return k * np.sin(k) - q / np.tanh(q) * np.cos(k)

    return optimize.brentq(misfit, 0.5, 2.4, xtol=1e-15)


def bloch_level():
    """Return the ground level of -f'' + 2 cos(2x) f with f(x + pi) = exp(i pi/2) f(x): the Mathieu value a(1/2, q = 1)."""
    n = np.arange(-30, 31)
    return np.linalg.eigvalsh(np.diag((2 * n + 0.5) ** 2.0) + np.diag(np.ones(60), 1) + np.diag(np.ones(60), -1))[0]


CASES = {  # potential, mesh, elements, number of the level, its value
    "square box": (np.zeros_like, (0.0, 1.0, WALL, WALL), (6, 8, 12, 16), 2, 9 * np.pi**2),
    "box with a free end": (np.zeros_like, (0.0, 1.0, WALL, FREE), (6, 8, 12, 16), 2, 6.25 * np.pi**2),
    "ramp between walls": (lambda x: x, (0.0, 40.0, WALL, WALL), (40, 56, 80, 112), 0, 2.338107410459767),  # DLMF 9.9, a_1
    "jumps on edges": (lambda x: 30.0 * (np.abs(x) > 1), (-2.0, 2.0, WALL, WALL), (12, 16, 20, 24), 0, well_level()),
    "ring with a phase": (lambda x: 2 * np.cos(2 * x), (0.0, np.pi, FREE, FREE, np.pi / 2), (4, 6, 8, 12), 0, bloch_level()),
    "power at an end": (lambda x: 2 / x**2, (0.0, 1.0, Edge(False, 2.0), WALL), (12, 16, 20, 24), 0, 4.493409457909064**2),
}
HALF = special.jn_zeros(0, 1)[0] ** 2  # scipy.special


def errors_of(name, sizes, order):
    """Return how far a level is off on meshes of these numbers of elements."""
    potential, ends, _, number, exact = CASES[name]
    found = [
        bisected(even(*ends[:2], n, order, *ends[2:]), coefficients(potential), number + 1, -5, 130)[number] for n in sizes
    ]
    return np.array(found) - exact


@pytest.mark.parametrize("order", [2, 3, 4])
@pytest.mark.parametrize("name", CASES)
def test_rate(name, order):
    """The log-log slope of a level's error over four sizes is 2 p, from 15 per cent less to 20 per cent more."""
    sizes = np.array(CASES[name][2])
    errors = errors_of(name, sizes, order)
    assert (errors > 0).all(), f"a minimum over fewer functions cannot lie lower: {errors}"
    slope = slope_of(sizes, errors)
    assert 0.85 * 2 * order < slope < 1.2 * 2 * order, f"slope {slope:.2f}, expected {2 * order}; errors {errors}"


@pytest.mark.parametrize("name", CASES)
def test_order_brings_the_last_digits(name):
    """Raising the order on one mesh ends at rounding: 1e-12 of the level at order 16."""
    first, second, last = (abs(errors_of(name, CASES[name][2][:1], order)[0]) for order in (3, 6, 16))
    assert last < 1e-12 * max(1.0, abs(CASES[name][4]))
    assert first > 100 * second


def test_order_at_the_critical_power():
    """With sqrt(x) taken out of the first element each order brings a factor of ten, whatever the length of the element."""
    mesh = [even(0.0, 1.0, elements, order, Edge(False, 0.5), WALL) for elements in (4, 12) for order in (4, 5, 6, 7)]
    errors = [abs(bisected(m, coefficients(lambda x: -0.25 / x**2), 1, -5, 60)[0] - HALF) for m in mesh]
    for a, b, c, d in (errors[:4], errors[4:]):
        assert a < 2e-7
        assert a > 10 * b > 100 * c > 1000 * d


def test_a_jump_inside_an_element_spoils_the_rate():
    """With the jump off the edges the same elements are far slower: the rate above comes from the edges."""
    assert np.abs(errors_of("jumps on edges", (5, 11, 17), 4)).min() > 1e-5
