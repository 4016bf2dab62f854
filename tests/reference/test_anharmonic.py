"""Anharmonic oscillators against the published tables and exact results of the field."""

import math

import pytest
from answers import agree, spectrum, step

QUARTIC = [  # Banerjee, Bhatnagar, Choudhry, Kanwal, Proc. R. Soc. A 360 (1978) 575; first three seen printed, all recomputed
    "1.0603620904841828996", "3.7996730298013941688", "7.4556979379867383922", "11.644745511378162021",
    "16.261826018850225938", "21.238372918235940024", "26.528471183682518192", "32.098597710968326634",
    "37.923001027033985147", "43.981158097289730785",
]  # fmt: skip
MIXED = {  # p^2 + x^2 + lam x^4, same paper's convention; recomputed with mpmath
    "0.1": ["1.065285509543718", "3.306872013152914", "5.747959268833563", "8.352677825785755"],
    "1": ["1.392351641530292", "4.648812704212078", "8.65504995775931", "13.15680389804988"],
    "10": ["2.449174072118387", "8.599003454807773"],
    "100": ["4.999417545137588", "17.83019271595252"],
}
GROUND = {  # (p^2 + x^2)/2 + lam x^4: Hioe, Montroll, J. Math. Phys. 16 (1975) 1945 (from memory); recomputed with mpmath
    ".01": "0.50725620", ".05": "0.53264275", ".1": "0.5591463271835", ".3": "0.63799178", ".5": "0.6961758207651",
    ".7": "0.74390350", "1": "0.8037706512342738", "2": "0.9515684727295", "50": "2.49970877", "200": "3.93093134",
    "1000": "6.69422085", "20000": "18.13722907",
}  # fmt: skip
BENDER_WU = [1 / 2, 3 / 4, -21 / 8, 333 / 16, -30885 / 128, 916731 / 256, -65518401 / 1024, 2723294673 / 2048,
             -1030495099053 / 32768]  # fmt: skip


def test_pure_quartic():
    """p^2 + x^4: the ten levels of Banerjee et al."""
    agree(spectrum("H = p^2 + x^4\nx in (-inf, inf)", 10), dict(enumerate(QUARTIC)))


def test_pure_quartic_in_other_scales():
    """p^2/2 + x^4 has 2^(-2/3), p^2/2 + x^4/4 has 2^(-4/3) times those levels (scaling; the latter as in arXiv:2007.04762)."""
    agree(spectrum("H = p^2/2 + x^4\nx in (-inf, inf)", 4), dict(enumerate(QUARTIC[:4])), 2 ** (-2 / 3))
    agree(spectrum("H = p^2/2 + x^4/4\nx in (-inf, inf)", 4), dict(enumerate(QUARTIC[:4])), 2 ** (-4 / 3))
    agree(spectrum("H = p^2/2 + x^4/4\nx in (-inf, inf)", 2), {0: "0.4208049744754478", 1: "1.5079012411604822"})


def test_pure_sextic():
    """p^2 + x^6, recomputed with mpmath."""
    printed = {0: "1.14480245380", 1: "4.33859871151", 2: "9.07308456092", 3: "14.9351696349"}
    agree(spectrum("H = p^2 + x^6\nx in (-inf, inf)", 4), printed)


@pytest.mark.parametrize("strength", MIXED)
def test_quartic_on_top_of_a_parabola(strength):
    """p^2 + x^2 + lam x^4, recomputed with mpmath."""
    agree(spectrum(f"lam = {strength}\nH = p^2 + x^2 + lam*x^4\nx in (-inf, inf)", 4), dict(enumerate(MIXED[strength])))


@pytest.mark.parametrize("strength", GROUND)
def test_ground_level_from_weak_to_strong_coupling(strength):
    """(p^2 + x^2)/2 + lam x^4 over six orders of magnitude of lam, recomputed with mpmath."""
    agree(spectrum(f"lam = {strength}\nH = (p^2 + x^2)/2 + lam*x^4\nx in (-inf, inf)", 4), {0: GROUND[strength]})


def test_excited_levels_of_the_mixed_oscillator():
    """(p^2 + x^2)/2 + lam x^4 at lam = 1 and 0.1: levels 1 to 3, recomputed with mpmath."""
    sheet = "lam = {}\nH = (p^2 + x^2)/2 + lam*x^4\nx in (-inf, inf)"
    agree(spectrum(sheet.format("1"), 4), {1: "2.737892268008434", 2: "5.179291687639391", 3: "7.942403984390965"})
    agree(spectrum(sheet.format(".1"), 4), {1: "1.769502643949054", 2: "3.13862430849812", 3: "4.628882808888142"})


@pytest.mark.parametrize("g", [1e-4, 5e-4, 2e-3])
def test_weak_coupling_series(g):
    """E0 of (p^2 + x^2)/2 + g x^4 lies between neighbouring partial sums of the alternating series of Bender and Wu (1969)."""
    level = spectrum(f"g = {g}\nH = (p^2 + x^2)/2 + g*x^4\nx in (-inf, inf)", 1).levels[0]
    terms = [a * g**n for n, a in enumerate(BENDER_WU)]
    rounding = 8 * math.ulp(0.5)
    assert abs(level.value - sum(terms)) <= abs(terms[-1]) + level.error + rounding


@pytest.mark.parametrize(
    ("k", "printed"), [(3, {0: "0."}), (5, {1: "0."}), (7, {}), (11, {0: "-8", 2: "0", 4: "8"})], ids=lambda v: str(v)[:2]
)
def test_quasi_exact_sextic(k, printed):
    """p^2 + x^6 - k x^2 has algebraic levels (Turbiner, Commun. Math. Phys. 118 (1988) 467, from memory)."""
    found = spectrum(f"k = {k}\nH = p^2 + x^6 - k*x^2\nx in (-inf, inf)", 5)
    exact = {index: float(text) for index, text in printed.items()} or {0: -2 * math.sqrt(2), 2: 2 * math.sqrt(2)}
    for index, value in exact.items():
        level = found.levels[index]
        assert level.kind == "bound"
        assert abs(level.value - value) <= level.error + 4 * math.ulp(value)


def test_pairs_closer_than_rounding():
    """p^2 + x^4 - 25 x^2: levels 0 and 1 equal to 16 digits, 2 and 3 to 13, and level 40 far above (recomputed with mpmath)."""
    found = spectrum("H = p^2 + x^4 - 25*x^2\nx in (-inf, inf)", 41)
    low, high = "-149.2194561421909", "-135.3245120118409"
    agree(found, {0: low, 1: low, 2: high, 3: high, 40: "75.6907248509"})
    assert [level.parity for level in found.levels[:4]] == ["even", "odd", "even", "odd"]
    assert step(found, 0, 1)[0] >= 0
