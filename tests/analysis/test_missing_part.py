"""Errors of means and spreads of evolving states of which the levels computed hold only a part."""

import numpy as np
import pytest
from analysis_making import model, spectrum

from specterm.analysis.evolution import evolve

FEW = "d = 3; H = p^2/2 - d*exp(-x^2/2); x in (-inf, inf); state s = exp(-x^2 + 2*i*x)"
QUARTIC = "H = p^2/2 + x^4; x in (-inf, inf); state s = exp(-(x - 1.2)^2)"
TRAP = "H = p^2/2 + x^2/2; x in (-inf, inf); state c = exp(-(x - 1.3)^2/2 + 0.7*i*x)"
DONOR = "H = p^2/2 - 1/r; r in (0, inf); state s = r*exp(-r/2)*(1 + r)"
TIMES = [0.0, 0.4, 1.0, 3.0]


def assert_within(found, means, spreads):
    """Assert that known errors cover the distance from what is expected; nan stands for no bound."""
    known = np.isfinite(found.mean_error)
    assert np.all(np.abs(found.mean - means)[known] <= found.mean_error[known])
    known = np.isfinite(found.spread_error)
    assert np.all(np.abs(found.spread - spreads)[known] <= found.spread_error[known])


@pytest.mark.parametrize("observable", ["x", "p", "x^2", "p^2/2", "H", "x*p + p*x", "x > 0"])
@pytest.mark.parametrize("count", [5, 8])
def test_few_levels_against_many(observable, count):
    """A quartic trap on few levels: the errors cover the means and spreads found with 60 levels (recomputed here)."""
    here = model(QUARTIC)
    full = evolve(here, spectrum(QUARTIC, 60), "s", TIMES, observable)
    part = evolve(here, spectrum(QUARTIC, count), "s", TIMES, observable)
    assert 0.5 < part.captured < 0.99
    assert_within(part, full.mean, full.spread)


def test_place_of_a_state_held_in_part():
    """The mean place of a quartic trap at time 0 is 1.2 and its spread 1/2 (closed form); four levels miss both, and say so."""
    found = evolve(model(QUARTIC), spectrum(QUARTIC, 4), "s", [0.0])
    assert 0.1 < abs(found.mean[0] - 1.2) <= found.mean_error[0] < 2
    assert abs(found.spread[0] - 0.5) <= found.spread_error[0]


def test_part_in_the_continuum():
    """Bound levels hold 62.6 % of a packet: place 0 with spread 1/2, momentum 2 with spread 1 at time 0 (closed form)."""
    here, levels = model(FEW), spectrum(FEW, 3)
    for observable, mean, spread in (("x", 0.0, 0.5), ("p", 2.0, 1.0)):
        found = evolve(here, levels, "s", [0.0, 2.0], observable)
        assert abs(found.mean[0] - mean) <= found.mean_error[0]
        assert abs(found.spread[0] - spread) <= found.spread_error[0]
    # the energy is 5/2 - 3 sqrt(4/5) (Gauss integrals), and stays
    energy = evolve(here, levels, "s", [0.0, 7.0], "H")
    assert np.all(np.abs(energy.mean - (2.5 - 3 * np.sqrt(0.8))) <= energy.mean_error)


def test_all_of_a_state_held():
    """A displaced ground state on 60 levels: its place turns as in classical mechanics (closed form), errors are small."""
    found = evolve(model(TRAP), spectrum(TRAP, 60), "c", TIMES)
    turned = 1.3 * np.cos(TIMES) + 0.7 * np.sin(TIMES)
    assert_within(found, turned, np.sqrt(0.5))
    assert np.all(found.mean_error < 1e-8)
    assert np.all(found.spread_error < 1e-8)


def test_growth_of_what_has_no_other_bound():
    """Under a singular well the place of what escapes is bounded by how fast it moves; what nothing bounds has no error."""
    here, levels = model(DONOR), spectrum(DONOR, 20)
    # <r> = 174/38 at time 0 for r exp(-r/2)(1 + r): integrals n! of r^n exp(-r): (6 + 48 + 120)/(2 + 12 + 24)
    found = evolve(here, levels, "s", [0.0, 1.0], "r")
    assert abs(found.mean[0] - 174 / 38) <= found.mean_error[0]
    assert found.mean_error[1] > found.mean_error[0]
    assert np.isnan(evolve(here, levels, "s", [0.0, 1.0], "r^3").mean_error[1])
