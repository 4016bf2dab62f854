"""Molecules: inversion, stretching and torsion with units.

Spectroscopic constants: Huber and Herzberg (1979) as in the NIST Chemistry WebBook (SRD 69), second-hand transcription;
nuclide masses: NIST (AME2016), second-hand. Levels follow from them in closed form or were recomputed independently.
"""

import math

import pytest
from answers import agree, ready, spectrum, step, within
from scipy import constants

MASS = {"H": 1.00782503223, "D": 2.01410177812, "C": 12.0, "N": 14.00307400443, "O": 15.99491461957, "Cl": 34.968852682,
        "I": 126.9044719}  # fmt: skip
UNITS = "units: energy cm^-1, length angstrom, mass u\n"
HALF_HBAR2 = constants.hbar**2 / (2 * constants.u) * 1e20 / (constants.h * constants.c * 100)
"""hbar^2/(2 u) in cm^-1 angstrom^2, from scipy.constants (16.857629 with CODATA 2022)."""

# we, wexe [cm^-1], Be [cm^-1], re [angstrom], atoms
DIATOMICS = {
    "H2": (4401.213, 121.336, "60.85403", 0.74144, "H", "H"),
    "HCl": (2990.9463, 52.8186, "10.593446", 1.27455, "H", "Cl"),
    "CO": (2169.81358, 13.28831, "1.9312815", 1.128323, "C", "O"),
    "N2": (2358.57, 14.324, "1.9982582", 1.09768, "N", "N"),
    "I2": (214.502, 0.6147, "0.0373707", 2.6663, "I", "I"),
}


def reduced(name):
    """Return the reduced mass in u."""
    a, b = (MASS[atom] for atom in DIATOMICS[name][4:])
    return a * b / (a + b)


def morse(name, extra=""):
    """Return the sheet of a Morse oscillator with the molecule's we and wexe; its bottom is at 0."""
    we, wexe, _, re = DIATOMICS[name][:4]
    return (
        f"{UNITS}mu = {reduced(name)!r}\nwe = {we}\nwexe = {wexe}\nre = {re}\nDe = we^2/(4*wexe)\n"
        f"a = sqrt(2*mu*wexe)/hbar\nH = p^2/(2*mu) + De*(1 - exp(-a*(r - re)))^2{extra}\nr in (-inf, inf)"
    )


@pytest.mark.parametrize("name", DIATOMICS)
def test_stretching_levels_follow_from_the_constants(name):
    """G(v) = we (v + 1/2) - wexe (v + 1/2)^2 for D = we^2/4wexe and a = sqrt(2 mu wexe)/hbar (closed form)."""
    we, wexe = DIATOMICS[name][:2]
    found = spectrum(morse(name), 8)
    assert found.bound == math.floor(we / (2 * wexe) - 0.5) + 1
    for level in found.levels:
        v = level.index + 0.5
        exact = we * v - wexe * v**2
        conversion = 8 * math.ulp(we**2 / (4 * wexe))  # the potential's own numbers are rounded on the way through the units
        assert abs(level.value - exact) <= level.error + conversion


def test_printed_levels_of_hydrogen_and_chlorine():
    """The same as printed in the collection: H2 G(0) ... G(3), depth, range; steps of others (closed form)."""
    h2 = spectrum(morse("H2"), 8)
    agree(h2, {0: "2170.2725", 1: "6328.8135", 2: "10244.6825", 3: "13917.8795"})
    assert ready(morse("H2")).parameters["De"] == pytest.approx(39911.230, abs=1e-3)
    assert ready(morse("H2")).parameters["a"] == pytest.approx(1.90447011, abs=1e-8)
    assert h2.bound == 18
    for name, low, high, text in [("HCl", 0, 1, "2885.3091"), ("HCl", 0, 2, "5664.981"), ("CO", 0, 1, "2143.23696"),
                                  ("CO", 0, 2, "4259.8973"), ("I2", 0, 1, "213.2726")]:  # fmt: skip
        within(*_swap(step(spectrum(morse(name), 8), low, high), text))


def _swap(difference, text):
    value, error = difference
    return value, text, error


@pytest.mark.parametrize("name", DIATOMICS)
def test_rotational_constant_in_the_sheets_units(name):
    """hbar^2/(2 mu re^2) in cm^-1 is Be as recomputed from masses and re; the printed Be agree to 2e-5."""
    text = morse(name).replace("De =", "Be = hbar^2/(2*mu*re^2)\nDe =")
    within(ready(text).parameters["Be"], DIATOMICS[name][2])


def test_rotation_softens_the_bond():
    """CO: [E(J=1) - E(J=0)]/2 drops by 0.0167402 cm^-1 from v = 0 to 1 (Pekeris, first order in 1/De: 1 % is granted)."""
    sheet = morse("CO", " + J*(J + 1)*hbar^2/(2*mu*r^2)\nJ = {}").replace("(-inf, inf)", "(0, inf)")
    still, turning = (spectrum(sheet.format(j), 2) for j in (0, 1))
    constant = [(turning.levels[v].value - still.levels[v].value) / 2 for v in (0, 1)]
    assert constant[0] - constant[1] == pytest.approx(0.0167402, rel=0.01)


AMMONIA = (
    UNITS + "mH = {}\nmN = 14.00307400443\nmu = 3*mH*mN/(3*mH + mN)\nrho = 0.43703\n"
    "V = 66551*sech(x/(2*rho))^4 - 109619*sech(x/(2*rho))^2\nH = p^2/(2*mu) + V\nx in (-inf, inf)"
)


@pytest.mark.parametrize(
    ("mass", "printed"),
    [
        (MASS["H"], ["0.8300852", "934.9978", "967.8513", "1617.296", "1881.581", "2381.837"]),
        (MASS["D"], ["0.0504159", "754.0506", "757.0468", "1390.596", "1449.410"]),
    ],
    ids=["NH3", "ND3"],
)
def test_inversion_in_an_ammonia_like_double_well(mass, printed):
    """Form of Manning, J. Chem. Phys. 3 (1935) 136 (from memory) with a range of our own: levels above the lowest.

    Recomputed here on a grid of sinc functions (numpy, 201 and 301 points, two widths).
    """
    found = spectrum(AMMONIA.format(mass), len(printed) + 1)
    for index, text in enumerate(printed, 1):
        difference, error = step(found, 0, index)
        within(difference, text, error)


@pytest.mark.parametrize(
    ("x0", "alpha", "printed"),
    [
        (3.161, 1.916, ["0.49731739", "0.49827018", "1.44943616", "1.48053313"]),
        (3.182, 1.930, ["0.49750338", "0.49835658", "1.45296236", "1.48119465"]),
    ],
)
def test_parabolas_joined_by_a_straight_line(x0, alpha, printed):
    """The model of Dennison and Uhlenbeck, Phys. Rev. 41 (1932) 313, in units of h nu; levels recomputed here."""
    sheet = (
        f"x0 = {x0}\nalpha = {alpha}\nV = where(abs(x) > x0 - alpha, (abs(x) - x0)^2/2, alpha^2/2)\n"
        "H = p^2/2 + V\nx in (-inf, inf)"
    )
    agree(spectrum(sheet, 4), dict(enumerate(printed)))


# y'' + (b - s cos^2 y) y = 0; b(0A), b(0E), b(1E), b(1A) recomputed (tables of Herschbach 1959 not reached)
ROTOR = {
    10: ["2.846922", "2.903787", "7.678164", "8.492474"],
    20: ["4.199954", "4.207419", "11.914540", "12.099460"],
    30: ["5.212892", "5.214280", "15.026846", "15.072520"],
    40: ["6.063020", "6.063341", "17.605088", "17.617842"],
    60: ["7.486962", "7.486988", "21.899334", "21.900653"],
    100: ["9.743220", "9.743221", "28.685110", "28.685139"],
}
SPLITTING = {10: "5.686536e-2", 20: "7.465202e-3", 30: "1.388390e-3", 40: "3.205956e-4", 60: "2.569752e-5", 100: "4.214e-7"}
TORSION = "F = {}\nV3 = {}\nV6 = {}\nH = F*p^2 + V3/2*(1 - cos(3*a)) + V6/2*(1 - cos(6*a))\na in ring(0, 2*pi)"


@pytest.mark.parametrize("s", ROTOR)
def test_hindered_rotor(s):
    """F p^2 + V3/2 (1 - cos 3a) with s = 4 V3/9F on the full turn: levels 0A, 0E twice, 1E twice, 1A; E = (9F/4) b."""
    found = spectrum(TORSION.format(1, 2.25 * s, 0), 6)
    a0, e0, e1, a1 = ROTOR[s]
    agree(found, {0: a0, 1: e0, 2: e0, 3: e1, 4: e1, 5: a1}, 9 / 4)
    difference, error = step(found, 0, 1)
    within(difference * 4 / 9, SPLITTING[s], error)


@pytest.mark.parametrize("s", [10, 40])
def test_hindered_rotor_by_symmetry(s):
    """A third of the turn with phase 0 gives the A levels, with phase 1/3 and -1/3 the E levels, each pair once."""
    text = TORSION.format(1, 2.25 * s, 0).replace("ring(0, 2*pi)", "ring(0, 2*pi/3), phase {}")
    a0, e0, e1, a1 = ROTOR[s]
    agree(spectrum(text.format(0), 2), {0: a0, 1: a1}, 9 / 4)
    for phase in ("1/3", "-1/3"):
        agree(spectrum(text.format(phase), 2), {0: e0, 1: e1}, 9 / 4)


@pytest.mark.parametrize(
    ("rotor", "printed"),
    [
        ((27.64684, 373.5546, -1.3), ["9.120518", "209.07369", "295.21153"]),  # Xu, Hougen 1995 (constants from memory)
        ((27.64684, 373.5546, 0), ["9.106275", "209.28638", "295.61131"]),
        ((27.63, 373.21, -0.52), ["9.110608", "209.02999", "295.24707"]),  # Lees, Baker 1968 (constants from memory)
    ],
)
def test_torsion_of_methanol(rotor, printed):
    """Steps 0E-0A, 1E-0A, 1A-0A of the torsion without rotation, in cm^-1, recomputed here with plane waves (numpy)."""
    found = spectrum(TORSION.format(*rotor), 6)
    for index, text in zip((1, 3, 5), printed, strict=False):
        difference, error = step(found, 0, index)
        within(difference, text, error)


def test_torsion_of_ethane():
    """Barrier 1024 cm^-1 (Weiss and Leroi 1968), F = 10.684 (from memory): steps of A and E levels recomputed here."""
    found = spectrum(TORSION.format(10.684, 1024, 0), 9)
    for low, high, text in [(0, 5, "287.53"), (1, 3, "287.30"), (0, 1, "5.407e-3")]:
        difference, error = step(found, low, high)
        within(difference, text, error)
    within(found.levels[6].value - found.levels[5].value, "253.8", found.levels[6].error)
    within(found.levels[7].value - found.levels[3].value, "257.7", found.levels[7].error)


def test_limits_of_the_rotor():
    """Without a barrier F m^2 (closed form); under a high one the step nears 3 sqrt(V3 F), first correction -(9/4) F."""
    agree(spectrum(TORSION.format(7, 0, 0), 7), {0: "0", 1: "7", 2: "7", 3: "28", 4: "28", 5: "63", 6: "63"})
    difference, _ = step(spectrum(TORSION.format(1, 1e6, 0), 6), 0, 3)
    assert difference == pytest.approx(3 * math.sqrt(1e6) - 9 / 4, abs=0.01)
