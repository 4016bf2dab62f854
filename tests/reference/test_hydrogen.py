"""The hydrogen atom with units: radial levels, strengths of lines, wavenumbers.

Point nucleus, no relativity; constants CODATA 2022 on both sides. The constants themselves are printed with 11 digits or more,
so numbers put together from them in another order agree to about 1e-11 of the value: CONSTANTS below.
"""

import math

import numpy as np
import pytest
from answers import points, spectrum, wave, within
from scipy import constants

CONSTANTS = 3e-11
RYDBERG = constants.value("Rydberg constant times hc in eV")


def radial(order, units="energy eV, length nm, mass m_e", mass="m_e"):
    """Return the sheet of the radial functions r R(r) with angular momentum `order`."""
    return (
        f"units: {units}\nmu = {mass}\nl = {order}\n"
        "H = p^2/(2*mu) + l*(l + 1)*hbar^2/(2*mu*r^2) - e^2/(4*pi*eps_0*r)\nr in (0, inf)"
    )


ATOMIC = "l = {}\nH = p^2/2 + l*(l + 1)/(2*r^2) - 1/r\nr in (0, inf)"


@pytest.mark.parametrize("order", [0, 1, 2, 5])
def test_levels_in_electron_volts(order):
    """-13.605693122990 eV/n^2, n = l + 1, ... (CODATA 2022 as in scipy.constants)."""
    found = spectrum(radial(order), 6)
    assert found.bound is None
    assert found.threshold == 0
    for level in found.levels:
        exact = -RYDBERG / (level.index + order + 1) ** 2
        assert abs(level.value - exact) <= level.error + CONSTANTS * abs(exact)


def test_wavenumbers_of_the_atom():
    """R_H = 109677.583402773 cm^-1 with the reduced mass; the 1s-2p and 2s-3p steps are 82258.1876 and 15232.9977 (recomputed).

    Observed means (NIST, second-hand) 82259.158 and 102823.904 above 1s for n = 2 and 4 agree to 1.2e-5.
    """
    found = spectrum(radial(0, "energy cm^-1, length a_0, mass m_e", "m_e*m_p/(m_e + m_p)"), 4)
    value = [level.value for level in found.levels]
    assert -value[0] == pytest.approx(109677.583402773, rel=CONSTANTS)
    within(value[1] - value[0], "82258.1876", found.levels[0].error)
    within(value[2] - value[1], "15232.9977", found.levels[1].error)
    assert value[1] - value[0] == pytest.approx(82259.158, rel=1.3e-5)
    assert value[3] - value[0] == pytest.approx(102823.904, rel=1.3e-5)


def strengths(lower, upper, count):
    """Return f = (2/3) (E_n - E_m) <r>^2 max(l)/(2 l + 1) of all steps between two sets of radial functions, atomic units."""
    a, b = spectrum(ATOMIC.format(lower), count), spectrum(ATOMIC.format(upper), count)
    x, w = points(a.states.places, b.states.places)
    length = (wave(a, x) * (w * x)) @ wave(b, x).T
    steps = np.array([[v.value - u.value for v in b.levels] for u in a.levels])
    return 2 / 3 * steps * length**2 * max(lower, upper) / (2 * lower + 1), length


def test_strengths_of_the_lyman_lines():
    """f(1s-np) = 2^8 n^5 (n-1)^(2n-4)/(3 (n+1)^(2n+4)) (Bethe, Salpeter 1957, from memory; recomputed with mpmath)."""
    found, length = strengths(0, 1, 6)
    printed = ["0.416196718", "0.0791015625", "0.02899102925", "0.01393834388", "0.007799492719"]
    for k, text in enumerate(printed):
        within(found[0, k], text, 1e-11)
        n = k + 2
        formula = 2**8 * n**5 * (n - 1.0) ** (2 * n - 4) / (3 * (n + 1.0) ** (2 * n + 4))
        assert found[0, k] == pytest.approx(formula, rel=1e-11)
    assert length[0, 0] ** 2 == pytest.approx(2**15 / 3**9, rel=1e-11)


def test_strengths_between_excited_levels():
    """2s-3p 0.43486543872, 2p-3s 0.01358954496, 2p-3d 0.695784701952 and their mean 0.640747044864 (same source)."""
    s_to_p, p_to_d = strengths(0, 1, 4)[0], strengths(1, 2, 4)[0]
    p_to_s = strengths(1, 0, 4)[0]
    lines = {"0.43486543872": s_to_p[1, 1], "0.01358954496": p_to_s[0, 2], "0.695784701952": p_to_d[0, 0]}
    for text, found in lines.items():
        within(float(found), text, 1e-11)
    mean = (2 * s_to_p[1, 1] + 6 * (p_to_s[0, 2] + p_to_d[0, 0])) / 8
    within(float(mean), "0.640747044864", 1e-11)


def test_mean_radius():
    """<r> = (3 n^2 - l(l+1))/2 in Bohr radii (closed form), also with units."""
    for order in (0, 1, 2):
        found = spectrum(ATOMIC.format(order), 4)
        x, w = points(found.states.places)
        density = wave(found, x) ** 2 * w
        mean, square = density @ x, density @ x**2
        for k in range(4):
            exact = (3 * (k + order + 1) ** 2 - order * (order + 1)) / 2
            slack = 2 * found.vector_error[k] * math.sqrt(square[k] - mean[k] ** 2)  # first order in the error of the state
            assert abs(mean[k] - exact) <= slack + 1e-14 * exact
    found = spectrum(radial(0), 6)
    x, w = points(found.states.places)
    bohr = constants.value("Bohr radius") * 1e9
    assert ((wave(found, x) ** 2 * w) @ x)[0] == pytest.approx(1.5 * bohr, rel=CONSTANTS)


def test_rydberg_levels_near_the_threshold():
    """Level 59 of 1/r is -1/7200 (closed form), told from its neighbours and from the continuum."""
    found = spectrum(ATOMIC.format(0), 60)
    level = found.levels[59]
    assert level.kind == "bound"
    assert abs(level.value + 1 / 7200) <= level.error + math.ulp(1 / 7200)
