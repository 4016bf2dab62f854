"""The presets: each is invented and says so, and its levels agree with an estimate made by other means.

All numbers are recomputed here from the numbers in the sheets: closed forms, matrices of plane waves, and 3-point differences
extrapolated from two steps (common practice, no source). Constants are those of scipy.constants (CODATA 2022).
"""

import csv
from functools import cache
from itertools import pairwise
from pathlib import Path

import numpy as np
import pytest
from scipy import constants as si
from scipy import integrate, interpolate, linalg, special

from specterm.analysis import project, solve
from specterm.language import parse
from specterm.model import build
from specterm.session.presets import presets

FOLDER = Path(__file__).resolve().parent.parent / "presets"
NAMES = [preset.name for preset in presets(FOLDER)]
NEAR = {"edge-channel": 0.0}
BOUND = {"graded-mass": 2, "half-stack": 2, "leaky-barrier": 0, "molecule-stretch": 45}
BANDS = {"circuit-phase", "edge-channel", "light-lattice"}

EV = si.e
CM = 100 * si.h * si.c
MEV_NM = si.hbar**2 / (2 * si.m_e) / (1e-3 * EV * 1e-18)  # hbar^2/2 in meV nm^2 m_e
CM_A = si.hbar**2 / (2 * si.u) / (CM * 1e-20)  # hbar^2/2 in cm^-1 angstrom^2 u


@cache
def model(name, *overrides):
    """Return a preset made ready, with parameters set."""
    text = (FOLDER / f"{name}.sheet").read_text(encoding="utf-8")
    return build(parse(text), folder=FOLDER, overrides=dict(overrides) or None)


@cache
def spectrum(name, *overrides, count=None):
    """Return the levels of a preset."""
    return solve(model(name, *overrides), count=count, near=NEAR.get(name))


def differences(step, pieces, stiff, potential, count):
    """Return the lowest levels of -d/dx K d/dx + V between walls, from two steps of 3-point differences, extrapolated.

    `pieces` are the intervals between jumps, so that every jump is a grid point; a quarter and an eighth of `step` are taken.
    """
    found = []
    for steps in (4, 8):
        x = np.concatenate([np.linspace(a, b, round((b - a) / step * steps) + 1)[:-1] for a, b in pieces])
        x = np.append(x, pieces[-1][1])
        h = np.diff(x)
        k = stiff((x[:-1] + x[1:]) / 2)
        inner = slice(1, -1)
        share = 1e-9 * h.min()
        v = (h[:-1] * potential(x[inner] - share) + h[1:] * potential(x[inner] + share)) / (h[:-1] + h[1:])
        w = (h[:-1] + h[1:]) / 2
        flow = k / h
        side = -flow[1:-1] / np.sqrt(w[:-1] * w[1:])
        found.append(linalg.eigvalsh_tridiagonal((flow[:-1] + flow[1:]) / w + v, side, "i", (0, count - 1)))
    return found[1] + (found[1] - found[0]) / 3


def waves(stiff, potential, shift=0.0, size=40, power=1):
    """Return the levels of stiff (n + shift)^(2 power) plus Fourier parts {k: v_k, v_-k = conj v_k} on a ring of 2 pi."""
    n = np.arange(-size, size + 1)
    matrix = np.diag(stiff * (n + shift) ** (2 * power)).astype(complex)
    for k, part in potential.items():
        matrix += np.diag(np.full(len(n) - k, part), -k)
        matrix += np.diag(np.full(len(n) - k, np.conj(part)), k) if k else 0
    return np.linalg.eigvalsh(matrix)


def stack(thickness, column):
    """Return the corners of layers and a piecewise-constant function."""
    corners = np.concatenate([[0.0], np.cumsum(thickness)])
    return corners, lambda x: np.array(column)[np.clip(np.searchsorted(corners, x, "right") - 1, 0, len(column) - 1)]


def pairs(corners):
    """Return the intervals between corners."""
    return list(pairwise(corners))


def columns(name, *wanted):
    """Return columns of a table of points, in ascending order."""
    with open(FOLDER / name, encoding="utf-8") as file:
        rows = list(csv.reader(line for line in file if not line.startswith("#")))
    rows = sorted([float(cell) for cell in row] for row in rows[1:])
    return [np.array([row[k] for row in rows]) for k in wanted]


def coupled_wells():
    """Three wells in a field of 9 kV/cm: 0.9 meV a nanometre."""
    corners, m = stack([14, 4.9, 2.8, 7.4, 1.6, 6.1, 14], [0.088, 0.061, 0.088, 0.061, 0.088, 0.061, 0.088])
    _, v = stack([14, 4.9, 2.8, 7.4, 1.6, 6.1, 14], [265, 0, 265, 0, 265, 0, 265])
    return differences(0.1, pairs(corners), lambda x: MEV_NM / m(x), lambda x: v(x) + 0.9 * x, 10)


def graded_mass():
    """Put the open well between walls 60 nm from its middle."""

    def share(x):
        return np.exp(-((x / 5.5) ** 4))

    return differences(0.1, [(-60, 60)], lambda x: MEV_NM / (0.088 - 0.027 * share(x)), lambda x: -210 * share(x), 2)


def half_stack():
    """Even levels of the whole stack, mirrored about its middle."""
    thick = [60, 6.8, 2.4, 6.8, 60]
    corners, m = stack(thick, [0.088, 0.061, 0.079, 0.061, 0.088])
    _, v = stack(thick, [265, 0, 190, 0, 265])
    return differences(0.1, pairs(corners), lambda x: MEV_NM / m(x), v, 4)[::2]


def molecule_stretch():
    """Put a cubic spline of another make through the table: the levels do not reach its end."""
    r, e = columns("molecule-stretch.csv", 0, 1)
    spline = interpolate.CubicSpline(r, e)
    return differences(0.005, [(0.95, 2.95)], lambda x: CM_A / 5.83 + 0 * x, spline, 10)


def molecule_bend():
    """Straight lines through the table; the last of them go on."""
    rows = [line.split() for line in (FOLDER / "molecule-bend.csv").read_text().splitlines() if not line.startswith("#")]
    s, v = np.array(sorted([float(a) / 100, float(b)] for a, b in rows[1:])).T
    lines = interpolate.interp1d(s, v, fill_value="extrapolate")
    return differences(0.005, pairs(np.concatenate([[-1.1], s, [1.1]])), lambda x: CM_A / 2.41 + 0 * x, lines, 10)


def double_well():
    """Between walls that the levels do not feel."""
    return differences(0.005, [(-1.2, 1.2)], lambda x: CM_A / 2.41 + 0 * x, lambda x: 1480 * ((x / 0.41) ** 2 - 1) ** 2, 10)


def rotor_torsion():
    """Plane waves: cos 3 phi and cos 6 phi join n with n +- 3 and n +- 6."""
    return waves(5.62, {0: (418 - 31) / 2, 3: 418 / 4, 6: 31 / 4})[:10]


def light_lattice():
    """Plane waves: the cell is a = 0.436 um long, depth cos^2 = depth/2 (1 + cos)."""
    stiff = (2 * np.pi * si.hbar / 0.436e-6) ** 2 / (2 * 61.9 * si.u) / (1e-12 * EV)
    return waves(stiff, {0: 118 / 2, 1: 118 / 4}, shift=0.18)[:10]


def circuit_phase():
    """Charge states: the island holds n - ng."""
    return waves(4 * 0.41, {1: -9.3 / 2}, shift=-0.25)[:10]


def circuit_loop():
    """Differences, with the charging energy e^2/2C over h in GHz."""
    charging = si.e**2 / (2 * 11.4e-15) / si.h / 1e9

    def energy(phi):
        return 0.83 * phi**2 / 2 - 5.6 * np.cos(phi - 2 * np.pi * 0.493)

    return differences(0.02, [(-20, 20)], lambda x: 4 * charging + 0 * x, energy, 10)


def donor_radial():
    """Rydberg levels of n = 2, 3, ...: a p state does not feel the core, to 1e-5 of the level."""
    rydberg = si.Rydberg * si.h * si.c / (1e-3 * EV) * 0.061 / 9.7**2
    return -rydberg / np.arange(2, 12) ** 2


def falling_atoms():
    """Zeros of the Airy function, with 0.15 of the weight."""
    mass = 61.9 * si.u
    unit = (si.hbar**2 / (2 * mass) * (mass * 9.81 * 0.15) ** 2) ** (1 / 3) / (1e-12 * EV)
    return -special.ai_zeros(10)[0] * unit


def ring_current():
    """Plane waves, the bump's parts by quadrature."""
    x = np.linspace(0, 320, 4096, endpoint=False)
    bump = np.fft.fft(0.6 * np.exp(-(((x - 80) / 9) ** 2))) / len(x)
    return waves(MEV_NM / 0.061 * (2 * np.pi / 320) ** 2, {k: bump[k] for k in range(60)}, shift=-0.3, size=60)[:10]


def edge_channel():
    """Take h (n + flux) over the time around, as the potential's mean along the way."""
    fast = 85e3 * 1e9 / 1e12  # nm/ps
    turn = 2 * np.pi * si.hbar / (1e-3 * EV * 1e-12)  # h in meV ps

    def slowness(x):
        return 1 / (fast * (1 - 0.4 * np.exp(-(((x - 950) / 160) ** 2))))

    time = integrate.quad(slowness, 0, 1900, points=[950], epsabs=0, epsrel=1e-12)[0]
    mean = integrate.quad(lambda x: 0.05 * np.cos(2 * np.pi * x / 1900) * slowness(x), 0, 1900, points=[950], epsrel=1e-12)[0]
    return (turn * (np.arange(-5, 5) + 0.15) + mean) / time


def anharmonic_trap():
    """Between walls that the levels do not feel."""
    return differences(0.05, [(-9, 9)], lambda x: 0.5 + 0 * x, lambda x: x**2 / 2 + 0.08 * x**3 + 0.025 * x**4, 10)


def flat_band_ring():
    """Plane waves of p^4 - 2 p^2 + 1, the defect's parts by quadrature."""
    x = np.linspace(0, 24, 4096, endpoint=False)
    parts = np.fft.fft(-0.4 * np.exp(-(((x - 12) / 1.5) ** 2))) / len(x)
    size, step = 60, 2 * np.pi / 24
    matrix = np.diag(((np.arange(-size, size + 1) * step) ** 2 - 1) ** 2).astype(complex)
    for k in range(60):
        matrix += np.diag(np.full(2 * size + 1 - k, parts[k]), -k)
        matrix += np.diag(np.full(2 * size + 1 - k, np.conj(parts[k])), k) if k else 0
    return np.linalg.eigvalsh(matrix)[:10]


ESTIMATES = {  # what they are worth, as a share of the highest level's distance from the lowest
    "anharmonic-trap": (anharmonic_trap, 1e-7),
    "circuit-loop": (circuit_loop, 1e-7),
    "circuit-phase": (circuit_phase, 1e-12),
    "coupled-wells": (coupled_wells, 1e-5),
    "donor-radial": (donor_radial, 1e-5),
    "double-well": (double_well, 1e-6),
    "edge-channel": (edge_channel, 1e-9),
    "falling-atoms": (falling_atoms, 1e-9),
    "flat-band-ring": (flat_band_ring, 1e-11),
    "graded-mass": (graded_mass, 1e-5),
    "half-stack": (half_stack, 1e-5),
    "light-lattice": (light_lattice, 1e-9),
    "molecule-bend": (molecule_bend, 1e-5),
    "molecule-stretch": (molecule_stretch, 1e-5),
    "ring-current": (ring_current, 1e-9),
    "rotor-torsion": (rotor_torsion, 1e-12),
}


def test_every_preset_has_an_estimate():
    """No preset goes unchecked; the barrier that binds nothing is the one without levels."""
    assert set(NAMES) == {*ESTIMATES, "leaky-barrier"}
    assert len(NAMES) >= 10


@pytest.mark.parametrize("name", NAMES)
def test_title_and_invention(name):
    """The first line is a title of at most 70 characters, the second says that the sheet is invented."""
    title, invented = (FOLDER / f"{name}.sheet").read_text(encoding="utf-8").splitlines()[:2]
    assert title.startswith("# ")
    assert 10 < len(title) - 2 <= 70
    assert invented.startswith("# Invented for the Skarrow bench: not a real ")


def test_tables_are_invented():
    """The tables that come along say that they are made up."""
    tables = sorted(FOLDER.glob("*.csv"))
    assert tables
    for table in tables:
        assert "Invented for the Skarrow bench" in table.read_text(encoding="utf-8").splitlines()[0]


@pytest.mark.parametrize("name", NAMES)
def test_preset_is_solved(name):
    """Every preset is Hermitian, without warnings; its levels are complete, reach the tolerance and are of the right kind."""
    ready, found = model(name), spectrum(name)
    assert ready.operator.hermitian() is None
    assert ready.warnings == ()
    assert found.complete
    assert len(found.levels) == min(10, BOUND.get(name, 10))
    assert {level.kind for level in found.levels} <= ({"band"} if name in BANDS else {"bound"})
    assert found.bound == BOUND.get(name)


@pytest.mark.parametrize("name", ESTIMATES)
def test_levels_agree_with_an_estimate(name):
    """Levels are those of the estimate, within what it is worth and the error reported."""
    estimate, worth = ESTIMATES[name]
    found, expected = spectrum(name), estimate()
    slack = worth * (expected[-1] - expected[0])
    for level, other in zip(found.levels, expected, strict=True):
        assert abs(level.value - other) <= slack + level.error, f"level {level.index}: {level.value!r} and {other!r}"


def test_stretch_binds_what_differences_count():
    """The number of bound levels of the stretch is the number of levels of differences below the held end, walls far out."""
    r, e = columns("molecule-stretch.csv", 0, 1)
    spline = interpolate.CubicSpline(r, e)
    x = np.linspace(0.95, 30, 20_001)
    h = x[1] - x[0]
    v = spline(np.minimum(x[1:-1], r[-1]))
    below = linalg.eigvalsh_tridiagonal(
        2 * CM_A / 5.83 / h**2 + v, np.full(len(v) - 1, -CM_A / 5.83 / h**2), select="v", select_range=(-1e3, e[-1])
    )
    assert len(below) == spectrum("molecule-stretch").bound


def test_barrier_has_box_levels_only():
    """Where nothing is bound, levels asked for are box levels without an error."""
    found = spectrum("leaky-barrier", count=6)
    assert [level.kind for level in found.levels] == ["box"] * 6
    assert all(level.error is None for level in found.levels)
    assert found.threshold == 0


def test_donor_without_core():
    """Without the core the s levels are those of hydrogen, scaled (closed form), to 1e-9 for the constants."""
    rydberg = si.Rydberg * si.h * si.c / (1e-3 * EV) * 0.061 / 9.7**2
    for level in spectrum("donor-radial", ("l", "0"), ("core", "0")).levels:
        expected = -rydberg / (level.index + 1) ** 2
        assert abs(level.value - expected) <= level.error + 1e-9 * abs(expected)


def test_every_state_can_be_projected():
    """Every prepared state has weights between 0 and 1 that hold most of it, but for the packet on the open line."""
    for name in NAMES:
        count = 20 if name not in BOUND else None
        found = spectrum(name, count=6 if name == "leaky-barrier" else count)
        for state in model(name).states:
            captured = project(model(name), found, state, FOLDER).captured
            assert captured <= 1 + 1e-9
            assert captured > 0.85 or name == "leaky-barrier", (name, state, captured)


@pytest.mark.parametrize("name", NAMES)
def test_every_plain_number_can_be_nudged(name):
    """One percent more or less of any plain number (of zero: 0.01) leaves a sheet whose levels are found."""
    ready = model(name)
    assert ready.plain
    for parameter in ready.plain:
        value = ready.parameters[parameter]
        for nudged in (value * 1.01 or 0.01, value * 0.99 or -0.01):
            found = solve(model(name, (parameter, repr(nudged))), count=2, near=NEAR.get(name))
            assert found.complete
            assert "unresolved" not in {level.kind for level in found.levels}
