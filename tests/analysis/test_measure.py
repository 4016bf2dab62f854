"""Measurements: probabilities by closed forms, Lueders' rule, draws and their statistics."""

import math

import numpy as np
import pytest
from analysis_making import model, spectrum
from scipy import stats

from specterm.analysis.measurement import both_orders, course_of, measure, repeat
from specterm.errors import PhysicsError, SheetError

WALLS = "H = p^2/2\nx in (0, 1)\nT = p^2\nleft = x < 1/2\nstate s = level(0) + i*level(1)"
LINE = "H = p^2/2 + x^2/2\nx in (-inf, inf)\nstate c = exp(-(x - 1.3)^2/2 + 0.7*i*x)"
RING = "H = p^2/2\nx in ring(0, 2*pi)\nstate s = cos(3*x) + 0.5"
CHI_1_PER_MILLE = {19: 43.82}
"""Quantiles of chi-square at 0.999 by degrees of freedom (common tables)."""


def course(text, state, observables, count=16, **options):
    """Return a sequence of measurements."""
    return course_of(model(text), spectrum(text, count), state, observables, **options)


def between_walls(a, b):
    """Return the probability to find the ground state between walls in (a, b): b - a - (sin 2 pi b - sin 2 pi a)/(2 pi)."""
    return b - a - (math.sin(2 * math.pi * b) - math.sin(2 * math.pi * a)) / (2 * math.pi)


def overlap(n, a, b):
    """Return the integral of 2 sin(pi x) sin(n pi x) over (a, b) (closed form)."""

    def stem(x):
        if n == 1:
            return x - math.sin(2 * math.pi * x) / (2 * math.pi)
        return math.sin((n - 1) * math.pi * x) / ((n - 1) * math.pi) - math.sin((n + 1) * math.pi * x) / ((n + 1) * math.pi)

    return stem(b) - stem(a)


def test_place_in_bins():
    """The ground state between walls in bins of 1/20 (closed form)."""
    outcomes = course(WALLS, "level(0)", ["x"], width=0.05).outcomes(())
    assert len(outcomes) == 20
    for outcome in outcomes:
        assert outcome.probability == pytest.approx(between_walls(outcome.low, outcome.high), abs=1e-12)


def test_energy_after_place():
    """After the place was found in (a, b) the level n has |2 int sin sin|^2 over the probability (closed form)."""
    here = course(WALLS, "level(0)", ["x", "H"], width=0.05)
    place = 7
    first = here.outcomes(())[place]
    for outcome in here.outcomes((place,))[:40]:
        n = outcome.levels[0] + 1
        expected = overlap(n, first.low, first.high) ** 2 / between_walls(first.low, first.high)
        assert outcome.probability == pytest.approx(expected, abs=1e-10)


def test_place_then_energy_is_not_energy_then_place():
    """From the ground state: energy first leaves the place as it was; place first brings in all levels (closed form)."""
    orders = both_orders(course(WALLS, "level(0)", ["x", "H"], width=0.05))
    ground = next(column for column, outcome in enumerate(orders.second) if outcome.levels == (0,))
    for row, outcome in enumerate(orders.first):
        assert orders.backward[row, ground] == pytest.approx(between_walls(outcome.low, outcome.high), abs=1e-10)
        assert orders.forward[row, ground] == pytest.approx(between_walls(outcome.low, outcome.high) ** 2, abs=1e-10)
    kept = sum(between_walls(o.low, o.high) ** 2 for o in orders.first)
    assert orders.distance == pytest.approx(1 - kept, abs=1e-9)
    assert orders.missing == pytest.approx((1 - orders.forward.sum(), 0), abs=1e-9)


@pytest.mark.parametrize("observable", ["H", "x", "left", "T"])
def test_measured_twice_gives_the_same(observable):
    """The second measurement of the same thing gives the first value with probability 1, whichever came."""
    here = course(WALLS, "s", [observable, observable])
    for place, first in enumerate(here.outcomes(())):
        again = here.outcomes((place,))
        assert len(again) == 1
        assert again[0].value == first.value
        assert again[0].probability == pytest.approx(1, abs=1e-10)


def test_observables_that_commute():
    """H and T = 2 H do not mind the order."""
    orders = both_orders(course(WALLS, "s", ["T", "H"]))
    assert orders.distance < 1e-10
    assert np.allclose(np.diag(orders.forward), 0.5, atol=1e-10)


def test_degenerate_levels_collapse_together():
    """On a ring the levels m = 3 and -3 are one outcome, and cos 3x survives it whole: p is then +3 or -3 (Lueders' rule)."""
    here = course(RING, "s", ["H", "p"])
    outcomes = here.outcomes(())
    # |cos 3x|^2 integrates to pi, 0.25 to pi/2: weights 2/3 and 1/3
    assert [round(o.value, 9) for o in outcomes] == [0.0, 4.5]
    assert outcomes[1].probability == pytest.approx(2 / 3, abs=1e-10)
    assert len(outcomes[1].levels) == 2
    after = here.outcomes((1,))
    assert [round(o.value, 9) for o in after] == [-3.0, 3.0]
    assert [o.probability for o in after] == pytest.approx([0.5, 0.5], abs=1e-9)


def test_momentum_in_bins():
    """A displaced ground state has a Gauss distribution of momentum around 0.7 of variance 1/2 (closed form)."""
    for outcome in course(LINE, "c", ["p"]).outcomes(()):
        low, high = ((edge - 0.7) for edge in (outcome.low, outcome.high))
        expected = (math.erf(high) - math.erf(low)) / 2
        assert outcome.probability == pytest.approx(expected, abs=1e-9)


def test_momentum_after_half_a_turn():
    """A quarter of a period turns place into momentum: x after pi/2 is distributed as p was (closed form)."""
    here = course(LINE, "c", ["H", "x"], after=0.0)
    assert sum(o.probability for o in here.outcomes(())) == pytest.approx(1, abs=1e-9)
    late = course(LINE, "c", ["x > 1000", "x"], after=math.pi / 2)
    for outcome in late.outcomes((0,)):
        expected = (math.erf(outcome.high - 0.7) - math.erf(outcome.low - 0.7)) / 2
        assert outcome.probability == pytest.approx(expected, abs=1e-8)


def test_few_values_are_outcomes():
    """A function that is 1 or 0 has those as outcomes, with the probability of the half (closed form 1/2)."""
    outcomes = course(WALLS, "level(2)", ["left"]).outcomes(())
    assert [(o.value, round(o.probability, 10)) for o in outcomes] == [(0.0, 0.5), (1.0, 0.5)]


def test_the_same_seed_gives_the_same_record():
    """Records and counts are equal for equal seeds and differ for some others."""
    here = course(WALLS, "level(0)", ["x", "H"])
    assert measure(here, "level(0)", 5) == measure(here, "level(0)", 5)
    assert repeat(here, 500, 5) == repeat(here, 500, 5)
    drawn = {measure(here, "level(0)", seed).steps[0].drawn for seed in range(12)}
    assert len(drawn) > 1


def test_an_outcome_can_be_chosen():
    """The outcome nearest to the value chosen is taken; what is left open is drawn."""
    here = course(WALLS, "s", ["H", "x"])
    record = measure(here, "s", 1, [20.0, None])
    assert record.steps[0].outcomes[record.steps[0].drawn].levels == (1,)
    with pytest.raises(SheetError, match="chosen"):
        measure(here, "s", 1, [1, 2, 3])


def test_ten_thousand_runs():
    """10,000 seeded runs agree with the probabilities: chi-square below its 0.999 quantile, cells of at least 5 expected."""
    here = course(WALLS, "level(0)", ["x"], width=0.05)
    joints = repeat(here, 10_000, 2)
    assert sum(joint.count for joint in joints) == 10_000
    chi = sum((joint.count - 10_000 * joint.probability) ** 2 / (10_000 * joint.probability) for joint in joints)
    assert len(joints) == 20
    assert chi < CHI_1_PER_MILLE[19]


def test_ten_thousand_runs_of_two_measurements():
    """Energy, then place in bins, 10,000 times: chi-square over the cells of at least 5 expected, the rest as one, at 0.999."""
    here = course(WALLS, "s", ["H", "x"], width=0.1)
    joints = repeat(here, 10_000, 7)
    cells = [joint for joint in joints if 10_000 * joint.probability >= 5]
    counts = np.array([joint.count for joint in cells])
    shares = 10_000 * np.array([joint.probability for joint in cells])
    chi = float(((counts - shares) ** 2 / shares).sum())
    rest = 10_000 - float(shares.sum())
    if rest > 5:
        chi += (10_000 - counts.sum() - rest) ** 2 / rest
    assert len(cells) > 15
    assert chi < stats.chi2.ppf(0.999, len(cells) - 1 + (rest > 5))


def test_single_draws_follow_the_probabilities():
    """Ten thousand single runs, one seed each, pass the same test for two halves of the well (binomial, 4 sigma)."""
    here = course(WALLS, "level(0)", ["left"])
    ones = sum(measure(here, "level(0)", seed).steps[0].drawn for seed in range(10_000))
    assert abs(ones - 5000) < 4 * 50


def test_what_cannot_be_measured_is_refused():
    """P between walls is not self-adjoint, x*p not Hermitian, and a first-order operator on a line has no levels."""
    with pytest.raises(PhysicsError, match="self-adjoint"):
        course(WALLS, "s", ["p"])
    with pytest.raises(PhysicsError, match="Hermitian"):
        course(WALLS, "s", ["x*p"])
    with pytest.raises(PhysicsError, match="continuous"):
        course(LINE, "c", ["x*p + p*x"])


def test_what_is_not_covered_is_told():
    """A sharp cut in place needs more levels than are computed: the record says how much is missing."""
    record = measure(course(WALLS, "level(0)", ["x", "H"]), "level(0)", 3)
    rest = record.steps[1].rest
    assert 1e-4 < rest < 0.1
    assert any("lies beyond" in note for note in record.notes)


@pytest.mark.parametrize("observable", ["log(x)", "1e308*x", "1e200*x"])
def test_observables_without_finite_values_are_refused(observable):
    """A logarithm on the whole line, or values beyond double precision, cannot be sorted into bins."""
    with pytest.raises(PhysicsError, match="not finite"):
        course(LINE, "c", [observable])
