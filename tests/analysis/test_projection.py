"""Projection weights of prepared states, against closed forms within the reported errors. Recomputed here unless said."""

import math

import numpy as np
import pytest
from analysis_making import assert_weights, model, spectrum, weights

from specterm.analysis import project
from specterm.errors import SheetError

OSCILLATOR = "H = p^2/2 + x^2/2; x in (-inf, inf)\n"


@pytest.mark.parametrize("shift", [0.0, 0.5, 1.5, 3.0])
@pytest.mark.parametrize("kick", [0.0, 0.7])
def test_coherent_state(shift, kick):
    """A displaced, kicked ground state has Poisson weights of mean (x0^2 + p0^2)/2 (Glauber, Phys. Rev. 131 (1963) 2766)."""
    found = weights(f"{OSCILLATOR}state s = exp(-(x-{shift})^2/2) * exp(i*{kick}*x)", "s", 25)
    mean = (shift**2 + kick**2) / 2
    expected = [math.exp(-mean) * mean**n / math.factorial(n) for n in range(25)]
    assert_weights(found, expected)
    assert found.captured == pytest.approx(sum(expected), abs=1e-11)
    assert found.mean == pytest.approx(mean + 0.5, rel=1e-7)
    assert found.spread == pytest.approx(math.sqrt(mean), rel=1e-6, abs=1e-6)


def test_amplitudes_carry_the_phase():
    """With a = (x0 + i p0)/sqrt(2) amplitudes are e^(i x0 p0/2) e^(-|a|^2/2) a^n/sqrt(n!), times (-1)^n (signs of levels)."""
    found = weights(f"{OSCILLATOR}state s = exp(-(x-1)^2/2) * exp(i*0.7*x)", "s", 6)
    a = (1 + 0.7j) / math.sqrt(2)
    for weight in found.weights:
        n = weight.index
        expected = math.e ** (0.35j) * math.exp(-(abs(a) ** 2) / 2) * a**n / math.sqrt(math.factorial(n)) * (-1) ** n
        assert weight.amplitude == pytest.approx(expected, abs=1e-10)
        assert weight.weight == pytest.approx(abs(weight.amplitude) ** 2, rel=1e-12)


@pytest.mark.parametrize("squeeze", [0.3, 1.0, 4.0])
def test_squeezed_state(squeeze):
    """exp(-s x^2/2) has weights (2k)!/(2^k k!)^2 sech r tanh^2k r on even levels, tanh r = (s-1)/(s+1); none on odd ones."""
    found = weights(f"{OSCILLATOR}state s = exp(-{squeeze}*x^2/2)", "s", 16)
    t = (squeeze - 1) / (squeeze + 1)
    even = [math.comb(2 * k, k) / 4**k * math.sqrt(1 - t * t) * t ** (2 * k) for k in range(8)]
    assert_weights(found, [even[n // 2] if n % 2 == 0 else 0.0 for n in range(16)])


def test_box_parabola():
    """X (1 - x) between walls has weights 960/(pi k)^6 for odd k, none for even k."""
    found = weights("H = p^2; x in (0, 1)\nstate s = x*(1-x)", "s", 12)
    assert_weights(found, [960 / (math.pi * k) ** 6 if k % 2 else 0.0 for k in range(1, 13)])


def test_uniform_state_cut_by_walls():
    """A constant between walls has weights 8/(pi k)^2 for odd k; that walls cut into it is noted."""
    found = weights("H = p^2; x in (0, 1)\nstate s = 1", "s", 10)
    assert_weights(found, [8 / (math.pi * k) ** 2 if k % 2 else 0.0 for k in range(1, 11)])
    assert any("walls" in note for note in found.notes)
    assert any("above the levels computed" in note for note in found.notes)


def test_state_clear_of_the_walls():
    """A packet well inside is not said to be cut."""
    found = weights("H = p^2; x in (0, 1)\nstate s = exp(-(x-0.5)^2/(4*0.03^2))", "s", 40)
    assert not any("walls" in note for note in found.notes)
    assert found.captured == pytest.approx(1, abs=1e-9)


def test_narrow_fast_packet():
    """A packet of width 1e-3 with 5000 waves in the unit of length, far narrower than the elements, is integrated whole."""
    text = "H = p^2/2 + x^2/2; x in (-inf, inf)\nstate s = exp(-(x-0.3)^2/(4*0.001^2)) * exp(i*5000*x)"
    found = weights(text, "s", 10)
    assert all(weight.weight < 1e-12 for weight in found.weights)
    still = weights(text.replace("5000", "0"), "s", 4)
    exact = math.sqrt(8 * math.pi) * 0.001 * math.exp(-(0.3**2)) / math.sqrt(math.pi)
    assert still.weights[0].weight == pytest.approx(exact, rel=1e-5)


def test_very_narrow_packet():
    """A packet of a millionth of the domain is found where its centre is: weights sqrt(8 pi) s 2 sin^2(k pi x0)."""
    found = weights("H = p^2; x in (0, 1)\nstate s = exp(-(x-0.3)^2/(4*1e-6^2))", "s", 3)
    exact = [math.sqrt(8 * math.pi) * 1e-6 * 2 * math.sin(k * math.pi * 0.3) ** 2 for k in (1, 2, 3)]
    np.testing.assert_allclose([weight.weight for weight in found.weights], exact, rtol=1e-6)


def test_narrow_part_of_a_state():
    """A narrow part beside a wide one counts: with two thirds of the norm in it, low levels capture one third."""
    found = weights("H = p^2; x in (-10, 10)\nstate s = exp(-x^2) + 1000*exp(-(x-0.3)^2/(4*1e-6^2))", "s", 60)
    wide, narrow = math.sqrt(math.pi / 2), 1e6 * math.sqrt(2 * math.pi) * 1e-6
    assert found.captured == pytest.approx(wide / (wide + narrow), rel=5e-3)


def test_jumping_state():
    """A state with a jump inside elements: 1 on (0, b) in a unit box has weights 2/b ((1 - cos k pi b)/(k pi))^2."""
    found = weights("H = p^2; x in (0, 1)\nstate s = where(x < 0.37, 1, 0)", "s", 8)
    exact = [2 / 0.37 * ((1 - math.cos(k * math.pi * 0.37)) / (k * math.pi)) ** 2 for k in range(1, 9)]
    assert_weights(found, exact)


def test_sum_of_levels():
    """level(0) + 2 i level(2) has weights 1/5 and 4/5, amplitudes with that phase, and the mean of those two levels."""
    found = weights(f"{OSCILLATOR}state s = level(0) + 2*i*level(2)", "s", 4)
    assert_weights(found, [0.2, 0, 0.8, 0])
    assert found.weights[2].amplitude / found.weights[0].amplitude == pytest.approx(2j, rel=1e-10)
    assert found.mean == pytest.approx(0.2 * 0.5 + 0.8 * 2.5, rel=1e-10)
    assert found.spread == pytest.approx(0.4 * 2, rel=1e-9)
    assert found.captured == pytest.approx(1, abs=1e-12)


def test_function_times_a_level():
    """X level(0) of an oscillator is level(1), whatever its norm."""
    assert_weights(weights(f"{OSCILLATOR}state s = x*level(0)", "s", 4), [0, 1, 0, 0])


def test_level_by_name():
    """A level can be named in place of a state."""
    found = project(model(OSCILLATOR), spectrum(OSCILLATOR, 4), "level(3)")
    assert_weights(found, [0, 0, 0, 1])


def test_level_of_another_sheet(tmp_path):
    """level(0) of a displaced, stiffer oscillator: the first weight is the overlap of two gaussians."""
    (tmp_path / "other.sheet").write_text("H = p^2/2 + 4*(x - 0.6)^2/2; x in (-inf, inf)\n")
    found = weights(f'{OSCILLATOR}state s = level(0) of "other.sheet"', "s", 6, tmp_path)
    a, b = 1.0, 2.0
    exact = 2 * math.sqrt(a * b) / (a + b) * math.exp(-a * b / (a + b) * 0.6**2)
    assert abs(found.weights[0].weight - exact) <= found.weights[0].error


@pytest.mark.parametrize("index", [1, 3])
def test_higher_levels_of_another_sheet(tmp_path, index):
    """A distorted copy of the same sheet: projecting level n on it gives Franck-Condon weights that sum to 1."""
    (tmp_path / "other.sheet").write_text("H = p^2/2 + x^2/2 + 0.05*x^4; x in (-inf, inf)\n")
    found = weights(f'{OSCILLATOR}state s = level({index}) of "other.sheet"', "s", 40, tmp_path)
    assert found.captured == pytest.approx(1, abs=1e-8)
    assert max(found.weights, key=lambda w: w.weight).index == index


def test_complex_levels():
    """Beside a vector potential levels are complex: a ground state with the same kick lies wholly in level 0."""
    found = weights("H = (p - 0.7)^2/2 + x^2/2; x in (-inf, inf)\nstate s = exp(-x^2/2)*exp(i*0.7*x)", "s", 3)
    assert_weights(found, [1, 0, 0])


def test_on_a_ring():
    """exp(3 i x) on a free ring lies in the pair of levels 9, wholly."""
    found = weights("H = p^2; x in ring(0, 2*pi)\nstate s = exp(3*i*x)", "s", 9)
    assert found.weights[5].weight + found.weights[6].weight == pytest.approx(1, abs=1e-11)
    assert found.captured == pytest.approx(1, abs=1e-11)


def test_what_the_continuum_holds():
    """The part of a state no bound level holds is said to lie in the continuum."""
    found = weights("H = p^2 - 2/cosh(x)^2; x in (-inf, inf)\nstate s = exp(-x^2)", "s")
    t, w = np.polynomial.legendre.leggauss(200)
    x, w = 8 * t, 8 * w
    exact = (w * np.exp(-(x**2)) / np.cosh(x)).sum() ** 2 / 2 / math.sqrt(math.pi / 2)
    assert_weights(found, [exact])
    assert any("continuum" in note for note in found.notes)


def test_nothing_to_project_on():
    """Where nothing is bound there are no weights, nothing is captured, and a note says so."""
    found = weights("H = p^2 + exp(-x^2); x in (-inf, inf)\nstate s = exp(-x^2)", "s")
    assert (found.weights, found.captured) == ((), 0)
    assert found.notes


def test_wave_is_normalised():
    """The state handed back is normalised."""
    found = weights(f"{OSCILLATOR}state s = 17*exp(-(x-1)^2)*(1 + 2*i)", "s", 4)
    x = np.linspace(-8, 10, 20001)
    assert np.trapezoid(np.abs(found.wave(x)) ** 2, x) == pytest.approx(1, abs=1e-10)




@pytest.mark.parametrize("count", [3, 8, 20])
def test_errors_cover_the_truth(count):
    """However few levels are computed, each weight of a double well is right within its error (against many levels)."""
    text = "H = p^2 + 6*(x^2 - 4)^2/4; x in (-inf, inf)\nstate s = exp(-(x-1.7)^2)"
    few, many = weights(text, "s", count), weights(text, "s", 30)
    for a, b in zip(few.weights, many.weights, strict=False):
        assert abs(a.weight - b.weight) <= a.error + b.error


NOT_NORMALISABLE = ["1", "x", "exp(x)", "exp(i*x)", "1/sqrt(1+abs(x))", "exp(-x)"]


@pytest.mark.parametrize("wave", NOT_NORMALISABLE)
def test_not_normalisable(wave):
    """A state without a finite norm on the line is refused, in the sheet's own place."""
    with pytest.raises(SheetError, match="normalis") as caught:
        weights(f"{OSCILLATOR}state s = {wave}", "s", 3)
    assert caught.value.span is not None


REFUSED = [
    ("state s = exp(-x^2)", "t", "no state `t`"),
    ("", "t", "none"),
    ("state s = level(9)", "s", "not among the 3 levels"),
    ("", "level(3)", "not among the 3 levels"),
    ("", "level(-1)", "no state"),
    ('state s = level(0) of "missing.sheet"', "s", "missing.sheet"),
    ("state s = level(0) - level(0)", "s", "normalis"),
]


@pytest.mark.parametrize(("line", "name", "words"), REFUSED)
def test_refused(tmp_path, line, name, words):
    """Unknown states, levels not computed, sheets not found: refused with the names there are."""
    with pytest.raises(SheetError) as caught:
        weights(OSCILLATOR + line, name, 3, tmp_path)
    assert words in caught.value.message + " " + caught.value.mend


@pytest.mark.parametrize(
    "other",
    [
        "H = p^2 + y^2; y in (-inf, inf)",
        "units: energy meV, length nm, mass m_e; H = p^2/(2*m) + 3*x^2; m = 1; x in (-inf, inf)",
    ],
)
def test_another_sheet_must_fit(tmp_path, other):
    """A sheet with another coordinate or other units is refused."""
    (tmp_path / "other.sheet").write_text(other + "\n")
    with pytest.raises(SheetError, match="coordinate or other units"):
        weights(f'{OSCILLATOR}state s = level(0) of "other.sheet"', "s", 3, tmp_path)


WELL = "H = p^2/2; x in (0, {right})\n"


def test_level_of_a_narrower_well(tmp_path):
    """A wall moved at once from 1 to 2: weights 32 sin^2(n pi/2)/(pi^2 (4 - n^2)^2), 1/2 for n = 2 (closed form)."""
    (tmp_path / "other.sheet").write_text(WELL.format(right=1))
    found = weights(WELL.format(right=2) + 'state s = level(0) of "other.sheet"', "s", 30, tmp_path)
    n = np.arange(1, 31)
    exact = np.where(n == 2, 0.5, 32 * np.sin(n * np.pi / 2) ** 2 / (np.pi**2 * np.where(n == 2, 1.0, 4.0 - n**2) ** 2))
    assert_weights(found, exact)
    assert not any("cut" in note for note in found.notes)


def test_level_of_a_wider_well_is_cut(tmp_path):
    """A wall moved at once from 2 to 1 cuts half of the level away: a warning, and weights of the part left (closed form)."""
    (tmp_path / "other.sheet").write_text(WELL.format(right=2))
    found = weights(WELL.format(right=1) + 'state s = level(0) of "other.sheet"', "s", 6, tmp_path)
    n = np.arange(1, 7)
    # <n|s> = 2 int sin(n pi x) sin(pi x/2) over (0, 1), the part inside having norm 1
    exact = (1 / np.pi * (np.sin((n - 0.5) * np.pi) / (n - 0.5) - np.sin((n + 0.5) * np.pi) / (n + 0.5))) ** 2
    assert_weights(found, exact)
    assert any("walls of the domain cut" in note for note in found.notes)


def test_state_from_a_table(tmp_path):
    """A packet written to a table (x, re, im) has Poisson weights to the accuracy of its spline (closed form)."""
    x = np.linspace(-8, 8, 401)
    wave = np.exp(-((x - 0.5) ** 2) / 2 + 0.7j * x)
    rows = [f"{a!r},{b.real!r},{b.imag!r}\n" for a, b in zip(x.tolist(), wave.tolist(), strict=True)]
    (tmp_path / "wave.csv").write_text("x,re,im\n" + "".join(rows))
    text = 'H = p^2/2 + x^2/2; x in (-8, 8)\nstate s = table("wave.csv", "x", "re", "im")'
    found = weights(text, "s", 8, tmp_path)
    size = (0.5**2 + 0.7**2) / 2
    for weight in found.weights:
        poisson = math.exp(-size) * size**weight.index / math.factorial(weight.index)
        assert weight.weight == pytest.approx(poisson, abs=1e-7)
    two = text.replace('"re", "im")', '"re") + i*table("wave.csv", "x", "im")')
    assert [w.weight for w in weights(two, "s", 8, tmp_path).weights] == pytest.approx([w.weight for w in found.weights])


SOLITON = "H = p^2/2 - 3/cosh(x)^2; x in (-inf, inf)\nstate s = exp(-x^2/2)*(1 + x)"
"""Bound levels -2 and -1/2, with 1/cosh(x)^2 and sinh(x)/cosh(x)^2 (closed form)."""


@pytest.mark.parametrize(
    ("count", "where"),
    [(1, "above the levels computed, or in the continuum"), (2, "in the continuum"), (5, "in the continuum")],
)
def test_where_the_rest_lies(count, where):
    """With some of the bound levels the rest may be above them; with all of them it is in the continuum, box levels or not."""
    found = weights(SOLITON, "s", count)
    told = [note for note in found.notes if "of the state lies" in note]
    assert len(told) == 1
    assert told[0].endswith(f"lies {where}")
    held = sum(weight.weight for weight in found.weights[: min(count, 2)])
    assert float(told[0].split()[0]) == pytest.approx(1 - held, rel=1e-2)
    assert any("box levels stand for" in note for note in found.notes) == (count == 5)
