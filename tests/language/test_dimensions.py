"""The dimension check: mismatches that are really known are refused, right sheets pass."""

import pytest

from specterm.errors import SheetError
from specterm.language import parse, parse_expression
from specterm.language.dimensions import check_dimensions
from specterm.units import UnitSystem

UNITS = "units: energy meV, length nm, mass m_e\n"


def dimensions(text: str):
    """Return what is known about a sheet with units."""
    sheet = parse(UNITS + text)
    return check_dimensions(sheet, UnitSystem.make(sheet.units.pairs))


KNOWN = [
    ("x in (0, 9 [nm])", "x", "length"),
    ("x in (0, L); L = 9 [nm]", "x", "length"),
    ("x in (0, 9 [nm])", "p", "momentum"),
    ("x in (0, 9 [nm])", "D", "1/length"),
    ("x in (0, 9 [nm])", "Dx", "1/length"),
    ("layers x: thickness [nm], V [meV]\n  1 2\nx in layers", "V", "energy"),
    ("layers x: thickness [nm], V [meV]\n  1 2\nx in layers", "x", "length"),
    ("phi in ring(0, 360 [deg])", "phi", "plain number"),
    ("F = 20 [kV/cm]; x in (0, 9 [nm]); W = e*F*x", "W", "energy"),
    ("H = p^2/(2*m_e); x in (0, 9)", "H", "energy"),
    ("H = p^2/(2*m_e); x in (0, 9)", "x", "length"),
    ("H = -hbar^2/(2*m_e)*D^2; x in (0, 9)", "H", "energy"),
    ("V = k*x^2/2; k = 3 [meV/nm^2]; x in (0, 9)", "x", "length"),
    ("a = sqrt(4 [nm^2]) + 1", "a", "length"),
    ("a = 1 [nm]; b = min(a, 3)", "b", "length"),
    ("V = where(x < 0, 3 [meV], 0)", "V", "energy"),
    ("V = V0*(x > 0)*exp(-x/L); V0 = 3 [meV]", "V", "energy"),
    ("T = 4 [mK]", "T", "energy"),
    ('V = table("a.csv", 1 [nm], 2 [cm^-1])', "V", "energy"),
    ("w = 2*pi*hbar", "hbar", None),
    ("m = 0.067; x in (0, 9); H = p^2/(2*m)", "m", None),
    ("m = 0.067; x in (0, 9); H = p^2/(2*m)", "H", None),
    ("x in (0, 9)", "x", None),
    ("a = b; b = a", "a", None),
]


@pytest.mark.parametrize(("text", "name", "kind"), KNOWN)
def test_what_is_known(text, name, kind):
    """A dimension is known where units say it or an energy gives it away, and free where a bare number may carry one."""
    found = dimensions(text).named(name)
    assert (None if found is None else str(found)) == kind


RIGHT = [
    "H = p^2/2 + x^2/2; x in (-inf, inf)",
    "H = p^2/(2*0.067) + V0; V0 = 3 [meV]; x in (0, 9)",
    "H = p^2/(2*m_e) + 3*exp(-x^2) + sin(x); x in (0, 9)",
    "H = p^2/(2*m_e) + 0.5*x^2 + 12; x in (0, 9)",
    "H = 5 [GHz]*(D^2 - phi^2) - 3 [GHz]*cos(phi); phi in ring(-pi, pi)",
    "H = p^2/(2*m_e) + k_B*300; x in (0, 9)",
    "H = p^2/(2*m_e) + V; V = 3*(x > 2) + 4 [meV]*(x < 1); x in (0, 9)",
    "H = (p - A)^2/(2*m_e) + 1 [meV]; A = 0.3; x in (0, 9)",
    "H = p^2/(2*m) + 1 [meV]; m = 0.1*(1 + x/40); x in (0, 9)",
    "H = p^2/(2*I) + V0*cos(3*phi); I = 3 [u*angstrom^2]; V0 = 3 [kJ/mol]; phi in (-180 [deg], 180 [deg])",
    "H = p^2/(2*I) + V0*cos(3*phi); I = 3 [u*angstrom^2]; V0 = 3 [kJ/mol]; phi in ring(0, 2*pi)",
    "H = p^2/(2*mu) + e^2/(4*pi*eps_0)*(-1/r) + hbar^2*l*(l + 1)/(2*mu*r^2); mu = 1 [m_e]; l = 1; r in (0, inf)",
    "state s = exp(-(x - 13)^2/(4*1.5^2))*exp(i*0.2*x); x in (0, 9); H = p^2/(2*m_e)",
    "layers x: thickness, V, m\n  1 0 1\nx in layers\nH = p*(1/(2*m))*p + V + e*F*x\nF = 20 [kV/cm]",
    "layers x: thickness [nm], V\n  5[angstrom] 3[meV]\nx in layers\nH = p^2/(2*m_e) + V",
]


@pytest.mark.parametrize("text", RIGHT)
def test_right_sheets_pass(text):
    """A sheet in which every bare number can take the dimension its place needs is not refused."""
    dimensions(text)


WRONG = [
    ("H = p^2/(2*m_e) + F*x; F = 20 [kV/cm]; x in (0, 9)", "energy/charge"),
    ("H = p*(1/(2*m))*p + V; m = 0.1 [m_e]; V = 3 [nm]; x in (0, 9)", "a length"),
    ("H = p^2/(2*m_e) + 3 [1/cm]; x in (0, 9)", "1/length"),
    ("H = p^2/(2*m_e) + h*f; f = 5 [GHz]; x in (0, 9)", "energy^2*time"),
    ("a = 3 [nm] + 2 [meV]", "an energy"),
    ("a = 3 [nm] < 2 [meV]", "an energy"),
    ("a = max(1, 3 [nm], 2 [meV])", "an energy"),
    ("a = where(x, 3 [nm], 2 [meV])", "an energy"),
    ("a = sin(3 [nm])", "a length"),
    ("a = 2^(3 [nm])", "a length"),
    ("a = exp(-x); x in (0, 9 [nm])", "a length"),
    ("x in (3 [nm], 9 [meV])", "an energy"),
    ("x in ring(0, 9 [nm]), phase 2 [nm]", "a length"),
    ("state s = 3 [nm] + 2 [meV]", "an energy"),
    ("layers x: thickness [nm], V [meV]\n  1 2[nm]\nx in layers", "a length"),
    ("layers x from 3 [meV]: thickness [nm], V\n  1 2\nx in layers", "a length"),
    ("x in (0 [meV], 3); layers x: thickness [nm], V\n  1 2\n", "a length"),
]


@pytest.mark.parametrize(("text", "kind"), WRONG)
def test_known_mismatch_is_refused(text, kind):
    """Two terms of different known dimension are refused, and both kinds are named."""
    with pytest.raises(SheetError) as caught:
        dimensions(text)
    assert kind in caught.value.message


def test_nothing_is_checked_without_units():
    """In a sheet without units everything is free."""
    found = check_dimensions(parse("x in (0, 1); H = p^2 + x"), UnitSystem.dimensionless())
    assert found.named("x") is None
    assert found.of(parse_expression("x + p")) is None


@pytest.mark.parametrize(
    ("cell", "carries"), [("5[angstrom]", True), ("2*gap", True), ("gap/2+1", True), ("5", False), ("2*n", False)]
)
def test_cells_that_carry_a_unit(cell, carries):
    """A cell has a unit already where a number in it, or a name it uses, was given one."""
    assert dimensions("gap = 5 [nm]; n = 3").carries(parse_expression(cell)) is carries


def test_expression_over_the_sheet():
    """The dimension of an expression over the sheet's names is found, or the expression refused."""
    found = dimensions("x in (0, 9 [nm]); V = 3 [meV]")
    assert str(found.of(parse_expression("x^2"))) == "length^2"
    with pytest.raises(SheetError, match=r"`x` is a length, but `V` is an energy"):
        found.of(parse_expression("x + V"))
