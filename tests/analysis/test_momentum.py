"""Densities over momentum against closed forms."""

import numpy as np
import pytest
from analysis_making import model, spectrum
from scipy.special import iv, sici

from specterm.analysis.expectation import expectation
from specterm.analysis.momentum import level_momentum, momentum_density
from specterm.analysis.prepared import prepare

OSCILLATOR = "H = p^2/2 + x^2/2\nx in (-inf, inf)\nstate moved = exp(-(x - 1.3)^2/2 + 4*i*x)\nstate thin = exp(-5e5*(x - 1)^2)"
STIFF = "H = p^2/2 + x^2/2 + 0.1*x^4\nx in (-inf, inf)\nhbar = 0.5\nstate some = level(2) + i*level(5)"
WALLS = "H = p^2/2\nx in (0, 1)\nstate flat = 1"
HYDROGEN = "H = p^2/2 - 1/r\nr in (0, inf)"
RING = "H = p^2/2 + cos(x)\nx in ring(0, 2*pi)\nstate lump = exp(3*cos(x))\nstate wave = exp(2*i*x)"
TWISTED = "H = p^2/2\nx in ring(0, 3), phase 0.18"


def in_state(text, state, count=10, **options):
    """Return the momentum density of a state of a sheet."""
    return momentum_density(model(text), prepare(model(text), spectrum(text, count), state), **options)


@pytest.mark.parametrize("n", [0, 1, 2, 9])
def test_oscillator_levels_look_alike_over_momentum(n):
    """|phi_n(k)|^2 of the oscillator is |psi_n(x)|^2 at x = k (closed form)."""
    found = level_momentum(model(OSCILLATOR), spectrum(OSCILLATOR, 10), n)
    hermite = np.polynomial.hermite.hermval(found.k, [0] * n + [1]) ** 2 * np.exp(-(found.k**2))
    norm = 2.0**n * np.prod(np.arange(1.0, n + 1)) * np.sqrt(np.pi)
    assert np.abs(found.density - hermite / norm).max() < 1e-10
    assert 0.999 <= found.held < 1
    assert not found.discrete


def test_a_moving_packet_sits_at_its_momentum():
    """The packet exp(-(x - a)^2/2 + i q x) has the density exp(-(k - q)^2)/sqrt(pi) (closed form)."""
    found = in_state(OSCILLATOR, "moved")
    assert np.abs(found.density - np.exp(-((found.k - 4) ** 2)) / np.sqrt(np.pi)).max() < 1e-10
    assert found.k[0] + found.k[-1] == pytest.approx(8)


def test_a_packet_far_narrower_than_the_elements_has_its_wide_density():
    """exp(-s x^2) has |phi|^2 = exp(-k^2/(2 s))/sqrt(2 pi s) (closed form)."""
    found, s = in_state(OSCILLATOR, "thin"), 5e5
    expected = np.exp(-(found.k**2) / (2 * s)) / np.sqrt(2 * np.pi * s)
    assert np.abs(found.density - expected).max() < 1e-9 * expected.max()


@pytest.mark.parametrize("n", [1, 2, 5, 40])
def test_well_levels_over_momentum(n):
    """sqrt(2) sin(n pi x) gives 4 pi n^2 cos^2(k/2)/(n^2 pi^2 - k^2)^2, sin^2 for even n (closed form)."""
    found = level_momentum(model(WALLS), spectrum(WALLS, 40), n - 1)
    wave = np.cos(found.k / 2) if n % 2 else np.sin(found.k / 2)
    expected = 4 * np.pi * n**2 * wave**2 / (n**2 * np.pi**2 - found.k**2) ** 2
    assert np.abs(found.density - expected).max() < 1e-9
    assert found.held >= 0.999


def test_hydrogen_ground_state_over_radial_momentum():
    """u(r) = 2 r exp(-r) on the half line gives (2/pi)/(1 + k^2)^2 (closed form)."""
    found = level_momentum(model(HYDROGEN), spectrum(HYDROGEN, 4), 0)
    assert np.abs(found.density - 2 / np.pi / (1 + found.k**2) ** 2).max() < 1e-9
    tail = found.k[-1]
    inside = 2 / np.pi * (tail / (1 + tail**2) + np.arctan(tail))
    assert found.held == pytest.approx(inside, abs=1e-9)


def test_a_state_that_jumps_tells_how_much_its_window_holds():
    """A constant between walls gives sin^2(k/2)/(2 pi (k/2)^2); its share up to K is 2/pi (Si(K) - 2 sin^2(K/2)/K)."""
    found = in_state(WALLS, "flat")
    reach = found.k[-1]
    assert np.abs(found.density - np.sinc(found.k / 2 / np.pi) ** 2 / (2 * np.pi)).max() < 1e-9
    expected = 2 / np.pi * (sici(reach)[0] - 2 * np.sin(reach / 2) ** 2 / reach)
    assert found.held == pytest.approx(expected, abs=1e-9)


def test_momenta_on_a_ring():
    """exp(z cos x) on a ring has the momenta n with probability I_n(z)^2/I_0(2 z) (closed form)."""
    found = in_state(RING, "lump")
    assert found.discrete
    assert np.abs(found.k - np.round(found.k)).max() < 1e-12
    assert np.abs(found.density - iv(np.round(found.k), 3) ** 2 / iv(0, 6)).max() < 1e-12
    assert found.held == pytest.approx(found.density.sum())


def test_one_wave_on_a_ring_has_one_momentum():
    """exp(2 i x) has momentum 2 with probability 1."""
    found = in_state(RING, "wave")
    assert found.density[np.argmin(np.abs(found.k - 2))] == pytest.approx(1, abs=1e-12)
    assert found.density.sum() == pytest.approx(1, abs=1e-12)


def test_momenta_on_a_ring_with_a_phase():
    """Free levels with the phase f on a ring of length L are single waves with k = 2 pi (n + f)/L."""
    found = level_momentum(model(TWISTED), spectrum(TWISTED, 3), 1)
    place = int(np.argmax(found.density))
    assert found.density[place] == pytest.approx(1, abs=1e-10)
    assert found.k[place] == pytest.approx(2 * np.pi * (0.18 - 1) / 3)


@pytest.mark.parametrize(("text", "state"), [(STIFF, "level(3)"), (STIFF, "some"), (RING, "level(4)"), (RING, "lump")])
def test_square_of_momentum_from_the_density(text, state):
    """<p^2> summed over the density is the expectation taken on the wave (Parseval)."""
    found = in_state(text, state, held=1 - 1e-11)
    expected = expectation(model(text), spectrum(text, 10), "p^2", state)
    square = found.density * (model(text).hbar * found.k) ** 2
    total = square.sum() if found.discrete else np.trapezoid(square, found.k)
    assert total == pytest.approx(expected.mean, rel=1e-7)


@pytest.mark.parametrize(
    ("text", "unit"),
    [
        (OSCILLATOR, ""), (STIFF, "hbar"), ("units: energy meV, length nm, mass m_e\nH = p^2/(2*m_e)\nx in (0, 5)", "hbar/nm"),
        ("units: energy GHz, length um, mass m_e\nH = -5*D^2 + cos(a)\na in ring(0 [deg], 360 [deg])", "hbar"),
    ],
)  # fmt: skip
def test_unit_of_momentum(text, unit):
    """Momenta are in hbar over the unit of length, in hbar for an angle, and plain numbers where hbar is 1."""
    assert level_momentum(model(text), spectrum(text, 2), 0).unit == unit
