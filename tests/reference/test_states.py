"""Spreads, strengths and weights of eigenstates with closed forms."""

import math

import numpy as np
import pytest
from answers import points, ready, spectrum, wave, within
from scipy import special

from specterm.analysis import moments, project

WALLS = "H = p^2/2\nx in (0, 1)"
OSCILLATOR = "H = (p^2 + x^2)/2\nx in (-inf, inf)"


def test_uncertainty_products_between_walls():
    """Dx dp/hbar = sqrt(n^2 pi^2/3 - 2)/2: 0.567862, 1.670290, 2.627204 (closed form, recomputed)."""
    found = spectrum(WALLS, 12)
    for k, text in enumerate(("0.567862", "1.670290", "2.627204")):
        at = moments(ready(WALLS), found, k)
        within(at.spread_x * at.spread_p, text)
    for k in range(12):
        at = moments(ready(WALLS), found, k)
        assert at.spread_x * at.spread_p == pytest.approx(math.sqrt((k + 1) ** 2 * math.pi**2 / 3 - 2) / 2, rel=1e-11)
        assert at.x == pytest.approx(0.5, rel=1e-12)
        assert at.p == pytest.approx(0, abs=1e-12)


def test_uncertainty_products_of_an_oscillator_in_units():
    """Dx dp = (n + 1/2) hbar, dx^2 = (n + 1/2) hbar/(m w) (closed form) for a trapped atom in nK, um and u."""
    text = (
        "units: energy nK, length um, mass u\nm = 86.9\nw = 2*pi*50 [Hz]/h\nH = p^2/(2*m) + m*w^2*(x - 3)^2/2\nx in (-inf, inf)"
    ).replace("2*pi*50 [Hz]/h", "2*pi*50 [1/s]")
    found = spectrum(text, 6)
    hbar = ready(text).hbar
    for k in range(6):
        at = moments(ready(text), found, k)
        assert at.spread_x * at.spread_p == pytest.approx((k + 0.5) * hbar, rel=1e-11)
        assert at.spread_x**2 == pytest.approx((k + 0.5) * hbar / (86.9 * ready(text).parameters["w"]), rel=1e-11)
        assert at.x == pytest.approx(3, rel=1e-12)


def test_strengths_between_walls():
    """f_{n<-1} = 64 n^2/(pi^2 (n^2 - 1)^3) for even n, sum 1; from 2 recomputed (closed form)."""
    found = spectrum(WALLS, 40)
    x, w = points(found.states.places)
    psi = wave(found, x)
    values = np.array([level.value for level in found.levels])
    strength = 2 * (values[None, :] - values[:, None]) * ((psi * (w * x)) @ psi.T) ** 2
    for n in (2, 4, 6, 8):
        assert strength[0, n - 1] == pytest.approx(64 * n**2 / (math.pi**2 * (n**2 - 1.0) ** 3), rel=1e-10)
    even = np.arange(2.0, 41, 2)
    assert strength[0].sum() == pytest.approx((64 * even**2 / (math.pi**2 * (even**2 - 1) ** 3)).sum(), rel=1e-10)
    for n, text in {1: "-0.96067493", 3: "1.8675521", 5: ".070020038"}.items():
        within(float(strength[1, n - 1]), text, 1e-10)


def test_strengths_of_an_oscillator():
    """Only neighbours are joined by x, with f = n + 1 upwards and -n downwards (closed form)."""
    found = spectrum(OSCILLATOR, 8)
    x, w = points(found.states.places)
    psi = wave(found, x)
    values = np.array([level.value for level in found.levels])
    strength = 2 * (values[None, :] - values[:, None]) * ((psi * (w * x)) @ psi.T) ** 2
    n = np.arange(8.0)
    expected = np.diag(n[:-1] + 1, 1) - np.diag(n[1:], -1)
    assert np.allclose(strength, expected, atol=1e-10)


def test_coherent_state():
    """|alpha|^2 = 4: weights e^-4 4^n/n! (Poisson), mean 4.5 and spread 2; printed digits recomputed."""
    text = "H = (p^2 + x^2)/2\nx in (-inf, inf)\nstate kicked = exp(-(x - 2)^2/2)*exp(i*2*x)"
    kicked = project(ready(text), spectrum(text, 40), "kicked")
    printed = [".0183156389", ".0732625556", ".1465251111", ".1953668148", ".1953668148", ".1562934519", ".1041956346"]
    for weight, digits in zip(kicked.weights, printed, strict=False):
        within(weight.weight, digits, weight.error)
    for weight in kicked.weights:
        assert abs(weight.weight - math.exp(-4) * 4**weight.index / math.factorial(weight.index)) <= weight.error + 1e-16
    assert kicked.captured == pytest.approx(1, abs=1e-11)
    assert kicked.mean == pytest.approx(4.5, rel=1e-10)
    assert kicked.spread == pytest.approx(2, rel=1e-10)


def test_displaced_ground_state():
    """Franck-Condon factors of equal oscillators, S = 1: e^-1/n! (closed form, recomputed)."""
    text = f"{OSCILLATOR}\nstate moved = exp(-(x - sqrt(2))^2/2)"
    moved = project(ready(text), spectrum(text, 12), "moved")
    for weight, digits in zip(moved.weights, [".3678794412", ".3678794412", ".1839397206", ".0613132402"], strict=False):
        within(weight.weight, digits, weight.error)


def test_level_of_another_sheet(tmp_path):
    """q00 = 2 sqrt(w1 w2)/(w1 + w2) exp(-w1 w2 d^2/(w1 + w2)) for w = 1, 2, d = 1 (Hutchisson 1930, from memory)."""
    (tmp_path / "lower.sheet").write_text("H = (p^2 + x^2)/2\nx in (-inf, inf)\n")
    text = 'H = p^2/2 + 2*(x - 1)^2\nx in (-inf, inf)\nstate arriving = level(0) of "lower.sheet"'
    found = spectrum(text, 30)
    arriving = project(ready(text), found, "arriving", tmp_path)
    within(arriving.weights[0].weight, "0.4840543019", arriving.weights[0].error)
    assert arriving.captured == pytest.approx(1, abs=1e-9)
    for weight in arriving.weights[:8]:
        assert abs(weight.weight - overlap(weight.index) ** 2) <= weight.error + 1e-14


def overlap(n):
    """Return <n, w = 2, centre 1|0, w = 1, centre 0> by a Gauss-Hermite rule, exact for this product."""
    nodes, weights = np.polynomial.hermite.hermgauss(60)
    centre, width = 2 / 3, math.sqrt(2 / 3)  # exp(-x^2/2 - (x-1)^2) = exp(-(x-2/3)^2 3/2) exp(-1/3)
    x = centre + width * nodes
    z = math.sqrt(2) * (x - 1)
    hermite = np.polynomial.hermite.hermval(z, [0] * n + [1])
    norm = (2 / math.pi) ** 0.25 / math.sqrt(2.0**n * math.factorial(n)) * math.pi**-0.25
    return norm * width * math.exp(-1 / 3) * float((weights * hermite).sum())


def test_states_between_walls_are_sines():
    """psi_n = sqrt 2 sin(n pi x), positive on the first lobe (closed form), slopes included."""
    found = spectrum(WALLS, 12)
    x = np.linspace(0, 1, 101)
    n = np.arange(1, 13)[:, None]
    assert np.allclose(wave(found, x), math.sqrt(2) * np.sin(n * math.pi * x), atol=1e-11)
    assert np.allclose(wave(found, x, 1), math.sqrt(2) * n * math.pi * np.cos(n * math.pi * x), atol=1e-8)


@pytest.mark.parametrize("order", [0, 1])
@pytest.mark.parametrize("count", [4, 8])
def test_hydrogen_functions(order, count):
    """Radial functions in atomic units (closed form, Laguerre polynomials) to the error claimed for each eigenstate."""
    found = spectrum(f"l = {order}\nH = p^2/2 + l*(l + 1)/(2*r^2) - 1/r\nr in (0, inf)", count)
    x, w = points(found.states.places)
    psi = wave(found, x)
    for k in range(count):
        n = k + order + 1
        norm = math.sqrt((2 / n) ** 3 * math.factorial(n - order - 1) / (2 * n * math.factorial(n + order)))
        z = 2 * x / n
        exact = norm * x * np.exp(-z / 2) * z**order * special.eval_genlaguerre(n - order - 1, 2 * order + 1, z)
        off = math.sqrt((w * (psi[k] - exact) ** 2).sum())
        assert off <= found.vector_error[k], f"state {k}: off by {off:.1e}, claimed {found.vector_error[k]:.1e}"


def test_states_of_an_oscillator_are_hermite_functions():
    """psi_n = H_n(x) exp(-x^2/2)/sqrt(2^n n! sqrt pi) up to the sign rule, (-1)^n here (closed form)."""
    found = spectrum(OSCILLATOR, 8)
    x = np.linspace(-5, 5, 101)
    for n in range(8):
        hermite = np.polynomial.hermite.hermval(x, [0] * n + [1]) * np.exp(-(x**2) / 2)
        exact = (-1) ** n * hermite / math.sqrt(2.0**n * math.factorial(n) * math.sqrt(math.pi))
        assert np.allclose(wave(found, x)[n], exact, atol=1e-10)
