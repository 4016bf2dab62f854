"""Eigenstates as functions: values, slopes, signs, phases."""

import numpy as np
import pytest
from spectrum_making import gram, spectrum

SHEETS = {
    "quartic": "H = p^2 + x^4; x in (-inf, inf)",
    "box": "H = p^2; x in (0, 1)",
    "layers": "H = p*(1/(1 + where(x < 0, 0, 2)))*p + where(abs(x) < 2, 0, 9); x in (-5, 5)",
    "Coulomb": "H = p^2 - 2/x; x in (0, inf)",
    "half power": "H = p^2 - 1/(4*x^2) + x^2; x in (0, inf)",
    "right end": "H = p^2 + 2/(3-x)^2; x in (0, 3)",
    "ring": "H = p^2 + cos(x); x in ring(0, 2*pi)",
    "band": "H = p^2 + cos(x); x in ring(0, 2*pi), phase 0.3",
    "gauge": "A = x^2/3; H = (p - A)^2 + x^4; x in (-inf, inf)",
}


@pytest.fixture(params=SHEETS, ids=str)
def found(request):
    """Return five levels of a sheet."""
    return spectrum(SHEETS[request.param], 5)


def inner_places(found, count=157):
    """Return places inside the mesh, off its vertices."""
    places = found.states.places
    low, high = max(places[0], -8.0), min(places[-1], 8.0)
    x = low + (high - low) * (np.arange(count) + 0.417) / count
    return x[np.abs(x[:, None] - places).min(axis=1) > 1e-4 * (high - low)]


def test_slopes(found):
    """Slopes agree with central differences of the values."""
    x, h = inner_places(found), 1e-6
    differences = (found.states.evaluate(x + h) - found.states.evaluate(x - h)) / (2 * h)
    slopes = found.states.evaluate(x, 1)
    np.testing.assert_allclose(slopes, differences, rtol=0, atol=1e-6 * np.abs(slopes).max())


def test_shape_and_orthonormality(found):
    """All states at all places, shape (5, n), orthonormal."""
    assert found.states.evaluate(np.zeros(7)).shape == (5, 7)
    np.testing.assert_allclose(gram(found), np.eye(5), rtol=0, atol=1e-10)


def test_zero_outside(found):
    """Outside the mesh a state and its slope are 0."""
    places = found.states.places
    away = np.array([places[0] - 1.0, places[-1] + 1e-6, places[-1] + 50.0])
    for derivative in (0, 1):
        assert (found.states.evaluate(away, derivative) == 0).all()


@pytest.mark.parametrize("name", ["quartic", "box", "layers", "Coulomb", "half power", "right end", "ring"])
def test_real_and_positive_on_the_first_lobe(name):
    """States are real where they can be, and positive on the first lobe from the left."""
    found = spectrum(SHEETS[name], 5)
    places = found.states.places
    psi = found.states.evaluate(np.linspace(places[0], places[-1], 20001))
    assert np.isrealobj(psi) or np.abs(psi.imag).max() < 1e-12
    for wave in psi.real:
        assert wave[np.argmax(np.abs(wave) > 1e-3 * np.abs(wave).max())] > 0


def test_nodes_are_counted():
    """State n of an interval changes its sign n times."""
    for name in ("quartic", "box", "layers", "half power"):
        found = spectrum(SHEETS[name], 5)
        psi = found.states.evaluate(inner_places(found, 4000))
        for n, wave in enumerate(psi):
            loud = wave[np.abs(wave) > 1e-6 * np.abs(wave).max()]
            assert np.count_nonzero(np.diff(np.sign(loud))) == n


def test_walls():
    """At walls states are 0, at free ends their slope is 0."""
    found = spectrum("H = p^2 + x; x in (0, 2), free right", 4)
    assert np.abs(found.states.evaluate(np.array([0.0]))).max() < 1e-12
    assert np.abs(found.states.evaluate(np.array([2.0]), 1)).max() < 1e-7
    assert np.abs(found.states.evaluate(np.array([2.0]))).min() > 0.1


def test_flux_is_continuous_where_the_mass_jumps():
    """Across a jump of K, psi and K psi' go on."""
    states = spectrum(SHEETS["layers"], 4).states
    left, right = (states.evaluate(np.array([side]), 1)[:, 0] for side in (-1e-9, 1e-9))
    np.testing.assert_allclose(left, right / 3, rtol=0, atol=1e-6)
    sides = states.evaluate(np.array([-1e-9, 1e-9]))
    np.testing.assert_allclose(sides[:, 0], sides[:, 1], rtol=0, atol=1e-7)


def test_hydrogen_near_the_nucleus():
    """Ground state 2 r exp(-r) and slope 2 (1 - r) exp(-r) down to r = 1e-12 (closed form, recomputed here)."""
    states = spectrum(SHEETS["Coulomb"], 5).states
    r = np.geomspace(1e-12, 5, 60)
    np.testing.assert_allclose(states.evaluate(r)[0], 2 * r * np.exp(-r), rtol=1e-9)
    np.testing.assert_allclose(states.evaluate(r, 1)[0], 2 * (1 - r) * np.exp(-r), rtol=0, atol=1e-8)


def test_square_root_at_the_critical_strength():
    """With -1/4x^2 + x^2 the ground state is sqrt(2 x) exp(-x^2/2) (closed form, recomputed here)."""
    x = np.geomspace(1e-10, 4, 60)
    psi = spectrum(SHEETS["half power"], 5).states.evaluate(x)[0]
    np.testing.assert_allclose(psi, np.sqrt(2 * x) * np.exp(-(x**2) / 2), rtol=1e-9)


@pytest.mark.parametrize(
    ("text", "vector", "potential"),
    [
        (SHEETS["gauge"], lambda x: x**2 / 3, lambda x: x**4),
        ("A = 0.4; H = (p - A)^2 + cos(x); x in ring(0, 2*pi)", lambda x: 0.4 + 0 * x, np.cos),
        ("A = sin(x)/2; H = (p - A)^2 + cos(x); x in ring(0, 2*pi), phase 0.2", lambda x: np.sin(x) / 2, np.cos),
    ],
)
def test_gauge(text, vector, potential):
    """With a vector potential the complex states solve (p - A)^2 psi + V psi = E psi, tested weakly against smooth bumps."""
    found = spectrum(text, 4)
    t, w = np.polynomial.legendre.leggauss(60)
    middle, half = (1.0, 1.5) if "inf" in text else (np.pi, 2.5)
    x = middle + half * t
    bump, bump_slope = (1 - t**2) ** 3, -6 * t * (1 - t**2) ** 2 / half
    psi, slope = found.states.evaluate(x), found.states.evaluate(x, 1)
    velocity, bump_velocity = -1j * slope - vector(x) * psi, -1j * bump_slope - vector(x) * bump
    left = ((bump_velocity.conj() * velocity + potential(x) * bump * psi) * w).sum(axis=1)
    np.testing.assert_allclose(left, found.values * (bump * psi * w).sum(axis=1), rtol=0, atol=1e-9)


@pytest.mark.parametrize("phase", [0.0, 0.2, 0.5, -0.3])
@pytest.mark.parametrize("gauge", ["", "sin(x)/2 + 0.3"])
def test_bloch_phase(phase, gauge):
    """Around a ring the whole state gains exp(2 pi i phase), its slope too, with or without a vector potential."""
    kinetic = f"(p - ({gauge}))^2" if gauge else "p^2"
    states = spectrum(f"H = {kinetic} + cos(x); x in ring(0, 2*pi), phase {phase}", 4).states
    ends = np.array([0.0, 2 * np.pi])
    turn = np.exp(2j * np.pi * phase)
    for derivative, slip in ((0, 1e-9), (1, 1e-6)):
        values = states.evaluate(ends, derivative)
        np.testing.assert_allclose(values[:, 1], turn * values[:, 0], rtol=0, atol=slip)


def test_parity_of_the_states():
    """States called even or odd are so about the centre."""
    found = spectrum("H = p^2 + (x-3)^4; x in (-inf, inf)", 4)
    d = np.linspace(0.05, 2, 20)
    right, left = found.states.evaluate(3 + d), found.states.evaluate(3 - d)
    for level, a, b in zip(found.levels, right, left, strict=True):
        np.testing.assert_allclose(a, b if level.parity == "even" else -b, rtol=0, atol=1e-9)
