"""Zeros and characteristic values of special functions, as tabulated in the handbooks.

Digits as collected from the tables named (Abramowitz & Stegun = A&S; DLMF); all were recomputed with mpmath to the digits
given. Where scipy.special has the function, it is a second, independent witness.
"""

import math

import numpy as np
import pytest
from answers import agree, ready, spectrum, step, within
from scipy import special
from scipy.optimize import brentq

from specterm.analysis import moments

# DLMF Table 9.9.1, A&S Table 10.13; the tenth from scipy.special.ai_zeros' order of digits, recomputed with mpmath
AIRY_ZEROS = ["-2.33810741045976703849", "-4.08794944413097061664", "-5.52055982809555105913", "-6.78670809007175899878"]
AIRY_SLOPE_ZEROS = ["-1.01879297164747109", "-3.24819758217983654", "-4.82009921117873563"]

# A&S Table 20.1: q -> a0, a1, a2, a5, a10, b1, b2, b5; 15 digits recomputed with a tridiagonal determinant (mpmath)
MATHIEU = {
    5: "-5.80004602085151 1.85818754154775 7.44910973952918 25.5499717499816 100.126369216163 "
    "-5.79008059863777 2.09946044548667 25.5108160463032",
    10: "-13.9369799566589 -2.39914240003626 7.71736984977962 27.7037687339393 100.506770024681 "
    "-13.9365524792501 -2.38215823595696 26.7664263604801",
    15: "-22.513037760864 -8.10110513164183 5.07798319754347 31.9578212521729 101.145203447302 "
    "-22.5130034974235 -8.0993467988959 27.9678805967175",
    20: "-31.3133900703365 -14.4913014251748 1.15428288524675 36.6449897341328 102.048916024437 "
    "-31.3133861669129 -14.4910632559807 28.4682213251027",
    25: "-40.2567795465668 -21.3148996906657 -3.5221647271583 40.0501909858077 103.230204804495 "
    "-40.2567789846842 -21.3148606222499 28.0627658994543",
}
MATHIEU_INDEX = [0, 2, 4, 10, 20, 1, 3, 9]
"""On a ring of 2 pi the levels are a0 < b1 < a1 < b2 < a2 ...: a_n is number 2n, b_n number 2n - 1 (q > 0)."""

# A&S Table 9.5 (cylinder, order m) and Table 10.6 / DLMF 10.58 (sphere, order l)
CYLINDER = {0: ["2.40482555769577", "5.52007811028631", "8.65372791291101"], 1: ["3.83170597020751", "7.01558666981562"],
            2: ["5.13562230184068"], 3: ["6.38016189592398"]}  # fmt: skip
SPHERE = {0: ["3.14159265358979"], 1: ["4.49340945790906", "7.72525183693771"], 2: ["5.76345919689455", "9.09501133047636"],
          3: ["6.98793200050052"]}  # fmt: skip


def mathieu(q):
    """Return the sheet whose levels on a ring of 2 pi are the characteristic values at q."""
    return f"q = {q}\nH = p^2 + 2*q*cos(2*x)\nx in ring(0, 2*pi)"


def test_ramp_before_a_wall_gives_the_airy_zeros():
    """V = F x with a wall at 0: E_k = -a_k (F^2/2)^(1/3), hbar = m = 1 (DLMF Table 9.9.1, recomputed with mpmath)."""
    found = spectrum("F = 3.7\nH = p^2/2 + F*x\nx in (0, inf)", 10)
    unit = (3.7**2 / 2) ** (1 / 3)
    agree(found, dict(enumerate(AIRY_ZEROS)) | {9: "-12.8287767528657572"}, -unit)


def test_ramps_to_both_sides_give_zeros_of_function_and_slope():
    """V = F |x|: even levels are the zeros of Ai', odd ones those of Ai (DLMF Table 9.9.1)."""
    found = spectrum("F = 0.41\nH = p^2/2 + F*abs(x)\nx in (-inf, inf)", 6)
    printed = {2 * k: text for k, text in enumerate(AIRY_SLOPE_ZEROS)} | {2 * k + 1: AIRY_ZEROS[k] for k in range(3)}
    agree(found, printed, -((0.41**2 / 2) ** (1 / 3)))


def test_airy_zeros_of_a_library():
    """The first 60 levels of p^2 + x, x > 0, are the zeros of scipy.special.ai_zeros, which is good to 1e-10 there."""
    found = spectrum("H = p^2 + x\nx in (0, inf)", 60)
    zeros = -special.ai_zeros(60)[0]
    assert np.allclose([level.value for level in found.levels], zeros, rtol=1e-10, atol=0)


def test_mean_place_on_a_ramp():
    """<x> = 2 E/(3 F) on a ramp before a wall (virial theorem, closed form): with p^2 + x, -2 a_k/3."""
    text = "H = p^2 + x\nx in (0, inf)"
    found = spectrum(text, 4)
    for k, zero in enumerate(AIRY_ZEROS):
        assert moments(ready(text), found, k).x == pytest.approx(-2 * float(zero) / 3, rel=1e-11)


@pytest.mark.parametrize("q", MATHIEU)
def test_characteristic_values_of_mathieu(q):
    """A&S Table 20.1 on a ring of 2 pi."""
    agree(spectrum(mathieu(q), 21), dict(zip(MATHIEU_INDEX, MATHIEU[q].split(), strict=True)))


@pytest.mark.parametrize("q", [0.3, 7.77, 41.0])
def test_characteristic_values_of_a_library(q):
    """All of a0 ... a8 and b1 ... b8 agree with scipy.special.mathieu_a and mathieu_b to 1e-11 (what those give here)."""
    found = spectrum(mathieu(q), 17)
    library = [special.mathieu_a(n, q) for n in range(9)] + [special.mathieu_b(n, q) for n in range(1, 9)]
    assert np.allclose([level.value for level in found.levels], sorted(library), rtol=1e-11, atol=1e-11)


def test_weak_modulation_series():
    """a0 at q = 0.1: DLMF 28.6.1 gives -q^2/2 + 7 q^4/128 - 29 q^6/2304 + 68687 q^8/18874368, next term below 2e-12."""
    level = spectrum(mathieu(0.1), 1).levels[0]
    q = 0.1
    series = -(q**2) / 2 + 7 * q**4 / 128 - 29 * q**6 / 2304 + 68687 * q**8 / 18874368
    assert abs(level.value - series) < 2e-12
    within(level.value, "-0.00499454380053", level.error)  # recomputed with mpmath


def test_splitting_under_strong_modulation():
    """b1 - a0 at q = 25 is 5.618826e-7 (recomputed, mpmath); DLMF 28.8.2 (from memory) with one correction is 0.13 % above."""
    difference, error = step(spectrum(mathieu(25), 21), 0, 1)
    within(difference, "5.618826e-7", error)
    root = math.sqrt(25)
    formula = 2**5 * math.sqrt(2 / math.pi) * root**1.5 * math.exp(-4 * root) * (1 - 7 / (32 * root))
    assert formula / difference - 1 == pytest.approx(1.3e-3, abs=1e-4)


@pytest.mark.parametrize("m", CYLINDER)
def test_hard_cylinder_gives_the_bessel_zeros(m):
    """-u'' + (m^2 - 1/4)/r^2 u on (0, 1): E = j_{m,s}^2 (A&S Table 9.5); m = 0 is the limiting singular end."""
    found = spectrum(f"m = {m}\nH = p^2 + (m^2 - 1/4)/r^2\nr in (0, 1)", 3)
    for level, text in zip(found.levels, CYLINDER[m], strict=False):
        root = math.sqrt(level.value)
        within(root, text, level.error / (2 * root))


@pytest.mark.parametrize("order", SPHERE)
def test_hard_sphere_gives_the_spherical_bessel_zeros(order):
    """-u'' + l(l+1)/r^2 u on (0, 1): E = zeros of j_l squared (A&S Table 10.6)."""
    found = spectrum(f"l = {order}\nH = p^2 + l*(l + 1)/r^2\nr in (0, 1)", 2)
    for level, text in zip(found.levels, SPHERE[order], strict=False):
        root = math.sqrt(level.value)
        within(root, text, level.error / (2 * root))


@pytest.mark.parametrize(
    ("half", "printed"),
    [
        ("0.5", ["4.95112932325413041", "19.7745341792083199"]),
        ("1", ["1.29845983203205669", "5.07558201522678307"]),
        ("2", ["0.537461209281675164", "1.76481643878063679"]),
        ("3", ["0.500391082929748591", "1.50608152725279462"]),
    ],
)
def test_confined_oscillator(half, printed):
    """(p^2 + x^2)/2 on |x| < L: zeros of 1F1(1/4 - E/2; 1/2; L^2) and 1F1(3/4 - E/2; 3/2; L^2), recomputed with mpmath."""
    agree(spectrum(f"H = (p^2 + x^2)/2\nx in (-{half}, {half})", 2), dict(enumerate(printed)))


def test_oscillator_cut_off_centre():
    """(p^2 + x^2)/2 on (c, inf): D_{E - 1/2}(sqrt(2) c) = 0, solved here with scipy.special.pbdv to 1e-12."""
    cut = -0.7
    found = spectrum(f"H = (p^2 + x^2)/2\nx in ({cut}, inf)", 4)
    grid = np.linspace(0.51, 8.0, 200)
    at_cut = [special.pbdv(e - 0.5, math.sqrt(2) * cut)[0] for e in grid]
    roots = [
        brentq(lambda e: special.pbdv(e - 0.5, math.sqrt(2) * cut)[0], a, b, xtol=1e-14)
        for a, b, low, high in zip(grid[:-1], grid[1:], at_cut[:-1], at_cut[1:], strict=True)
        if low * high < 0
    ]
    assert [level.value for level in found.levels] == pytest.approx(roots[:4], rel=1e-12)
