"""Means of operators above order two against closed forms."""

import math

import pytest
from analysis_making import model

from specterm.analysis import solve
from specterm.analysis.high_order import mean_of
from specterm.errors import PhysicsError


@pytest.mark.parametrize("n", [0, 1, 2, 5])
def test_fourth_power_of_the_momentum_in_an_oscillator(n):
    """<p^4> = 3 (2 n^2 + 2 n + 1)/4 in units of the oscillator (closed form); no error and no spread are claimed."""
    trap = model("H = p^2/2 + x^2/2; x in (-inf, inf)")
    found = mean_of(trap, solve(trap, count=6), "p^4", f"level({n})")
    assert found.mean == pytest.approx(3 * (2 * n * n + 2 * n + 1) / 4, rel=1e-8)
    assert found.error is None
    assert math.isnan(found.spread)


def test_a_prepared_state_on_a_ring():
    """A plane wave k = 2 has (k^2 - 1)^2 = 9 for the mean of an operator of fourth order on a ring (closed form)."""
    ring = model("H = (p^2 - 1)^2; x in ring(0, 2*pi); state s = exp(2*i*x)")
    assert mean_of(ring, solve(ring, count=5), "H", "s").mean == pytest.approx(9.0, rel=1e-9)


def test_its_own_level_is_known_with_its_error():
    """In one of its own levels the mean is the level, its spread 0."""
    ring = model("H = (p^2 - 1)^2 + 0.3*cos(x); x in ring(0, 2*pi)")
    spectrum = solve(ring, count=5)
    found = mean_of(ring, spectrum, "H", "level(2)")
    assert (found.mean, found.error, found.spread) == (spectrum.levels[2].value, spectrum.levels[2].error, 0.0)


def test_what_is_out_of_reach_is_refused():
    """Order six, and what is not Hermitian, are refused in words."""
    trap = model("H = p^2/2 + x^2/2; x in (-inf, inf)")
    spectrum = solve(trap, count=2)
    with pytest.raises(PhysicsError, match="order 6"):
        mean_of(trap, spectrum, "p^6")
    with pytest.raises(PhysicsError, match="not an observable"):
        mean_of(trap, spectrum, "x*p^3")
