"""Superconducting circuits: the phase across a junction as the coordinate.

Transmon: Koch et al., Phys. Rev. A 76 (2007) 042319, levels recomputed in the charge basis (the row 100 with mpmath,
40 digits) and with Mathieu functions;
fluxonium: the form and (from memory) the parameters of Manucharyan et al., Science 326 (2009) 113, recomputed in two bases.
"""

import math

import pytest
from answers import agree, ready, spectrum, step, within
from scipy import special

TRANSMON = {  # EJ/EC -> E0(ng=0), E01(0), E01(1/2), anharmonicity at 1/2, dispersion of levels 0 and 1, in EC
    1: ["-0.12176554", "4.100955", "0.996112", "6.550841", "5.92420e-1", "-2.51242"],
    10: ["-5.80004602", "7.899506", "7.648268", "-0.270128", "9.96542e-3", "-2.41273e-1"],
    20: ["-13.93697996", "11.554822", "11.537410", "-1.152199", "4.27477e-4", "-1.69842e-2"],
    30: ["-22.51303776", "14.413691", "14.411898", "-1.194178", "3.42634e-5", "-1.75833e-3"],
    50: ["-40.25677955", "18.941919", "18.941879", "-1.147921", "5.61882e-7", "-3.90684e-5"],
    100: ["-86.11253853", "27.245136", "27.245136", "-1.095493", "2.41930e-10", "-2.48766e-8"],
}


def transmon(ratio, charge):
    """Return four EC (n - ng)^2 - EJ cos phi with EC = 1."""
    return f"EC = 1\nEJ = {ratio}\nng = {charge}\nH = 4*EC*(p - ng)^2 - EJ*cos(phi)\nphi in ring(0, 2*pi)"


@pytest.mark.parametrize("ratio", TRANSMON)
def test_transmon_levels(ratio):
    """Lowest level, transition and anharmonicity at offset charge 0 and 1/2, and how much the levels move between them."""
    zero, half = spectrum(transmon(ratio, 0), 3), spectrum(transmon(ratio, 0.5), 3)
    lowest, first_zero, first_half, bend, moved0, moved1 = TRANSMON[ratio]
    agree(zero, {0: lowest})
    within(*_with_error(step(zero, 0, 1), first_zero))
    first, error = step(half, 0, 1)
    within(first, first_half, error)
    second, more = step(half, 1, 2)
    within(second - first, bend, error + more)
    for k, text in enumerate((moved0, moved1)):
        a, b = zero.levels[k], half.levels[k]
        within(b.value - a.value, text, a.error + b.error)


def _with_error(difference, text):
    value, error = difference
    return value, text, error


@pytest.mark.parametrize("charge", [0, 0.5])
@pytest.mark.parametrize("ratio", [5, 35])
def test_transmon_levels_are_characteristic_values(ratio, charge):
    """Q = EJ/2EC: a0, b2, a2, b4 at ng = 0 and b1, a1, b3, a3 at 1/2 (scipy.special, good to 1e-11 here)."""
    found = spectrum(transmon(ratio, charge), 4)
    q = ratio / 2
    pairs = [(special.mathieu_a, 0), (special.mathieu_b, 2), (special.mathieu_a, 2), (special.mathieu_b, 4)]
    if charge:
        pairs = [(special.mathieu_b, 1), (special.mathieu_a, 1), (special.mathieu_b, 3), (special.mathieu_a, 3)]
    for level, (function, order) in zip(found.levels, pairs, strict=True):
        assert abs(level.value - function(order, q)) <= level.error + 1e-11 * (1 + abs(level.value))


def test_offset_charge_is_a_phase():
    """(p - ng) on a ring without phase has the levels of p with phase -ng (gauge invariance, closed form)."""
    shifted = spectrum(transmon(10, 0.23), 5)
    turned = spectrum("EC = 1\nEJ = 10\nH = 4*EC*p^2 - EJ*cos(phi)\nphi in ring(0, 2*pi), phase -0.23", 5)
    for a, b in zip(shifted.levels, turned.levels, strict=True):
        assert abs(a.value - b.value) <= a.error + b.error


def test_dispersion_formula():
    """Dispersion of level 0 nears EC 2^5 sqrt(2/pi) (EJ/2EC)^(3/4) exp(-sqrt(8EJ/EC)) (Koch eq. 2.5)."""
    a, b = spectrum(transmon(100, 0), 3).levels[0], spectrum(transmon(100, 0.5), 3).levels[0]
    formula = 2**5 * math.sqrt(2 / math.pi) * 50**0.75 * math.exp(-math.sqrt(800))
    within(formula, "2.49813e-10")
    assert b.value - a.value == pytest.approx(formula / 1.0326, abs=0.001 * formula + a.error + b.error)


@pytest.mark.parametrize(
    ("flux", "printed"),
    [
        ("0", ["9.05927493", "9.31438373", "11.14387543"]),
        ("1/4", ["4.66296634", "10.5352213", "13.88824133"]),
        ("1/2", ["0.36337767", "9.45383022", "12.42709546"]),
    ],
)
def test_fluxonium(flux, printed):
    """Transitions from the lowest level in GHz for EJ = 9.0, EC = 2.5, EL = 0.52, recomputed in two bases."""
    found = spectrum(
        f"EJ = 9.0\nEC = 2.5\nEL = 0.52\nf = {flux}\nH = 4*EC*p^2 + EL*phi^2/2 - EJ*cos(phi - 2*pi*f)\nphi in (-inf, inf)", 4
    )
    for index, text in enumerate(printed, 1):
        within(*_with_error(step(found, 0, index), text))


def test_circuit_without_a_junction():
    """EJ = 0 leaves an oscillator of spacing sqrt(8 EC EL) (closed form)."""
    found = spectrum("EC = 2.5\nEL = 0.52\nH = 4*EC*p^2 + EL*phi^2/2\nphi in (-inf, inf)", 6)
    for level in found.levels:
        assert abs(level.value - math.sqrt(8 * 2.5 * 0.52) * (level.index + 0.5)) <= level.error + 4 * math.ulp(level.value)


def test_energies_of_circuit_elements():
    """e^2/2C, (Phi_0/2 pi)^2/L and Phi_0 I/2 pi in GHz for 50 fF, 1 nH and 1 nA (recomputed with CODATA 2022)."""
    sheet = (
        "units: energy GHz, length nm, mass m_e\nEC = e^2/(2*50 [fF])\nEL = (Phi_0/(2*pi))^2/(1 [nH])\n"
        "EJ = Phi_0*(1 [nA])/(2*pi)\nH = p^2/(2*m_e)\nx in (0, 1)"
    )
    parameters = ready(sheet).parameters
    for name, text in [("EC", "0.387404587"), ("EL", "163.461512807"), ("EJ", "0.496683511")]:
        within(parameters[name], text)
