"""Derivatives of levels: closed forms (recomputed here, textbook formulas), the solver, groups, refusals."""

import math
import re

import numpy as np
import pytest

from specterm.analysis.sensitivities import first_order, line_sensitivities, sensitivities
from specterm.errors import SheetError, WorkStopped
from specterm.language import parse
from specterm.model import build
from specterm.spectrum import solve

PI = math.pi
ULPS = 1e-15


def found(text, count, **options):
    """Return levels and derivatives of a sheet."""
    model = build(parse(text))
    spectrum = solve(model, count=count, **options)
    return spectrum, sensitivities(model, spectrum)


def check(text, count, exact, rel=1e-9, **options):
    """Compare derivatives with functions of number and value: within the errors told, and these are small."""
    spectrum, slopes = found(text, count, **options)
    for name, formula in exact.items():
        true = np.array([formula(k, level.value) for k, level in enumerate(spectrum.levels)])
        column = slopes.parameters.index(name)
        off, told = np.abs(slopes.derivatives[:, column] - true), slopes.errors[:, column]
        assert (off <= told + ULPS * np.abs(true)).all(), (name, off, told)
        size = max(float(np.abs(true).max()), *(abs(level.value) for level in spectrum.levels))
        assert off.max() <= rel * size, (name, off)
        assert told.max() <= 1e-6 * size, (name, told)


CLOSED = {
    "well width and hbar": (
        "H = p^2/2; x in (0, L); L = 1.7; hbar = 0.6",
        6,
        {"L": lambda _k, E: -2 * E / 1.7, "hbar": lambda _k, E: 2 * E / 0.6},
    ),
    "both ends": ("H = p^2/2; x in (a, b); a = -0.3; b = 1.7", 6, {"a": lambda _k, E: E, "b": lambda _k, E: -E}),
    "free ends": ("H = p^2/2; x in (0, L), free; L = 2", 5, {"L": lambda _k, E: -E}),
    "oscillator": ("H = p^2/2 + w^2*x^2/2; x in (-inf, inf); w = 1.3", 10, {"w": lambda k, _E: k + 0.5}),
    "oscillator far away": (
        "H = p^2/2 + w^2*(x - c)^2/2; x in (-inf, inf); w = 1.3; c = 1000",
        5,
        {"w": lambda k, _E: k + 0.5, "c": lambda _k, _E: 0},
    ),
    "Morse": (  # E = a sqrt(2 D) (k + 1/2) - a^2 (k + 1/2)^2/2
        "H = p^2/2 + D0*(1 - exp(-a*(x - r0)))^2; x in (-inf, inf); D0 = 40; a = 0.9; r0 = 1.5",
        8,
        {
            "D0": lambda k, _E: 0.9 * (k + 0.5) / math.sqrt(80),
            "a": lambda k, _E: math.sqrt(80) * (k + 0.5) - 0.9 * (k + 0.5) ** 2,
            "r0": lambda _k, _E: 0,
        },
    ),
    "Coulomb with any l": (  # E = -Z^2/(2 (k + l + 1)^2)
        "H = p^2/2 - Z/r + l*(l + 1)/(2*r^2); r in (0, inf); Z = 1.5; l = 0.3",
        6,
        {"Z": lambda k, _E: -1.5 / (k + 1.3) ** 2, "l": lambda k, _E: 2.25 / (k + 1.3) ** 3},
    ),
    "Coulomb at l = 0": (
        "H = p^2/2 - Z/r + l*(l + 1)/(2*r^2); r in (0, inf); Z = 1.5; l = 0",
        6,
        {"Z": lambda k, _E: -1.5 / (k + 1) ** 2, "l": lambda k, _E: 2.25 / (k + 1) ** 3},
    ),
    "plane oscillator": (  # psi goes as sqrt(r): E = (2 k + 1) sqrt(s/m)
        "H = p^2/(2*m) - 1/(8*m*r^2) + s*r^2/2; r in (0, inf); m = 1.3; s = 0.7",
        4,
        {"m": lambda _k, E: -E / 2.6, "s": lambda _k, E: E / 1.4},
    ),
    "Legendre": ("H = -c*D*(1 - x^2)*D; x in (-1, 1), free; c = 1.2", 5, {"c": lambda k, _E: k * (k + 1)}),
    "associated Legendre": (  # E = (k + m)(k + m + 1)
        "H = -D*(1 - x^2)*D + m^2/(1 - x^2); x in (-1, 1); m = 0.2",
        5,
        {"m": lambda k, _E: 2 * (k + 0.2) + 1},
    ),
    "highest levels": ("H = D^2 - w^2*x^2; x in (-inf, inf); w = 1.1", 5, {"w": lambda k, _E: -(2 * k + 1)}),
    "fourth order": ("H = p^4 + g*x^4; x in (-inf, inf); g = 0.8", 5, {"g": lambda _k, E: E / 1.6}),
    "fourth order on a ring": (
        "H = p^4; x in ring(0, L), phase q; L = 3.3; q = 0.2",
        5,
        {"L": lambda _k, E: -4 * E / 3.3, "q": lambda k, E: 4 * E / ((0, -1, 1, -2, 2)[k] + 0.2)},
    ),
    "free ring": (
        "H = p^2/2; x in ring(0, L), phase q; L = 3.3; q = 0.2",
        5,
        {"L": lambda _k, E: -2 * E / 3.3, "q": lambda k, E: 2 * E / ((0, -1, 1, -2, 2)[k] + 0.2)},
    ),
    "vector potential": (
        "H = (p - A)^2/2; x in ring(0, L); L = 3.3; A = 0.3",
        5,
        {"A": lambda k, _E: 0.3 - 2 * PI * (0, 1, -1, 2, -2)[k] / 3.3},
    ),
}


@pytest.mark.parametrize("name", CLOSED)
def test_closed_forms(name):
    """Derivatives agree with those of the textbook formula to 1e-9 of the level, and within the errors told."""
    check(*CLOSED[name])


def test_first_order_ring():
    """E = 2 pi v (n + q)/L: derivatives by the phase, the speed and the length."""
    exact = {"q": lambda _k, _E: 4 * PI / 3.3, "v": lambda _k, E: E / 2, "L": lambda _k, E: -E / 3.3}
    check("H = v*p; x in ring(0, L), phase q; L = 3.3; q = 0.1; v = 2", 5, exact, near=0.0)


@pytest.mark.parametrize("c", [2.0, 0.3, -0.1, -0.2, -0.24, -0.249])
def test_inverse_square(c):
    """E = 2 k + 1 + sqrt(1/4 + c): the derivative by the strength, psi going as any power of r above 1/2."""
    text = f"H = p^2/2 + c/(2*r^2) + r^2/2; r in (0, inf); c = {c}"
    check(text, 4, {"c": lambda _k, _E: 1 / (2 * math.sqrt(0.25 + c))})


def finite_well(E, V, a):
    """Return dE/dV and dE/da of an even level of a well of depth V and half width a, from k tan(k a) = kappa."""
    k, kappa = math.sqrt(2 * E), math.sqrt(2 * (V - E))
    by_energy = (math.tan(k * a) + k * a / math.cos(k * a) ** 2) / k + 1 / kappa
    return 1 / (kappa * by_energy), -((k / math.cos(k * a)) ** 2) / by_energy


def test_barrier_height_and_well_width():
    """A finite well: by its height and its half width, from the transcendental equation; the moving jump included."""
    text = "H = p^2/2 + V*(abs(x) > a); x in (-inf, inf); V = 7.5; a = 1.2"
    exact = {"V": lambda _k, E: finite_well(E, 7.5, 1.2)[0], "a": lambda _k, E: finite_well(E, 7.5, 1.2)[1]}
    spectrum, slopes = found(text, 3)
    for name, formula in exact.items():
        for row in (0, 2):
            true = formula(row, spectrum.levels[row].value)
            column = slopes.parameters.index(name)
            assert abs(slopes.derivatives[row, column] - true) <= slopes.errors[row, column] + 1e-13 * abs(true)
            assert slopes.errors[row, column] <= 1e-8 * abs(true)


def step_in_box(E, V, c, L):
    """Return dE/dV, dE/dc, dE/dL for a box with a step of height V on (c, L), from k cot(k c) + q cot(q (L - c)) = 0."""
    k, q, d = math.sqrt(2 * E), math.sqrt(2 * (E - V)), L - c

    def slope(w, a):
        return 1 / math.tan(w * a) / w - a / math.sin(w * a) ** 2

    by_energy = slope(k, c) + slope(q, d)
    by_c = -((k / math.sin(k * c)) ** 2) + (q / math.sin(q * d)) ** 2
    return slope(q, d) / by_energy, -by_c / by_energy, (q / math.sin(q * d)) ** 2 / by_energy


def test_layers_move():
    """A box of two layers: by the height of the second, and by both thicknesses, which move boundary and wall."""
    text = """H = p^2/2 + V
h = 1.4; one = 0.7; two = 1.1
layers x: thickness, V
    one 0
    two h
x in layers
"""
    spectrum, slopes = found(text, 5)
    for row, level in enumerate(spectrum.levels):
        if level.value > 1.4:
            by_height, by_place, by_end = step_in_box(level.value, 1.4, 0.7, 1.8)
            true = {"h": by_height, "one": by_place + by_end, "two": by_end}
            for name, value in true.items():
                column = slopes.parameters.index(name)
                assert abs(slopes.derivatives[row, column] - value) <= slopes.errors[row, column] + 1e-12 * abs(value)
                assert slopes.errors[row, column] <= 1e-8 * abs(level.value)


def test_mass_steps_move():
    """A jump of the mass moves: against central differences of the solver, to 1e-8."""
    text = "H = p*(1/(2*m))*p + x^2/2; m = 1 + 0.7*(x > c); c = {c}; x in (-inf, inf)"
    spectrum, slopes = found(text.format(c=0.3), 5)
    up, down = (solve(build(parse(text.format(c=0.3 + h))), count=5, tolerance=1e-11).values for h in (1e-3, -1e-3))
    far, near = (solve(build(parse(text.format(c=0.3 + h))), count=5, tolerance=1e-11).values for h in (2e-3, -2e-3))
    true = (4 * (up - down) / 2e-3 - (far - near) / 4e-3) / 3
    assert np.abs(slopes.column("c") - true).max() < 1e-8
    assert spectrum.complete


@pytest.mark.parametrize("order", [2, 4])
def test_degenerate_levels_give_branches(order):
    """Pairs of a ring at phase 0 part with the phase: the two derivatives are those of the branches, and it is said so."""
    text = f"H = p^{order}; x in ring(0, L), phase q; L = 3.3; q = 0"
    spectrum, slopes = found(text, 5)
    k = 2 * PI / 3.3
    steep = order * np.array([0.0, -1, 1, -(2.0 ** (order - 1)), 2.0 ** (order - 1)]) * k**order
    assert slopes.column("q") == pytest.approx(steep, abs=1e-8 * abs(steep).max())
    values = np.array([level.value for level in spectrum.levels])
    assert slopes.column("L") == pytest.approx(-order * values / 3.3, abs=1e-8 * values.max())
    assert sum("branches" in note for note in slopes.notes) == 2


@pytest.mark.parametrize("order", [2, 4])
def test_half_a_pair_has_no_derivative(order):
    """A level whose partner was not computed has no derivative, and the note says to ask for more levels."""
    _, slopes = found(f"H = p^{order} + 0.1*x^0; x in ring(0, L); L = 3.3", 4)
    assert np.isnan(slopes.derivatives[3]).all()
    assert np.isfinite(slopes.derivatives[:3]).all()
    assert any("ask for more levels" in note for note in slopes.notes)


@pytest.mark.parametrize(
    ("text", "name", "words"),
    [
        ("H = p^k + x^2; x in (-inf, inf); k = 2", "k", "power of an operator"),
        ("H = p^2 + x^k; x in (-inf, inf); k = 2", "k", "no finite value"),
        ("H = p^2/2 - 1/(8*r^2)*c + r^2/2; r in (0, inf); c = 1", "c", "infinite|finite"),
        ("H = p^2 + x^2 + (x > c)*(c > 1); x in (-inf, inf); c = 1", "c", "appear or vanish|smooth|narrow"),
        ("H = p^4 + 3*(x > c)/exp(x^2); x in ring(-9, 9); c = 1", "c", "higher order"),
    ],
)
def test_what_has_no_derivative_is_said(text, name, words):
    """Numbers whose neighbours make no sense, infinite derivatives and maps that cannot be made: nan, with the reason."""
    _, slopes = found(text, 2)
    assert np.isnan(slopes.column(name)).all()
    assert slopes.notes
    assert re.search(words, " ".join(slopes.notes))


def test_box_levels_have_none():
    """Levels that exist only because the domain was cut have no derivatives; bound ones beside them do."""
    spectrum, slopes = found("H = p^2 - V*(abs(x) < a); x in (-inf, inf); V = 3; a = 1", 4)
    boxed = np.array([level.kind == "box" for level in spectrum.levels])
    assert boxed.any()
    assert not boxed.all()
    assert (np.isnan(slopes.derivatives).all(axis=1) == boxed).all()


def test_units_are_those_written():
    """The derivative is by the number as written: kV/cm here, V/m there, a hundred thousand times less."""
    text = "units: energy meV, length nm, mass m_e; H = p^2/(2*m_e) + e*F*x; x in (0, 10); F = {F}"
    first, second = (found(text.format(F=F), 3)[1] for F in ("20 [kV/cm]", "2000000 [V/m]"))
    assert first.units == ("meV/(kV/cm)",)
    assert second.units == ("meV/(V/m)",)
    assert first.column("F") == pytest.approx(1e5 * second.column("F"), rel=1e-9)


def test_a_number_that_does_nothing():
    """A number the operator does not use has derivatives of exactly 0."""
    _, slopes = found("H = p^2 + x^2; x in (-inf, inf); a = 3; A = a*x", 3)
    assert (slopes.column("a") == 0).all()


def test_jumps_that_come_up():
    """A step of height 0 has a derivative by its height: the weight behind it (recomputed: erfc/2 for the ground level)."""
    _, slopes = found("H = p^2/2 + x^2/2 + c*(x > d); x in (-inf, inf); c = 0; d = 0.3", 1)
    assert slopes.column("c") == pytest.approx([math.erfc(0.3) / 2], rel=1e-9)
    assert slopes.column("d") == pytest.approx([0], abs=1e-12)


def test_overridden_numbers():
    """`--set` changes the number that is varied, whatever stands in the text."""
    model = build(parse("H = p^2/2 + w^2*x^2/2; x in (-inf, inf); w = 2*3"), overrides={"w": "-(1.3)"})
    slopes = sensitivities(model, solve(model, count=3))
    assert slopes.column("w") == pytest.approx([-0.5, -1.5, -2.5])


def test_lines_and_first_order():
    """Derivatives of lines are differences, with both errors; the first-order estimate is value + derivative * change."""
    spectrum, slopes = found("H = p^2/2 + w^2*x^2/2; x in (-inf, inf); w = 1.3", 4)
    lines = line_sensitivities(slopes, (0, 1))
    assert lines.lines == ((0, 1), (0, 2), (0, 3), (1, 2), (1, 3))
    assert lines.derivatives[:, 0] == pytest.approx([1, 2, 3, 1, 2])
    assert first_order(spectrum.values, slopes, "w", 0.01) == pytest.approx(1.31 * (np.arange(4) + 0.5))


def test_only_the_names_asked_for():
    """Names choose the columns; a name that is no plain number is refused with those there are."""
    model = build(parse("H = p^2 + a*x^2 + b*x^4; x in (-inf, inf); a = 1; b = 2*a"))
    spectrum = solve(model, count=2)
    assert sensitivities(model, spectrum, names=["a"]).parameters == ("a",)
    with pytest.raises(SheetError, match="not a plain number"):
        sensitivities(model, spectrum, names=["b"])


def test_work_can_be_stopped():
    """The caller can stop the work."""
    model = build(parse("H = p^2 + a*x^2; x in (-inf, inf); a = 1"))
    with pytest.raises(WorkStopped):
        sensitivities(model, solve(model, count=2), should_stop=lambda: True)


def test_a_partner_not_computed_counts():
    """Tunnelling pairs: by parity no level moves with a tilt, within the error told, whether its partner is known or not."""
    text = "H = p^2/2 + h*((x/b)^2 - 1)^2 + t*x; h = 30; b = 2; t = 0; x in (-inf, inf)"
    for count in (1, 2, 3, 4):
        _, slopes = found(text, count)
        assert (np.abs(slopes.column("t")) <= slopes.errors[:, slopes.parameters.index("t")]).all()


@pytest.mark.parametrize("seed", range(8))
def test_errors_are_honest(seed):
    """Random Morse, sech^2 and Coulomb problems: every derivative lies within its error of the closed form."""
    rng = np.random.default_rng(seed)
    D, a, V, Z, m = np.exp(rng.uniform(np.log([3, 0.1, 1, 0.1, 0.1]), np.log([500, 1.2, 500, 10, 100]))).tolist()
    depth = (math.sqrt(1 + 8 * V / a**2) - 1) / 2
    steep = 2 / math.sqrt(1 + 8 * V / a**2)
    r, turn = rng.uniform(-3, 50), rng.uniform(-0.4, 4)
    problems = [
        (
            f"H = p^2/2 + D0*(1 - exp(-a*(x - r)))^2; x in (-inf, inf); D0 = {D!r}; a = {a!r}; r = {r!r}",
            max(1, min(int(math.sqrt(2 * D) / a - 0.5), 8)),
            {
                "D0": lambda k, _E: a * (k + 0.5) / math.sqrt(2 * D),
                "a": lambda k, _E: math.sqrt(2 * D) * (k + 0.5) - a * (k + 0.5) ** 2,
                "r": lambda _k, _E: 0,
            },
        ),
        (  # E = -a^2 (s - k)^2/2 with s (s + 1) = 2 V/a^2
            f"H = p^2/2 - V/cosh(a*x)^2; x in (-inf, inf); V = {V!r}; a = {a!r}",
            max(1, min(int(depth), 8)),
            {
                "V": lambda k, _E: -(depth - k) * steep,
                "a": lambda k, _E: -a * (depth - k) ** 2 + 2 * V / a * (depth - k) * steep,
            },
        ),
        (
            f"H = p^2/(2*m) - Z/r + l*(l + 1)/(2*m*r^2); r in (0, inf); Z = {Z!r}; l = {turn!r}; m = {m!r}",
            6,
            {
                "Z": lambda k, _E: -Z * m / (k + turn + 1) ** 2,
                "l": lambda k, _E: m * Z**2 / (k + turn + 1) ** 3,
                "m": lambda _k, E: E / m,
            },
        ),
    ]
    for text, count, exact in problems:
        check(text, count, exact)


@pytest.mark.parametrize("k", [1e-300, 1e-30, 1e-14, 1e-12, -1e-10])
def test_numbers_too_small_to_be_felt(k):
    """A number whose own share would change nothing is moved until it does: dE/dk = <x^2> = 1/2 at k = 0 (closed form)."""
    _, slopes = found(f"H = p^2/2 + x^2/2 + k*x^2; k = {k!r}; x in (-inf, inf)", 1)
    assert slopes.derivatives[0, 0] == pytest.approx(0.5, rel=1e-8)
    assert slopes.errors[0, 0] <= 1e-8


def test_small_numbers_under_a_bend():
    """Where the operator bends at a small number the step stays below it: 1/(4 sqrt(k)) (closed form), or nothing is told."""
    _, slopes = found("H = p^2/2 + x^2/2 + sqrt(k)*x^2; k = 1e-14; x in (-inf, inf)", 1)
    assert abs(slopes.derivatives[0, 0] - 0.25e7) <= slopes.errors[0, 0] <= 0.25e4
    _, slopes = found("H = p^2/2 + x^2/2 + sqrt(k^2 + 1e-10)*x^2; k = 1e-14; x in (-inf, inf)", 1)
    assert np.isnan(slopes.derivatives[0, 0])
    assert "rounding hides it" in slopes.notes[0]
