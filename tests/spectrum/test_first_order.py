"""Operators of first order on a ring: (B p + p B)/2 + V has E_n = (2 pi n + integral of V/B) / (integral of 1/B), redone."""

import numpy as np
import pytest
from spectrum_making import gram, model, spectrum, within

from specterm.errors import PhysicsError
from specterm.spectrum import solve

RING = "x in ring(0, 2*pi)"


def test_momentum():
    """P has the whole numbers."""
    found = spectrum(f"H = p; {RING}", 5, near=0.1)
    within(found, [-2, -1, 0, 1, 2])
    assert [level.index for level in found.levels] == [-2, -1, 0, 1, 2]
    assert {level.kind for level in found.levels} == {"bound"}


def test_phase():
    """A Bloch phase q shifts them by q, and they are bands."""
    found = spectrum(f"H = p; {RING}, phase 0.3", 3, near=0.0)
    within(found, [-0.7, 0.3, 1.3])
    assert {level.kind for level in found.levels} == {"band"}


def test_potential_adds_its_mean():
    """A potential adds its mean: cos^2 has 1/2."""
    within(spectrum(f"H = 3*p + cos(x)^2; {RING}", 3, near=0.0), [-2.5, 0.5, 3.5])


def test_varying_speed():
    """With B = 2 + cos x the spacing is 2 pi over the integral of 1/B, sqrt(3) (Gradshteyn and Ryzhik 3.613.1)."""
    found = spectrum(f"B = 2 + cos(x); H = (B*p + p*B)/2; {RING}", 3, near=0.0)
    within(found, np.sqrt(3) * np.arange(-1, 2))


def test_jumping_potential():
    """A step adds its mean exactly."""
    within(spectrum(f"H = p + where(x < pi/2, 4, 0); {RING}", 3, near=1.0), [0, 1, 2])


def test_states():
    """States are orthonormal and solve B psi' = (i (E - V) - B'/2) psi."""
    found = spectrum(f"B = 2 + cos(x); H = (B*p + p*B)/2 + sin(x); {RING}", 5, near=0.0)
    np.testing.assert_allclose(gram(found), np.eye(5), rtol=0, atol=1e-12)
    x = np.linspace(0.1, 6.1, 23)
    psi, slope = found.states.evaluate(x), found.states.evaluate(x, 1)
    E = found.values[:, None]
    np.testing.assert_allclose((2 + np.cos(x)) * slope, (1j * (E - np.sin(x)) + np.sin(x) / 2) * psi, rtol=0, atol=1e-11)


REFUSED = [
    ("H = p; x in (-inf, inf)", 0.0, "continuous"),
    ("H = p; x in (0, inf)", 0.0, "not self-adjoint"),
    ("H = p; x in (0, 1)", 0.0, "not self-adjoint"),
    ("H = p; x in (0, 1), free", 0.0, "not self-adjoint"),
    ("H = p; x in ring(0, 1)", None, "neither a lowest nor a highest"),
    ("H = (sin(x)*p + p*sin(x))/2; x in ring(0, 2*pi)", 0.0, "vanishes"),
    ("H = x^2 + 0*p; x in (-inf, inf)", None, "no momentum"),
]


@pytest.mark.parametrize(("text", "near", "words"), REFUSED)
def test_refused(text, near, words):
    """Off a ring there are no levels, and none without a bottom to count from: the reason is told."""
    with pytest.raises(PhysicsError) as caught:
        solve(model(text), count=3, near=near)
    assert words in caught.value.message + " " + caught.value.mend
