"""Units: every factor against scipy.constants (scipy 1.17, CODATA 2022) and the check values of the project, field 16."""

import math

import pytest
import scipy.constants as sc

from specterm.errors import SheetError, Span
from specterm.units import CONSTANTS, UnitSystem

SI = UnitSystem.make((("energy", "J"), ("length", "m"), ("mass", "kg")))
WELL = UnitSystem.make((("energy", "meV"), ("length", "nm"), ("mass", "m_e")))
MOLECULE = UnitSystem.make((("energy", "cm^-1"), ("length", "angstrom"), ("mass", "u")))
ATOM = UnitSystem.make((("energy", "E_h"), ("length", "a_0"), ("mass", "m_e")))
# Rounding of scipy's own products and quotients; specterm rounds once.
ROUNDING = 1e-15


def codata(name: str) -> float:
    """Return a value of CODATA 2022 as scipy 1.17 has it."""
    return sc.physical_constants[name][0]


SCIPY = {
    "e": sc.e,
    "m_e": codata("electron mass"),
    "m_p": codata("proton mass"),
    "m_n": codata("neutron mass"),
    "u": codata("atomic mass constant"),
    "k_B": sc.k,
    "c": sc.c,
    "h": sc.h,
    "hbar": sc.hbar,
    "a_0": codata("Bohr radius"),
    "E_h": codata("Hartree energy"),
    "eps_0": codata("vacuum electric permittivity"),
    "mu_0": codata("vacuum mag. permeability"),
    "N_A": sc.N_A,
    "alpha": codata("fine-structure constant"),
    "Phi_0": codata("mag. flux quantum"),
    "mu_B": codata("Bohr magneton"),
    "R_inf": codata("Rydberg constant"),
}


@pytest.mark.parametrize("name", CONSTANTS)
def test_constants_are_those_of_codata_2022(name):
    """Every constant has the value of scipy.constants (scipy 1.17), charges counted in e."""
    value, dimension = SI.constant(name)
    assert value * sc.e ** float(dimension.charge) == pytest.approx(SCIPY[name], rel=ROUNDING)


FACTORS = [
    (WELL, "meV", 1.0, "energy"),
    (WELL, "eV", 1e3, "energy"),
    (WELL, "kV/cm", 0.1, "energy/length/charge"),
    (WELL, "cm^-1", 100 * sc.h * sc.c / (1e-3 * sc.e), "energy"),
    (WELL, "cm-1", 100 * sc.h * sc.c / (1e-3 * sc.e), "energy"),
    (WELL, "cm⁻¹", 100 * sc.h * sc.c / (1e-3 * sc.e), "energy"),
    (WELL, "1/cm", 1e-7, "1/length"),
    (WELL, "nm^-1", 1.0, "1/length"),
    (WELL, "kV*cm^-1", 0.1, "energy/length/charge"),
    (WELL, "kV cm^-1", 0.1, "energy/length/charge"),
    (WELL, "cm^-1/angstrom^2", 100 * 100 * sc.h * sc.c / (1e-3 * sc.e), "energy/length^2"),
    (WELL, "THz", 1e12 * sc.h / (1e-3 * sc.e), "energy"),
    (WELL, "K", sc.k / (1e-3 * sc.e), "energy"),
    (WELL, "mK", 1e-3 * sc.k / (1e-3 * sc.e), "energy"),
    (WELL, "uK/um^2", 1e-6 * sc.k / (1e-3 * sc.e) / 1e6, "energy/length^2"),
    (WELL, "meV/K", 1.0, "energy/temperature"),
    (WELL, "kJ/mol", 1e3 / sc.N_A / (1e-3 * sc.e), "energy"),
    (WELL, "kcal/mol", 4184 / sc.N_A / (1e-3 * sc.e), "energy"),
    (WELL, "aJ", 1e-18 / (1e-3 * sc.e), "energy"),
    (WELL, "Ry", codata("Rydberg constant times hc in J") / (1e-3 * sc.e), "energy"),
    (WELL, "hartree", codata("Hartree energy") / (1e-3 * sc.e), "energy"),
    (WELL, "Å", 0.1, "length"),
    (WELL, "\u212b", 0.1, "length"),
    (WELL, "bohr", codata("Bohr radius") / 1e-9, "length"),
    (WELL, "µm", 1e3, "length"),
    (WELL, "μm", 1e3, "length"),
    (WELL, "um", 1e3, "length"),
    (WELL, "kg", 1 / codata("electron mass"), "mass"),
    (WELL, "g", 1e-3 / codata("electron mass"), "mass"),
    (WELL, "me", 1.0, "mass"),
    (WELL, "Da", codata("atomic mass constant") / codata("electron mass"), "mass"),
    (WELL, "amu", codata("atomic mass constant") / codata("electron mass"), "mass"),
    (WELL, "deg", math.pi / 180, "plain number"),
    (WELL, "percent", 0.01, "plain number"),
    (WELL, "meV/nm*nm", 1.0, "energy"),
    (WELL, "meV/(nm*nm)", 1.0, "energy/length^2"),
    (WELL, "meV/(nm/(nm))^2", 1.0, "energy"),
    (WELL, "(meV*nm^2)^(1/2)/nm", 1e0, "energy^(1/2)"),
    (WELL, "fF", 1e-15 * 1e-3 / sc.e, "charge^2/energy"),
    (WELL, "nH", 1e-9 / (1e-3 * sc.e) * sc.e**2 / (1e-9**2 * SCIPY["m_e"] / (1e-3 * sc.e)), "energy*time^2/charge^2"),
    (SI, "m/s^2", 1.0, "length/time^2"),
    (SI, "T", sc.e, "mass/time/charge"),
    (SI, "A", 1 / sc.e, "charge/time"),
    (SI, "Wb", sc.e, "energy*time/charge"),
    (SI, "kohm", 1e3 * sc.e**2, "energy*time/charge^2"),
    (SI, "V", sc.e, "energy/charge"),
    (SI, "C", 1 / sc.e, "charge"),
    (SI, "pN", 1e-12, "energy/length"),
    (SI, "MHz", 1e6 * sc.h, "energy"),
    (SI, "1/s", 1.0, "1/time"),
    (SI, "rad/s", 1.0, "1/time"),
    (SI, "debye", 1e-21 / sc.c / sc.e, "length*charge"),
    (MOLECULE, "eV", 8065.543937349211, "energy"),
    (MOLECULE, "K", 0.6950348004861274, "energy"),
    (MOLECULE, "E_h", 219474.63136314, "energy"),
    (ATOM, "eV", 1 / 27.211386245981, "energy"),
]


@pytest.mark.parametrize(("system", "unit", "factor", "kind"), FACTORS)
def test_factors(system, unit, factor, kind):
    """Factors agree with scipy.constants (scipy 1.17) or the check values, field 16 (14 digits); the kind is right."""
    found, dimension = system.parse(unit)
    assert found == pytest.approx(factor, rel=3 * ROUNDING if unit != "E_h" else 1e-13)
    assert str(dimension) == kind


@pytest.mark.parametrize(
    ("energy", "length", "mass"),
    [
        ("peV", "um", "kg"),
        ("MHz", "um", "u"),
        ("cm^-1", "angstrom", "u"),
        ("E_h", "bohr", "me"),
        ("aJ", "nm", "g"),
        ("kJ/mol", "Å", "amu"),
        ("K", "nm", "m_e"),
        ("eV", "cm", "kDa"),
        ("Ry", "a_0", "m_p"),
        ("GHz", "m", "kg"),
    ],
)
def test_any_base_units(energy, length, mass):
    """The given units have the factor 1, and p^2/2m in them is an energy: hbar^2/(2 m L^2) as with scipy.constants."""
    system = UnitSystem.make((("energy", energy), ("length", length), ("mass", mass)))
    for unit in (energy, length, mass):
        assert system.parse(unit)[0] == 1.0
    e, ell, m = (SI.parse(unit)[0] for unit in (energy, length, mass))
    assert system.hbar**2 == pytest.approx(sc.hbar**2 / (m * ell**2 * e), rel=3 * ROUNDING)
    assert system.hbar == system.constant("hbar")[0]


def test_derived_check_values():
    """hbar^2/2m and e^2/4 pi eps_0 as in the check values, field 16 (scipy.constants of scipy 1.17.1)."""
    assert WELL.hbar**2 / 2 == pytest.approx(38.09982110968584, rel=ROUNDING)
    assert MOLECULE.hbar**2 / 2 == pytest.approx(16.85762916808777, rel=ROUNDING)
    coulomb = WELL.constant("e")[0] ** 2 / (4 * math.pi * WELL.constant("eps_0")[0])
    assert coulomb == pytest.approx(1439.9645468667817, rel=ROUNDING)
    assert ATOM.hbar == pytest.approx(1, rel=1e-11)


def test_circuit_check_values():
    """Charging and inductive energies as in the check values, field 9: e^2/2C, (Phi_0/2 pi)^2/L, Phi_0 I/2 pi in GHz."""
    system = UnitSystem.make((("energy", "GHz"), ("length", "um"), ("mass", "m_e")))
    e, flux = system.constant("e")[0], system.constant("Phi_0")[0] / (2 * math.pi)
    assert e**2 / (2 * 50 * system.parse("fF")[0]) == pytest.approx(0.387404587, rel=1e-8)
    assert flux**2 / system.parse("nH")[0] == pytest.approx(163.461512807, rel=1e-11)
    assert flux * system.parse("nA")[0] == pytest.approx(0.496683511, rel=1e-8)


def test_field_times_charge_times_length():
    """e*F*x with F = 20 kV/cm and x = 3 nm is 6 meV (by definition of the volt)."""
    factor, dimension = WELL.parse("kV/cm")
    energy = WELL.constant("e")[0] * 20 * factor * 3
    assert energy == pytest.approx(6, rel=ROUNDING)
    assert str(dimension * WELL.constant("e")[1] * WELL.parse("nm")[1]) == "energy"


def test_time_is_derived_or_checked():
    """Without a unit of time it follows from the others; with one the four must fit."""
    assert WELL.time == "75.4031 fs"  # recomputed here: nm*sqrt(m_e/meV)
    assert float(WELL.time.split()[0]) == pytest.approx(1e6 * math.sqrt(SCIPY["m_e"] / (1e-3 * sc.e)), rel=1e-5)
    pairs = (("energy", "J"), ("length", "m"), ("mass", "kg"), ("time", "s"))
    assert UnitSystem.make(pairs).time == "s"
    assert UnitSystem.make(pairs[1:]).parse("J")[0] == 1.0
    with pytest.raises(SheetError, match="do not fit together"):
        UnitSystem.make((*pairs[:3], ("time", "ms")))


def test_without_units():
    """A sheet without units has no names, hbar 1, no constants, and refuses units saying what to add."""
    system = UnitSystem.dimensionless()
    assert (system.energy, system.length, system.mass, system.time, system.hbar) == ("", "", "", "", 1.0)
    assert system.constant("e") is None
    with pytest.raises(SheetError, match="the sheet has no units") as caught:
        system.parse("meV", Span(3, 5))
    assert "say `units: energy" in caught.value.mend
    assert caught.value.span == Span(3, 5)


@pytest.mark.parametrize(
    ("unit", "near"),
    [("stone", None), ("mev", "meV"), ("angstroem", "angstrom"), ("hartre", "hartree"), ("au", "a_0"), ("ghz", "GHz")],
)
def test_unknown_units_are_named(unit, near):
    """An unknown unit is refused by name, with the nearest known one where one is near."""
    with pytest.raises(SheetError, match=f"unknown unit '{unit}'") as caught:
        WELL.parse(unit)
    assert ("did you mean" in caught.value.mend) == (near is not None)
    assert near is None or f"`{near}`" in caught.value.mend


@pytest.mark.parametrize(
    "unit",
    [
        "",
        " ",
        "/",
        "nm/",
        "/nm",
        "nm^",
        "nm^x",
        "nm^99",
        "nm^(1/0)",
        "(nm",
        "nm)",
        "()",
        "nm**",
        "2*nm",
        "nm//nm",
        "nm^1^1",
        "nm" * 500,
        "(" * 150,
        "nm,",
        "nm^٣",
        "a;b",
        "\x00",
        "1.5",
        "nm^(1/13)",
    ],
)
def test_broken_units_are_refused(unit):
    """What is no unit is refused with a SheetError."""
    with pytest.raises(SheetError):
        WELL.parse(unit)


@pytest.mark.parametrize(
    ("pairs", "words"),
    [
        ((("energy", "nm"), ("length", "nm"), ("mass", "m_e")), "'nm' is a length, not an energy"),
        ((("energy", "1/cm"), ("length", "nm"), ("mass", "m_e")), "'1/cm' is a 1/length, not an energy"),
        ((("energy", "eV"), ("length", "A"), ("mass", "m_e")), "'A' is a charge/time, not a length"),
        ((("energy", "eV"),), "the units lack length and mass"),
        ((("energy", "eV"), ("length", "nm"), ("mass", "stone")), "unknown unit 'stone'"),
    ],
)
def test_wrong_systems_are_refused(pairs, words):
    """A unit of the wrong kind, a missing or an unknown one is refused."""
    with pytest.raises(SheetError, match=words):
        UnitSystem.make(pairs)


def test_kinds_in_words():
    """A dimension reads in words: energy first, then length, mass and time."""
    phrases = {
        "meV": "an energy",
        "m_e": "a mass",
        "1/cm": "a 1/length",
        "meV/nm^2": "an energy/length^2",
        "kg*m/s": "a momentum",
    }
    assert {unit: WELL.parse(unit)[1].phrase for unit in phrases} == phrases
