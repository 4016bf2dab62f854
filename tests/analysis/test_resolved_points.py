"""Integration points that follow a function, however narrow."""

import numpy as np
import pytest

from specterm.analysis.quadrature import resolved_points


@pytest.mark.parametrize("width", [1.0, 1e-2])
def test_narrow_gaussian(width):
    """The squared norm of a gaussian that some point meets is exact: width sqrt(pi/2) (recomputed here)."""

    def wave(x):
        return np.exp(-(((x - 0.3) / width) ** 2))

    x, w, missed = resolved_points(wave, np.array([-10.0, 0.3, 10.0]))
    assert (w * wave(x) ** 2).sum() == pytest.approx(width * np.sqrt(np.pi / 2), rel=1e-12)
    assert missed < 1e-20


def test_fast_wave():
    """A fast wave is resolved: its overlap with a slow one is exact."""

    def wave(x):
        return np.exp(1j * 800 * x)

    x, w, _ = resolved_points(wave, np.array([0.0, 1.0]))
    assert (w * wave(x)).sum() == pytest.approx((np.exp(800j) - 1) / 800j, abs=1e-13)


def test_jump_not_at_a_place():
    """Towards a jump pieces are halved until it does not matter; what may be missed is told."""
    x, w, missed = resolved_points(lambda x: (x < 1 / 3).astype(float), np.array([0.0, 1.0]))
    assert w[x < 1 / 3].sum() == pytest.approx(1 / 3, abs=1e-9)
    assert missed < 1e-9


def test_zero_everywhere():
    """A function that is zero everywhere misses nothing."""
    assert resolved_points(np.zeros_like, np.array([0.0, 1.0]))[2] == 0
