"""Franck-Condon factors and Poisson weights against closed forms and printed digits."""

import math

import numpy as np
import pytest
from answers import ready, spectrum

from specterm.analysis import project
from specterm.analysis.transitions import into_other

OSCILLATOR = "H = p^2/2 + w^2*(x - d)^2/2\nw = {w}\nd = {d}\nx in (-inf, inf)"


def factors(lower, upper, count=12):
    """Return the factors from the lowest level of one sheet into the levels of another, with the errors of the overlaps."""
    found = into_other(ready(lower), spectrum(lower, 3), spectrum(upper, count), (0,))
    return [(abs(line.dipole) ** 2, 2 * abs(line.dipole) * line.dipole_error + line.dipole_error**2) for line in found.lines]


def distorted(w, other, d, most):
    """Return |<n, w, d|0, other, 0>|^2 by a Gauss-Hermite rule that is exact for the product (recomputed here)."""
    total = (w + other) / 2
    centre = w * d / (2 * total)
    height = math.exp(total * centre**2 - w * d * d / 2)
    t, weight = np.polynomial.hermite.hermgauss(80)
    x = centre + t / math.sqrt(total)
    shares = []
    for n in range(most):
        hermite = np.polynomial.hermite.hermval(math.sqrt(w) * (x - d), [0] * n + [1])
        norm = (w * other / math.pi**2) ** 0.25 / math.sqrt(2.0**n * math.factorial(n))
        shares.append((norm * height * float((weight * hermite).sum()) / math.sqrt(total)) ** 2)
    return shares


@pytest.mark.parametrize(("w", "other", "d"), [(1.0, 1.0, 2.0), (0.87, 1.31, 1.62), (2.2, 0.7, 0.4)])
def test_displaced_and_distorted_oscillators(w, other, d):
    """Displaced and distorted oscillators (Gauss-Hermite, exact) within the errors, which are below 1e-9."""
    found = factors(OSCILLATOR.format(w=other, d=0), OSCILLATOR.format(w=w, d=d))
    for (factor, error), expected in zip(found, distorted(w, other, d, 12), strict=True):
        assert abs(factor - expected) <= error + 1e-14
        assert error < 1e-9


def test_poisson_progression():
    """A pure displacement with S = 2 gives exp(-2) 2^n/n! (closed form)."""
    for n, (factor, error) in enumerate(factors(OSCILLATOR.format(w=1, d=0), OSCILLATOR.format(w=1, d=2))):
        assert abs(factor - math.exp(-2) * 2**n / math.factorial(n)) <= error + 1e-14


def test_coherent_state_of_four_quanta():
    """|alpha|^2 = 4: .0183156389, .0732625556, .1465251111, .1953668148 twice, .1562934519, .1041956346 (check-values 14)."""
    text = "H = (p^2 + x^2)/2\nx in (-inf, inf)\nstate s = exp(-(x - 2*sqrt(2))^2/2)"
    found = project(ready(text), spectrum(text, 24), "s")
    printed = [0.0183156389, 0.0732625556, 0.1465251111, 0.1953668148, 0.1953668148, 0.1562934519, 0.1041956346]
    for weight, value in zip(found.weights, printed, strict=False):
        assert abs(weight.weight - value) <= weight.error + 1e-10
