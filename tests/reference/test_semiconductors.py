"""Layered semiconductors in meV, nm and free electron masses.

Transcendental equations with the sheet's own constants (CODATA 2022, as in scipy.constants), solved independently of specterm;
material data: Vurgaftman, Meyer, Ram-Mohan, J. Appl. Phys. 89 (2001) 5815 (GaAs mass 0.067, Al.3Ga.7As mass 0.0919).
"""

import math

import pytest
from answers import agree, spectrum, step, within
from scipy import constants

UNITS = "units: energy meV, length nm, mass m_e\n"
HALF_HBAR2 = constants.hbar**2 / (2 * constants.m_e) * 1e18 / (constants.e * 1e-3)
"""hbar^2/(2 m_e) in meV nm^2: 38.0998211 (section 16 of the collection prints 0.03809982110968584 eV nm^2)."""
CONSTANTS_ROUNDING = 2e-9
"""meV: what rounding of the printed CODATA constants moves a level of 1 eV by, two parts in 10^12 with room."""

WELLS = [  # width [nm], depth [meV], mass in the well, mass outside, levels [meV]: roots recomputed with mpmath (Bastard 1981)
    (10, "300", 0.067, 0.067, ["34.208440", "132.590228", "271.504281"]),
    (10, "300", 0.067, 0.0919, ["32.006096", "126.336669", "267.638744"]),
    (10, "259.14", 0.067, 0.0919, ["30.836655", "121.295493", "249.236457"]),
    (10, "245", 0.067, 0.067, ["32.6097", "125.1305", "241.6245"]),
    (10, "245", 0.067, 0.092, ["30.3750", "119.3011", "240.8073"]),
    (5, "300", 0.067, 0.067, ["89.627314", "287.391537"]),
    (20, "300", 0.067, 0.067, ["10.824481", "43.094212", "96.094422", "168.115398", "254.123883"]),
    (1, "10000", 1, 1, ["297.601676", "1186.265392", "2651.867043", "4663.049065", "7144.565557", "9769.306801"]),
]


def well(width, depth, inside, outside, domain="(-inf, inf)"):
    """Return the sheet of a well of layers with its own mass in the well."""
    return (
        f"{UNITS}H = p*(1/(2*m))*p + V\nlayers x: thickness, V, m\n   10  {depth}  {outside}\n   {width}  0  {inside}\n"
        f"   10  {depth}  {outside}\nx in {domain}"
    )


@pytest.mark.parametrize(("width", "depth", "inside", "outside", "printed"), WELLS)
def test_finite_well_between_heavier_layers(width, depth, inside, outside, printed):
    """(k/mw) tan(kL/2) = kappa/mb and its odd partner; as many levels are bound as the equations have roots."""
    found = spectrum(well(width, depth, inside, outside), len(printed))
    agree(found, dict(enumerate(printed)))
    assert found.bound == len(printed)
    assert found.threshold == pytest.approx(float(depth), rel=1e-14)


def test_wide_well_of_hard_walls():
    """56.123905 n^2 meV for 10 nm and mass 0.067: closed form hbar^2 pi^2 n^2/(2 m L^2) with the CODATA constants."""
    found = spectrum(f"{UNITS}m = 0.067\nH = p^2/(2*m)\nx in (0, 10)", 12)
    within(found.levels[0].value, "56.123905", found.levels[0].error)
    for level in found.levels:
        exact = HALF_HBAR2 / 0.067 * (math.pi * (level.index + 1) / 10) ** 2
        assert abs(level.value - exact) <= level.error + CONSTANTS_ROUNDING * exact / 1000


@pytest.mark.parametrize(
    ("strength", "roots"),
    [
        (8, ["1.3954661439", "2.7859021141", "4.1648309141", "5.5214464300", "6.8306743262", "7.9573214942"]),
        (1, ["0.7390851332"]),
    ],
)
def test_dimensionless_roots(strength, roots):
    """Z tan z = sqrt(z0^2 - z^2) and -z cot z = ..., with z^2 the levels in a well of depth z0^2 (mpmath)."""
    found = spectrum(f"z0 = {strength}\nH = p^2 + where(abs(x) < 1, 0, z0^2)\nx in (-inf, inf)", len(roots))
    assert found.bound == len(roots)
    for level, text in zip(found.levels, roots, strict=True):
        root = math.sqrt(level.value)
        within(root, text, level.error / (2 * root))


@pytest.mark.parametrize(("depth", "width", "printed"), [(250.6, 6.5, "149.94"), (250.6, 8.2, "116.35")])
def test_step_between_subbands(depth, width, printed):
    """First step of GaAs/Al.3Ga.7As wells, recomputed (measured: 152, 121 meV, West, Eglash 1985, from memory)."""
    difference, error = step(spectrum(well(width, depth, 0.067, 0.0919), 2), 0, 1)
    within(difference, printed, error)


STARK = {  # field [kV/cm] -> shift of the first and of the second level [meV], exact by Airy functions (mpmath)
    10: ("-0.019295", "+0.005753"),
    50: ("-0.481642", "+0.143123"),
    100: ("-1.917678", "+0.563893"),
}


def tilted(field):
    """Return a hard well of 10 nm, mass 0.067, with a field in kV/cm, energies counted from the middle."""
    return f"{UNITS}m = 0.067\nF = {field} [kV/cm]\nH = p^2/(2*m) + e*F*(x - 5)\nx in (0, 10)"


@pytest.mark.parametrize("field", STARK)
def test_stark_shift_of_a_hard_well(field):
    """Shifts of two levels by a field, as exact by Airy functions (recomputed with mpmath)."""
    still, pulled = spectrum(tilted(0), 2), spectrum(tilted(field), 2)
    for k, text in enumerate(STARK[field]):
        a, b = still.levels[k], pulled.levels[k]
        within(b.value - a.value, text, a.error + b.error)


def test_quadratic_stark_shift():
    """A weak field shifts the ground level by -(15 - pi^2)/(24 pi^4) m e^2 F^2 L^4/hbar^2 (Bastard et al. 1983, from memory).

    Next order in F^2 is 2.5e-5 of it at 10 kV/cm (0.4 % at 100, quadratic in F), 2.5e-7 at 1 kV/cm.
    """
    a, b = spectrum(tilted(0), 2).levels[0], spectrum(tilted(1), 2).levels[0]
    shift = -0.0021945229240803 * 0.067 * 0.1**2 * 10**4 / (2 * HALF_HBAR2)  # 1 kV/cm is 0.1 meV/nm for one e
    assert abs(b.value - a.value - shift) <= a.error + b.error + 1e-6 * abs(shift)


@pytest.mark.parametrize(
    ("field", "printed"),
    [(50, ["56.64051", "99.03033", "133.73523"]), (100, ["89.91121", "157.20085", "212.29145"])],
)
def test_triangular_well(field, printed):
    """Levels of a triangular well, mass 0.067: Airy zeros times (hbar^2 e^2 F^2/2m)^(1/3), recomputed with mpmath."""
    agree(spectrum(f"{UNITS}m = 0.067\nF = {field} [kV/cm]\nH = p^2/(2*m) + e*F*x\nx in (0, inf)", 3), dict(enumerate(printed)))


@pytest.mark.parametrize(
    ("a", "b", "centre", "edge"),
    [
        (5, 2, ["63.178872", "493.811369"], ["124.359206", "256.901973"]),
        (10, 10, ["34.178986", "132.943181", "267.079566"], ["34.237903", "132.241464", "278.243816"]),
    ],
)
def test_edges_of_minibands(a, b, centre, edge):
    """Well a, barrier b, 300 meV, mass 0.067: edges at q = 0 and pi/d, roots found with mpmath."""
    sheet = f"{UNITS}m = 0.067\nV = where(x < {a}, 0, 300)\nH = p^2/(2*m) + V\nx in ring(0, {a + b}), phase {{}}"
    for phase, printed in ((0, centre), (0.5, edge)):
        found = spectrum(sheet.format(phase), len(printed))
        agree(found, dict(enumerate(printed)))
        assert {level.kind for level in found.levels} == {"band"}


@pytest.mark.parametrize("phase", [0.1, 0.37])
def test_inside_a_miniband(phase):
    """Any level of a periodic stack satisfies the dispersion relation of Kronig and Penney to its reported error."""
    a, b, height = 5, 2, 300
    sheet = f"{UNITS}m = 0.067\nV = where(x < {a}, 0, {height})\nH = p^2/(2*m) + V\nx in ring(0, {a + b}), phase {phase}"
    found = spectrum(sheet, 4)
    scale = HALF_HBAR2 / 0.067

    def mismatch(energy):
        inside, outside = math.sqrt(energy / scale), (complex(height - energy) / scale) ** 0.5
        return (
            (_cosh(outside * b) * math.cos(inside * a)).real
            + ((outside**2 - inside**2) * _sinhc(outside * b, b) / (2 * inside) * math.sin(inside * a)).real
            - math.cos(2 * math.pi * phase)
        )

    for level in found.levels:
        slack = level.error + CONSTANTS_ROUNDING * level.value / 1000
        assert mismatch(level.value - slack) * mismatch(level.value + slack) < 0


def _cosh(z):
    return (pow(math.e, z) + pow(math.e, -z)) / 2


def _sinhc(z, length):
    """Return sinh(k b)/k for z = k b."""
    return (pow(math.e, z) - pow(math.e, -z)) / 2 / (z / length)
