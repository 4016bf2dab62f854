"""Oscillator strengths and dipoles of wells, oscillators, hydrogen and a Morse bond against closed forms and printed values."""

import math

import pytest
from answers import ready, spectrum

from specterm.analysis.transitions import into_other, transitions

HYDROGEN = "H = p^2/2 + l*(l + 1)/(2*r^2) - 1/r\nl = {l}\nr in (0, inf)"


def lines(text, start=0, count=12, dipole=None):
    """Return the lines from a level by the level they end at."""
    found = transitions(ready(text), spectrum(text, count), (start,), dipole)
    return {line.to: line for line in found.lines}


@pytest.mark.parametrize(("start", "end", "printed"), [
    (0, 1, "0.96067493"), (1, 0, "-0.96067493"), (1, 2, "1.8675521"), (1, 4, "0.070020038"),
])  # fmt: skip
def test_infinite_well(start, end, printed):
    """256/(27 pi^2) = 0.960674922, ... (check-values field 14, verified there to 8 digits)."""
    line = lines("H = p^2/2\nx in (0, 1)", start)[end]
    assert line.strength == pytest.approx(float(printed), abs=10.0 ** -(len(printed.split(".")[1])))


def test_infinite_well_series():
    """F(n <- 1) = 64 n^2/(pi^2 (n^2 - 1)^3) for even n (closed form), each within the error told."""
    for end, line in lines("H = p^2/2\nx in (0, 1)", count=16).items():
        n = end + 1
        expected = 64 * n * n / (math.pi**2 * (n * n - 1.0) ** 3) if n % 2 == 0 else 0.0
        assert abs(line.strength - expected) <= line.strength_error
        assert line.strength_error < 1e-10


@pytest.mark.parametrize(("n", "printed"), [
    (2, 0.416196718), (3, 0.0791015625), (4, 0.02899102925), (5, 0.01393834388), (6, 0.007799492719),
])  # fmt: skip
def test_lyman_series(n, printed):
    """1s-np strengths (check-values field 13; Bethe and Salpeter 1957): a third of the radial one, as an s state has l = 0."""
    lower, upper = HYDROGEN.format(l=0), HYDROGEN.format(l=1)
    found = into_other(ready(lower), spectrum(lower, 6), spectrum(upper, 6), (0,), "r")
    line = {line.to: line for line in found.lines}[n - 2]
    assert line.strength / 3 == pytest.approx(printed, rel=1e-9)


def test_radial_integral_of_lyman_alpha():
    """|<1s|r|2p>|^2 = 2^15/3^9 (closed form), within the error of the dipole."""
    lower, upper = HYDROGEN.format(l=0), HYDROGEN.format(l=1)
    found = into_other(ready(lower), spectrum(lower, 6), spectrum(upper, 6), (0,), "r")
    line = found.lines[0]
    assert abs(abs(line.dipole) - math.sqrt(2.0**15 / 3**9)) <= line.dipole_error
    assert line.dipole_error < 1e-9


@pytest.mark.parametrize(("start", "end", "row", "factor", "printed"), [
    (0, 1, 1, 3, 0.43486543872),
    (1, 0, 0, 9, 0.01358954496),
    (1, 2, 0, 4.5, 0.695784701952),
])  # fmt: skip
def test_balmer_alpha(start, end, row, factor, printed):
    """2s-3p, 2p-3s and 2p-3d strengths (check-values field 13): max(l, l')/(6 l + 3) of the radial one."""
    lower, upper = HYDROGEN.format(l=start), HYDROGEN.format(l=end)
    found = into_other(ready(lower), spectrum(lower, 4), spectrum(upper, 4), (row,), "r")
    target = 3 - end - 1
    line = {line.to: line for line in found.lines}[target]
    assert line.strength / factor == pytest.approx(printed, rel=1e-8)


def test_ground_line_of_a_morse_bond():
    """|<0|x|1>| for D = 50, a = 0.6, m = 1, recomputed here with mpmath from the closed functions (Morse 1929, from memory)."""
    mpmath = pytest.importorskip("mpmath")
    text = "H = p^2/2 + D*(1 - exp(-a*x))^2\nD = 50\na = 0.6\nx in (-inf, inf)"
    lam = mpmath.sqrt(2 * 50) / mpmath.mpf("0.6")

    def wave(n, x):
        z, s = 2 * lam * mpmath.exp(-mpmath.mpf("0.6") * x), lam - n - mpmath.mpf(1) / 2
        return z**s * mpmath.exp(-z / 2) * mpmath.laguerre(n, 2 * s, z)

    cells = [-2.5, -1.5, -1, -0.5, 0, 0.5, 1, 1.5, 2, 3, 5, 9]
    norms = [mpmath.quad(lambda x, n=n: wave(n, x) ** 2, cells) for n in (0, 1)]
    element = mpmath.quad(lambda x: wave(0, x) * x * wave(1, x), cells) / mpmath.sqrt(norms[0] * norms[1])
    line = lines(text, 0, 6)[1]
    assert abs(abs(line.dipole) - abs(float(element))) <= line.dipole_error
    assert line.dipole_error < 1e-8
