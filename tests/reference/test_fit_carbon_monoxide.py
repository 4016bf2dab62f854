"""CO's constants from its published 1-0 and rotational lines, with a stated model: a Morse oscillator that turns.

Lines: A. Maki, infrared frequency standards, CRC Handbook, and CDMS (field 4 of the collected check values). Constants to
compare with: Huber and Herzberg 1979 (NIST Chemistry WebBook, SRD 69). The model has three numbers, so we and wexe, which two
vibrational levels alone cannot tell apart, hang on the shape of the Morse curve; B_e and r_e do not.
"""

import math
from pathlib import Path

import pytest
from scipy import constants as si

from specterm.analysis.fit_levels import Solver
from specterm.analysis.fitting import fit
from specterm.analysis.observed import read_observed
from specterm.language import parse
from specterm.model import build

MASS = 12 * 15.99491461957 / (12 + 15.99491461957)
SHEET = f"""
units: energy cm^-1, length angstrom, mass u
H = p^2/(2*mu) + D0*(1 - exp(-a*(r - re)))^2 + hbar^2*J*(J + 1)/(2*mu*r^2)
r in (0.3, inf)
mu = {MASS!r}
D0 = 90000
a = 2.3
re = 1.13
J = 0
"""
R_LINES = (2147.081132, 2150.856006, 2154.595581, 2158.299710)
P_LINES = (2139.426071, 2135.546178, 2131.631574, 2127.682404)
ROTATION = (115271.2018, 230538.0000, 345795.9899)


def write_lines(path: Path) -> None:
    """Write the published lines as a file; uncertainties from the digits printed."""
    rows = [f"0,1,{J},{J + 1},{value},cm^-1,5e-6" for J, value in enumerate(R_LINES)]
    rows += [f"0,1,{J},{J - 1},{value},cm^-1,5e-6" for J, value in enumerate(P_LINES, 1)]
    rows += [f"0,0,{J},{J + 1},{value},MHz,5e-4" for J, value in enumerate(ROTATION)]
    path.write_text("\n".join(["from,to,from.J,to.J,value,unit,uncertainty", *rows]))


def test_constants(tmp_path):
    """The 11 lines fit to 2e-6 cm^-1; B_e and r_e agree to 1e-5, we to 0.2 %, wexe to 6 %, the model's own limit."""
    write_lines(tmp_path / "lines.csv")
    observed = read_observed(build(parse(SHEET)), tmp_path / "lines.csv")
    free = dict.fromkeys(("D0", "a", "re"), (-math.inf, math.inf))
    found = fit(SHEET, observed, free, Solver())
    depth, steep, place = (one.value for one in found.parameters)
    turn = si.hbar**2 / (2 * MASS * si.atomic_mass) / (si.h * si.c * 100) * 1e20  # hbar^2/2 mu in cm^-1 A^2
    assert found.converged
    assert abs(found.residuals).max() < 2e-6
    assert found.reduced < 3
    assert turn / place**2 == pytest.approx(1.93128087, rel=1.2e-5)
    assert place == pytest.approx(1.128323, rel=6e-6)
    harmonic, anharmonic = 2 * steep * math.sqrt(turn * depth), steep**2 * turn
    assert harmonic == pytest.approx(2169.81358, rel=2e-3)
    assert anharmonic == pytest.approx(13.28831, rel=6e-2)
    assert harmonic - 2 * anharmonic == pytest.approx(2143.2711, abs=0.2)
