"""The units of observables: products of powers of the sheet's units and hbar."""

import pytest
from analysis_making import model

from specterm.analysis.unit_names import shown_unit, unit_of

DONOR = """units: energy meV, length nm, mass m_e
H = p^2/(2*m) - e^2/(4*pi*eps_0*kappa*r) + core*exp(-(r/0.8)^2) + e*F*r
r in (0, inf)
m = 0.061
kappa = 9.7
core = -35
F = 2 [kV/cm]
odd = 3
T = p^2/(2*m)
V = core*exp(-(r/0.8)^2)
W = odd*r
v = p/m
"""
NATURAL = "units: energy meV, length nm, mass m_e\nH = p^2/2 + x^2/2\nx in (-inf, inf)\nT = p^2/2\n"
BARE = "H = p^2/2\nx in (0, 1)\n"
CM = "units: energy cm^-1, length angstrom, mass u\nH = p^2/(2*m)\nx in (0, 1)\nm = 3\n"


@pytest.mark.parametrize(("text", "unit"), [
    ("H", "meV"), ("T", "meV"), ("V", "meV"), ("core", "meV"), ("m", "m_e"), ("r", "nm"), ("r^2", "nm^2"), ("1/r", "1/nm"),
    ("F", "meV/(nm e)"), ("e*F", "meV/nm"), ("T^2", "meV^2"), ("e*r", "nm e"), ("sqrt(r)", "nm^(1/2)"), ("2*r", "nm"),
    ("H*r", "meV nm"), ("W", ""), ("odd", ""), ("kappa", ""),
])  # fmt: skip
def test_units_of_the_sheet(text, unit):
    """Energies, lengths, masses and charges are named (dimensional analysis by hand); a number of unknown kind leaves none."""
    assert unit_of(model(DONOR), text) == unit


@pytest.mark.parametrize(("text", "unit", "power"), [
    ("p", "hbar/nm", 1), ("r*p + p*r", "hbar", 1), ("(r*p + p*r)/2", "hbar", 1), ("p^2", "hbar^2/nm^2", 2),
])  # fmt: skip
def test_units_with_hbar(text, unit, power):
    """What has a time in it is shown in hbar: numbers are divided by its value (CODATA, by the unit system)."""
    here = model(DONOR)
    scale, shown = shown_unit(here, text)
    assert shown == unit
    assert scale == pytest.approx(here.hbar**power, rel=1e-14)
    assert unit_of(here, text) == ""


def test_units_per_time():
    """A velocity is shown per femtosecond, although the coherent unit of time is some number of them."""
    here = model(DONOR)
    scale, shown = shown_unit(here, "v")
    assert shown == "nm/fs"
    # 1 fs in the coherent unit: sqrt(m_e nm^2/meV) = 75.4031 fs (CODATA, recomputed here)
    assert scale == pytest.approx(75.4031, rel=1e-5)


def test_what_does_not_fit_has_no_unit():
    """Where the numbers of the operator hide dimensions nothing is named but the operator and the coordinate."""
    assert [unit_of(model(NATURAL), text) for text in ("H", "x", "T")] == ["meV", "nm", ""]
    assert [unit_of(model(BARE), text) for text in ("H", "x", "p^2")] == ["", "", ""]


def test_powers_of_compound_names():
    """A unit whose own name has a power stands in brackets under another."""
    assert unit_of(model(CM), "H*H") == "(cm^-1)^2"
