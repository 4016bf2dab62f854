"""Operators of order above two, in a Fourier basis: closed forms, and partners of second order that have the same levels."""

import numpy as np
import pytest
from spectrum_making import gram, model, spectrum, within

from specterm.errors import PhysicsError
from specterm.spectrum import solve


def test_quartic_momentum_is_a_quartic_potential():
    """p^4 + x^2 has the levels of p^2 + x^4: the Fourier transform exchanges x and p."""
    found, partner = spectrum("H = p^4 + x^2; x in (-inf, inf)", 6), spectrum("H = p^2 + x^4; x in (-inf, inf)", 6)
    for a, b in zip(found.levels, partner.levels, strict=True):
        assert abs(a.value - b.value) <= a.error + b.error
    assert found.levels[0].value == pytest.approx(1.060362090484183, rel=1e-11)  # Banerjee, Proc. R. Soc. A 364 (1978) 265
    assert {level.kind for level in found.levels} == {"bound"}
    assert found.complete


def test_square_of_an_oscillator():
    """(p^2 + x^2)^2 has (2 n + 1)^2, orthonormal states."""
    found = spectrum("A = p^2 + x^2; H = A*A; x in (-inf, inf)", 6)
    within(found, (2 * np.arange(6) + 1.0) ** 2)
    np.testing.assert_allclose(gram(found), np.eye(6), rtol=0, atol=1e-11)


@pytest.mark.parametrize(("phase", "kind"), [("", "bound"), (", phase 0.3", "band")])
def test_powers_on_a_ring(phase, kind):
    """p^4 + p^2 on a ring of 2 pi has q^4 + q^2, q = n + phase."""
    q = np.arange(-9, 10) + (0.3 if phase else 0)
    found = spectrum(f"H = p^4 + p^2; x in ring(0, 2*pi){phase}", 6)
    within(found, np.sort(q**4 + q**2)[:6], rounding=1e-14)
    assert {level.kind for level in found.levels} == {kind}


def test_sixth_order():
    """p^6 + x^2 and p^2 + x^6 have the same levels."""
    found, partner = spectrum("H = p^6 + x^2; x in (-inf, inf)", 4), spectrum("H = p^2 + x^6; x in (-inf, inf)", 4)
    for a, b in zip(found.levels, partner.levels, strict=True):
        assert abs(a.value - b.value) <= a.error + b.error


def test_from_the_top():
    """-p^4 - x^2 is counted from the top."""
    found = spectrum("H = -p^4 - x^2; x in (-inf, inf)", 3)
    partner = spectrum("H = p^4 + x^2; x in (-inf, inf)", 3)
    assert found.from_top
    for a, b in zip(found.levels, partner.levels, strict=True):
        assert abs(a.value + b.value) <= a.error + b.error


def test_states_satisfy_their_slopes():
    """Slopes agree with differences, and states vanish outside their box."""
    states = spectrum("H = p^4 + x^2; x in (-inf, inf)", 4).states
    x, h = np.linspace(-3, 3, 31), 1e-5
    differences = (states.evaluate(x + h) - states.evaluate(x - h)) / (2 * h)
    np.testing.assert_allclose(states.evaluate(x, 1), differences, rtol=0, atol=1e-8)
    assert (states.evaluate(np.array([-1e3, 1e3])) == 0).all()


def test_states_are_real_and_positive_on_the_first_lobe():
    """States without oscillating tails are real, and positive on their first lobe from the left."""
    states = spectrum("A = p^2 + x^2; H = A*A; x in (-inf, inf)", 6).states
    psi = states.evaluate(np.linspace(states.left, states.right, 4001))
    np.testing.assert_allclose(psi.imag, 0, atol=1e-10)
    for wave in psi.real:
        assert wave[np.argmax(np.abs(wave) > 1e-3 * np.abs(wave).max())] > 0


REFUSED = [
    ("H = p^4 - x^4; x in (-inf, inf)", "neither|nor a highest"),
    ("H = p^3; x in ring(0, 1)", "nor a highest"),
    ("H = p^4 - exp(-x^2); x in (-inf, inf)", "continuous"),
    ("H = p^4; x in (0, 1)", "walls?"),
    ("H = p^4 + x^2; x in (0, inf)", "open line"),
]


@pytest.mark.parametrize(("text", "words"), REFUSED)
def test_refused(text, words):
    """What has no bottom, a continuum, or walls is refused with the reason."""
    with pytest.raises(PhysicsError, match=words):
        solve(model(text), count=3)


def test_near_is_not_available():
    """Levels near an energy are refused for these, not returned wrong."""
    with pytest.raises(PhysicsError, match="near"):
        solve(model("H = p^4 + x^2; x in (-inf, inf)"), count=2, near=5.0)
