"""Test problems of the Sturm-Liouville literature: J. D. Pryce, Numerical Solution of Sturm-Liouville Problems (OUP 1993).

Problem texts and printed values as seen in a public copy of that list; every value used was recomputed (mpmath, two
discretisations), and those the recomputation contradicts are not used: level 9 of the mixed quartic is 46.965009506 and not
46.965069501; the levels of exp(x), 1/(x + 0.1)^2, Woods-Saxon l = 1 and the turning Morse were redone with Taylor steps
(mpmath). -u'' + q u = E u is p^2 + q with hbar = 1.
"""

import math

import pytest
from answers import agree, spectrum, within

COFFEY_EVANS = {
    20: {1: "77.916195677", 2: "151.462778346", 3: "151.46322365766", 4: "151.463668988", 5: "220.154229835"},
    30: {1: "117.946307662", 2: "231.664929237", 3: "231.66492931296", 4: "231.664929389", 5: "340.888299810"},
    50: {1: "197.968726517", 2: "391.808191489", 3: "391.808191489", 4: "391.808191489", 5: "581.377109232"},
}

REGULAR = {
    "exponential": ("exp(x)", "(0, pi)", "", {0: "4.896669379968", 1: "10.04518989326", 2: "16.01926725049",
                    3: "23.26627094002", 4: "32.26370704580", 5: "43.22001964053"}),
    "near pole": ("1/(x + 0.1)^2", "(0, pi)", "", {0: "1.51986582110", 1: "4.94330982214", 2: "10.28466264509",
                  3: "17.55995774641", 4: "26.78286315833", 5: "37.96442586193"}),
    "cosine": ("2*5*cos(2*x)", "(0, pi)", "", {0: "-5.79008060", 1: "2.09946045", 2: "9.23632771"}),
    "logarithm": ("ln(x)", "(0, 4)", "", {0: "1.1248168097", 24: "385.92821596"}),
    "many wells": ("5*cos(x)", "(0, 40)", "", {0: "-3.48423886935", 5: "-3.48413967", 6: "-0.599543551098", 11: "-0.5956015521",
                   12: "1.93291488963", 17: "1.9954588036"}),
    "mixed quartic": ("x^2 + x^4", "(-inf, inf)", "", {0: "1.3923516415", 9: "46.965009506"}),
    "half cubic": ("x^3", "(0, inf)", "", {0: "3.4505626899", 24: "228.52088139"}),
    "half quartic": ("x^4", "(0, inf)", "", {0: "3.7996730298", 24: "397.14132678"}),
    "half quintic": ("x^5", "(0, inf)", "", {0: "4.0891593149", 24: "588.17824969"}),
    "spiked Morse": ("1250*exp(-83.363*(x - 2.47826)^2) + 3906.25*(1 - exp(2.3237 - x))^2", "(-inf, inf)", "",
                     {0: "163.223887245", 1: "401.065254628", 2: "530.741275386", 9: "1277.53684063"}),
    "turning Morse": ("2/x^2 + 2000*(exp(-3.4*(x - 1.3)) - 2*exp(-1.7*(x - 1.3)))", "(0, inf)", "",
                      {0: "-1923.5296551", 1: "-1777.2908187", 13: "-473.29712549", 25: "-1.76701597"}),
    "Woods-Saxon, l = 0": ("-50/(1 + t)*(1 - 5*t/(3*(1 + t)))", "(0, inf)", "t = exp((x - 7)/0.6)",
                           {0: "-49.457788728", 10: "-18.094688282"}),
    "Woods-Saxon, l = 1": ("2/x^2 - 50/(1 + t)*(1 - 5*t/(3*(1 + t)))", "(0, inf)", "t = exp((x - 7)/0.6)",
                           {0: "-48.951731624", 10: "-15.812724871"}),
    "Woods-Saxon, l = 2": ("6/x^2 - 50/(1 + t)*(1 - 5*t/(3*(1 + t)))", "(0, inf)", "t = exp((x - 7)/0.6)",
                           {0: "-48.349481052", 10: "-13.522303353"}),
    "screened, l = 0": ("(-1 + 5*exp(-2*x))/x", "(0, inf)", "", {0: "-0.156358880971", 2: "-0.023484895664"}),
    "screened, l = 1": ("2/x^2 + (-1 + 5*exp(-2*x))/x", "(0, inf)", "", {0: "-0.061681846633", 2: "-0.015501561691"}),
    "Bessel 1/3": ("(1/9 - 1/4)/x^2", "(0, 1)", "", {0: "8.4250069295", 9: "970.7184494"}),
    "Bessel 2": ("(4 - 1/4)/x^2", "(0, 1)", "", {0: "26.374616427", 9: "1136.8036878"}),
    "Bessel 0": ("-1/(4*x^2)", "(0, 1)", "", {0: "5.78318596295", 19: "3850.01252885"}),
}  # fmt: skip

EXACT = {  # q, domain, number of levels held, level k in closed form; exact in the source and by insertion
    "Morse": ("9*(exp(-2*x) - 2*exp(-x))", "(-inf, inf)", 3, lambda k: -((2.5 - k) ** 2)),
    "sech, l = 4": ("-20*sech(x)^2", "(-inf, inf)", 4, lambda k: -((4 - k) ** 2)),
    "sech, l = 2.3": ("-2.3*3.3*sech(x)^2", "(-inf, inf)", 3, lambda k: -((2.3 - k) ** 2)),
    "hydrogen, l = 1": ("2/x^2 - 1/x", "(0, inf)", 8, lambda k: -1 / (2 * k + 4) ** 2),
    "hydrogen, l = 0": ("-1/x", "(0, inf)", 8, lambda k: -1 / (2 * k + 2) ** 2),
    "oscillator with a spike": ("x^2 + 3/(4*x^2)", "(0, inf)", 12, lambda k: 4.0 * (k + 1)),
}


@pytest.mark.parametrize("beta", COFFEY_EVANS)
def test_coffey_evans(beta):
    """Q = -2 b cos 2x + b^2 sin^2 2x: a zero level and a triplet (level 3 printed in the list, the others recomputed)."""
    found = spectrum(f"b = {beta}\nH = p^2 - 2*b*cos(2*x) + b^2*sin(2*x)^2\nx in (-pi/2, pi/2)", 6)
    agree(found, COFFEY_EVANS[beta])
    lowest = found.levels[0]  # 2e-16 at b = 20, less above: zero to all digits a double of this size has
    assert abs(lowest.value) <= lowest.error
    assert lowest.error < 1e-9


@pytest.mark.parametrize("name", REGULAR)
def test_problem(name):
    """Levels low and high as in the list or recomputed."""
    q, domain, more, printed = REGULAR[name]
    agree(spectrum(f"H = p^2 + {q}\n{more}\nx in {domain}", max(printed) + 1), printed)


@pytest.mark.parametrize("name", EXACT)
def test_exact_problem(name):
    """Levels known in closed form, to the reported error and the rounding of one evaluation."""
    q, domain, count, exact = EXACT[name]
    found = spectrum(f"H = p^2 + {q}\nx in {domain}", count)
    assert found.complete
    for level in found.levels:
        assert abs(level.value - exact(level.index)) <= level.error + 4 * math.ulp(exact(level.index))


def test_weighted_quartic():
    """-u'' + (x^4 + x^3/2 - 7x^2) u = (E/2) u: printed E0 and E5 are twice the levels of the unweighted operator."""
    found = spectrum("H = p^2 + x^4 + x^3/2 - 7*x^2\nx in (-inf, inf)", 6)
    for index, text in {0: "-24.5175977072", 5: "8.10470769427"}.items():
        within(2 * found.levels[index].value, text, 2 * found.levels[index].error)
