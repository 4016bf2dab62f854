"""Franck-Condon factors between pairs of Morse bonds.

Constants we, wexe [cm^-1], re [angstrom] of the states of O2, CN, CO, N2, N2+ and I2: Huber and Herzberg (1979), those of the
excited states from memory, as in check-values field 5 (series of such tables: Nicholls, J. Res. NBS 69A (1965) 369). Factors
recomputed here with mpmath (25 digits) from the closed functions of the Morse bond; all digits printed in field 5 agree.
"""

import math

import numpy as np
import pytest
from answers import ready, spectrum, within
from scipy import special
from test_molecules import HALF_HBAR2, MASS, UNITS

from specterm.analysis.transitions import into_other

BONDS = {  # atoms, then we, wexe, re of the upper and of the lower state
    "O2 b-X": ("O", "O", (1432.77, 14.00, 1.22688), (1580.193, 11.981, 1.20752)),
    "CN B-X": ("C", "N", (2163.9, 20.2, 1.150), (2068.59, 13.087, 1.1718)),
    "CO A-X": ("C", "O", (1518.24, 19.40, 1.2353), (2169.81358, 13.28831, 1.128323)),
    "N2 C-B": ("N", "N", (2047.18, 28.445, 1.14869), (1733.39, 14.122, 1.21260)),
    "N2+ B-X": ("N", "N", (2419.84, 23.18, 1.0742), (2207.00, 16.10, 1.11642)),
    "I2 B-X": ("I", "I", (125.697, 0.7642, 3.0247), (214.502, 0.6147, 2.6663)),
}
FACTORS = [  # upper level, lower level, as printed in field 5, recomputed
    ("O2 b-X", 0, 0, ".92976", 0.929761204962), ("O2 b-X", 0, 1, ".06750", 0.0675010620003),
    ("O2 b-X", 1, 0, ".06749", 0.0674851664233), ("O2 b-X", 1, 1, ".78879", 0.788790072001),
    ("CN B-X", 0, 0, ".91555", 0.915545643826), ("CN B-X", 0, 1, ".07808", 0.0780796286764),
    ("CN B-X", 1, 0, ".08314", 0.0831372287804), ("CN B-X", 1, 1, ".77472", 0.774722293102),
    ("CO A-X", 0, 0, ".1106", 0.110626548616), ("CO A-X", 1, 0, ".2098", 0.209766275848),
    ("CO A-X", 2, 0, ".2240", 0.22401962905), ("CO A-X", 3, 0, ".1791", 0.17914728027),
    ("CO A-X", 4, 0, ".1204", 0.12035141984), ("CO A-X", 5, 0, ".0723", 0.0722517825085),
    ("CO A-X", 6, 0, ".0403", 0.0402675227306), ("CO A-X", 7, 0, ".0214", 0.0213715972423),
    ("N2 C-B", 0, 0, ".46933", 0.469328404571), ("N2 C-B", 0, 1, ".32359", 0.323589969756),
    ("N2 C-B", 1, 0, ".39769", 0.39769072684), ("N2+ B-X", 0, 0, ".66125", 0.661249492682),
    ("I2 B-X", 32, 0, ".031696", 0.0316957406894),
]  # fmt: skip


def bond(name, which):
    """Return the sheet of the upper (0) or lower (1) state of a molecule, its bottom at 0."""
    a, b, *states = BONDS[name]
    mu = MASS[a] * MASS[b] / (MASS[a] + MASS[b])
    we, wexe, re = states[which]
    return (
        f"{UNITS}mu = {mu!r}\nwe = {we}\nwexe = {wexe}\nre = {re}\na = sqrt(2*mu*wexe)/hbar\n"
        "H = p^2/(2*mu) + we^2/(4*wexe)*(1 - exp(-a*(r - re)))^2\nr in (-inf, inf)"
    )


def factors(name, lower, count):
    """Return the factors from one lower level into upper ones, with bounds on their errors."""
    here = bond(name, 1)
    found = into_other(ready(here), spectrum(here, 4), spectrum(bond(name, 0), count), (lower,))
    return [(abs(line.dipole) ** 2, 2 * abs(line.dipole) * line.dipole_error + line.dipole_error**2) for line in found.lines]


@pytest.mark.parametrize(("name", "upper", "lower", "printed", "recomputed"), FACTORS)
def test_factor(name, upper, lower, printed, recomputed):
    """Each factor has the printed digits, and the recomputed eight within its error (and the rounding of the constants)."""
    factor, error = factors(name, lower, 40 if name.startswith("I2") else 10)[upper]
    within(factor, printed, error)
    assert factor == pytest.approx(recomputed, rel=1e-8)
    assert abs(factor - recomputed) <= error + 1e-10 * recomputed
    assert error < 1e-8


def test_progression_of_iodine():
    """From v'' = 0 of iodine the factors are largest at v' = 32 (recomputed here and in check-values field 5)."""
    found = [factor for factor, _ in factors("I2 B-X", 0, 40)]
    assert max(range(40), key=found.__getitem__) == 32


def test_closed_functions_of_one_pair():
    """q00 of O2 b-X by a Gauss-Legendre rule over the closed functions of the two bonds (Morse 1929, from memory)."""
    t, w = special.roots_legendre(400)
    r = 1.25 + 0.5 * t
    waves = []
    for we, wexe, re in BONDS["O2 b-X"][2:]:
        a, k = math.sqrt(wexe * MASS["O"] / 2 / HALF_HBAR2), we / wexe
        z, s = k * np.exp(-a * (r - re)), (k - 1) / 2
        waves.append(np.exp(s * np.log(z) - z / 2 + (math.log(a) - special.gammaln(2 * s)) / 2))
    total = 0.5 * float((w * waves[0] * waves[1]).sum())
    assert factors("O2 b-X", 0, 10)[0][0] == pytest.approx(total**2, rel=1e-9)
