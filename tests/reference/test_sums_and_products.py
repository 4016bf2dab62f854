"""Sum rules, spreads beside their lower bounds, and a rate of emission: check-values fields 13 and 14."""

import math

import pytest
from answers import ready, spectrum, within

from specterm.analysis.expectation import expectation
from specterm.analysis.transitions import into_other, transitions
from specterm.analysis.uncertainty import pair_of

WALLS = "H = p^2/2\nx in (0, 1)"
OSCILLATOR = "H = p^2/2 + x^2/2\nx in (-inf, inf)"
HYDROGEN = "H = p^2/2 + l*(l + 1)/(2*r^2) - 1/r\nl = {l}\nr in (0, inf)"
ATOM = (
    "units: energy eV, length nm, mass m_e\nmu = m_e*m_p/(m_e + m_p)\nl = {l}\n"
    "H = p^2/(2*mu) + l*(l + 1)*hbar^2/(2*mu*r^2) - e^2/(4*pi*eps_0*r)\nr in (0, inf)"
)


@pytest.mark.parametrize(("n", "printed"), [(1, "0.567862"), (2, "1.670290"), (3, "2.627204")])
def test_products_of_spreads_between_walls(n, printed):
    """The product is sqrt(n^2 pi^2/3 - 2)/2 (closed form; field 14, the third one there wrong in its last digit), above 1/2."""
    found = pair_of(ready(WALLS), spectrum(WALLS, 6), ("x", "p"), f"level({n - 1})")
    within(found.product, printed)
    assert found.product == pytest.approx(math.sqrt(n * n * math.pi**2 / 3 - 2) / 2, rel=1e-9)
    assert abs(found.bound - 0.5) <= found.bound_error < 1e-9
    assert found.product >= found.bound


@pytest.mark.parametrize("n", [0, 1, 4])
def test_products_of_spreads_in_an_oscillator(n):
    """The product is n + 1/2 (closed form): at the bound in the lowest level."""
    found = pair_of(ready(OSCILLATOR), spectrum(OSCILLATOR, 8), ("x", "p"), f"level({n})")
    assert found.product == pytest.approx(n + 0.5, rel=1e-10)


def test_strengths_from_the_second_level_of_a_well_sum_to_one():
    """From level 2 between walls: -0.96067493, 1.8675521, 0.070020038, ... with sum 1 (field 14; Thomas, Reiche and Kuhn)."""
    found = transitions(ready(WALLS), spectrum(WALLS, 60), (1,))
    by_end = {line.to: line.strength for line in found.lines}
    for end, printed in ((0, "-0.96067493"), (2, "1.8675521"), (4, "0.070020038")):
        within(by_end[end], printed)
    rest = sum(64 * 4 * n * n / (math.pi**2 * (n * n - 4.0) ** 3) for n in range(61, 4000, 2))
    assert found.sums[1] + rest == pytest.approx(1, abs=1e-9)


def test_discrete_share_of_the_lyman_strengths():
    """The strengths 1s-np sum to 0.565004150675 (field 13); those above n = 24 by their closed form are added."""
    lower, upper = HYDROGEN.format(l=0), HYDROGEN.format(l=1)
    found = into_other(ready(lower), spectrum(lower, 3), spectrum(upper, 23), (0,), "r")

    def strength(n):
        ratio = (2 * n - 4) * math.log((n - 1) / n) - (2 * n + 4) * math.log((n + 1) / n)
        return 2**8 / 3 * math.exp(ratio) / n**3

    total = sum(line.strength for line in found.lines) / 3
    assert total == pytest.approx(sum(strength(n) for n in range(2, 25)), rel=1e-8)
    beyond = sum(strength(n) for n in range(25, 100_000))
    assert total + beyond == pytest.approx(0.565004150675, abs=2e-9)


def test_rate_of_lyman_alpha():
    """A(2p-1s) = 6.26490e8 /s (field 13, recomputed there): a third of the radial rate, as an s state has l = 0."""
    lower, upper = ATOM.format(l=0), ATOM.format(l=1)
    found = into_other(ready(lower), spectrum(lower, 3), spectrum(upper, 3), (0,), "r")
    line = {line.to: line for line in found.lines}[0]
    assert line.einstein / 3 == pytest.approx(6.26490e8, rel=1e-5)


@pytest.mark.parametrize(("n", "l"), [(1, 0), (2, 0), (3, 0), (2, 1), (4, 1)])
def test_means_in_hydrogen(n, l):  # noqa: E741 - the quantum number's own name
    """<r> = (3 n^2 - l(l + 1))/2, <1/r> = 1/n^2, <r^2> = n^2 (5 n^2 + 1 - 3 l(l + 1))/2 (Bethe and Salpeter 1957)."""
    text, row = HYDROGEN.format(l=l), n - l - 1
    closed = {"r": (3 * n * n - l * (l + 1)) / 2, "1/r": 1 / n**2, "r^2": n * n * (5 * n * n + 1 - 3 * l * (l + 1)) / 2}
    for observable, expected in closed.items():
        found = expectation(ready(text), spectrum(text, 6), observable, f"level({row})")
        assert abs(found.mean - expected) <= found.error
        assert found.error < 1e-7 * max(1, expected)
