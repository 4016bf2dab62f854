"""Means and spreads of position and momentum: closed forms, recomputed here."""

import numpy as np
import pytest
from analysis_making import model, spectrum

from specterm.analysis import moments


def moments_of(text, index, count=6):
    """Return the moments of one level."""
    return moments(model(text), spectrum(text, count), index)


@pytest.mark.parametrize("n", range(6))
def test_oscillator(n):
    """p^2/2 + x^2/2: means 0, both spreads sqrt(n + 1/2)."""
    found = moments_of("H = p^2/2 + x^2/2; x in (-inf, inf)", n)
    assert found.x == pytest.approx(0, abs=1e-10)
    assert found.p == pytest.approx(0, abs=1e-10)
    assert found.spread_x == pytest.approx(np.sqrt(n + 0.5), rel=1e-10)
    assert found.spread_p == pytest.approx(np.sqrt(n + 0.5), rel=1e-10)


@pytest.mark.parametrize("n", range(4))
def test_box(n):
    """Walls at 0 and L: mean L/2, spreads L sqrt(1/12 - 1/(2 pi^2 k^2)) and hbar pi k/L, k = n + 1."""
    length, hbar, k = 3.0, 0.37, n + 1
    found = moments_of("hbar = 0.37; H = p^2/2; x in (0, 3)", n)
    assert found.x == pytest.approx(length / 2, rel=1e-11)
    assert found.spread_x == pytest.approx(length * np.sqrt(1 / 12 - 1 / (2 * np.pi**2 * k**2)), rel=1e-11)
    assert found.p == pytest.approx(0, abs=1e-11)
    assert found.spread_p == pytest.approx(hbar * np.pi * k / length, rel=1e-11)


@pytest.mark.parametrize("n", range(3))
def test_hydrogen(n):
    """p^2/2 - 1/r: <r> = 3 N^2/2, <p^2> = 1/N^2, N = n + 1 (Bethe and Salpeter, 1957, section 3)."""
    found = moments_of("H = p^2/2 - 1/r; r in (0, inf)", n)
    assert found.x == pytest.approx(1.5 * (n + 1) ** 2, rel=1e-9)
    assert found.spread_p == pytest.approx(1 / (n + 1), rel=1e-9)


def test_moving_on_a_ring():
    """On a ring with phase 0.3 the states move: p = q and p has no spread, q = 0.3, -0.7, 1.3."""
    text = "H = p^2; x in ring(0, 2*pi), phase 0.3"
    for index, q in enumerate((0.3, -0.7, 1.3)):
        found = moments_of(text, index)
        assert found.p == pytest.approx(q, rel=1e-10)
        assert found.spread_p == pytest.approx(0, abs=1e-6)
        assert found.spread_x == pytest.approx(2 * np.pi / np.sqrt(12), rel=1e-10)


def test_momentum_is_in_units_of_hbar():
    """With hbar = 0.37 the momentum of those states is hbar q."""
    found = moments_of("hbar = 0.37; H = p^2; x in ring(0, 2*pi), phase 0.3", 0)
    assert found.p == pytest.approx(0.37 * 0.3, rel=1e-10)
    assert found.spread_p == pytest.approx(0, abs=1e-6)


def test_gauge():
    """A vector potential on a line shifts the canonical momentum by its mean and leaves the position."""
    found = moments_of("A = 0.8; H = (p - A)^2/2 + x^2/2; x in (-inf, inf)", 1)
    assert found.p == pytest.approx(0.8, rel=1e-9)
    assert found.spread_p == pytest.approx(np.sqrt(1.5), rel=1e-9)
    assert found.x == pytest.approx(0, abs=1e-10)


def test_displaced_well():
    """A displaced oscillator has its mean where the well is."""
    assert moments_of("H = p^2 + (x - 7.5)^2; x in (-inf, inf)", 3).x == pytest.approx(7.5, rel=1e-11)


def test_uncertainty():
    """No state has spreads below hbar/2 in product."""
    for text in ("H = p^2 + x^4; x in (-inf, inf)", "H = p^2 + abs(x); x in (-inf, inf)"):
        for n in range(5):
            found = moments_of(text, n)
            assert found.spread_x * found.spread_p >= 0.5


def test_level_not_computed():
    """A level that was not computed is a KeyError; so is any where nothing is bound."""
    with pytest.raises(KeyError):
        moments_of("H = p^2 + x^4; x in (-inf, inf)", 17)
    with pytest.raises(KeyError):
        moments_of("H = p^2 + exp(-x^2); x in (-inf, inf)", 0, None)
