"""Measurements on states that lie in the continuum in part, and times of free evolution before each measurement."""

import math

import numpy as np
import pytest
from analysis_making import model, spectrum
from scipy import stats

from specterm.analysis.measurement import both_orders, course_of, measure, repeat
from specterm.analysis.once import after, drawn, fresh_wave, possible
from specterm.errors import SheetError

FEW = "d = 3; H = p^2/2 - d*exp(-x^2/2); x in (-inf, inf); state s = exp(-x^2 + 2*i*x)"
LINE = "H = p^2/2 + x^2/2; x in (-inf, inf); state c = exp(-(x - 1.3)^2/2 + 0.7*i*x)"


def course(text, state, observables, count=16, **options):
    """Return a sequence of measurements."""
    return course_of(model(text), spectrum(text, count), state, observables, **options)


def chi_square(joints, runs):
    """Return chi-square over cells of at least 5 expected, the others as one, and its quantile at 0.999 (scipy)."""
    cells = [joint for joint in joints if runs * joint.probability >= 5]
    counts = np.array([joint.count for joint in cells])
    expected = runs * np.array([joint.probability for joint in cells])
    total = float(((counts - expected) ** 2 / expected).sum())
    left = runs - float(expected.sum())
    if left > 5:
        total += (runs - counts.sum() - left) ** 2 / left
    return total, stats.chi2.ppf(0.999, len(cells) - 1 + (left > 5))


@pytest.mark.parametrize("observables", [["H"], ["H", "H"], ["x > 0", "H"], ["H", "x > 0", "H"]])
def test_counts_agree_where_part_is_unbound(observables):
    """Counts of 20,000 runs pass the chi-square test, results beyond the bound levels being results of their own."""
    joints = repeat(course(FEW, "s", observables), 20_000, 3)
    assert sum(joint.count for joint in joints) == 20_000
    assert any(math.isnan(joint.values[-1]) for joint in joints)
    assert all(len(joint.values) == len(observables) for joint in joints)
    found, allowed = chi_square(joints, 20_000)
    assert found < allowed


def test_share_beyond_is_drawn_with_its_probability():
    """Of 4,000 single runs the share in the continuum falls beyond (binomial, 4 sigma), and the run ends there."""
    here = course(FEW, "s", ["H", "x > 0"])
    rest = measure(here, "s", 0).steps[0].rest
    assert 0.3 < rest < 0.4
    records = [measure(here, "s", seed) for seed in range(4_000)]
    lost = [record for record in records if record.steps[0].beyond]
    assert abs(len(lost) - 4_000 * rest) < 4 * math.sqrt(4_000 * rest * (1 - rest))
    assert all(len(record.steps) == 1 and record.steps[0].drawn is None for record in lost)
    assert any("cannot be told" in note for note in lost[0].notes)
    assert measure(here, "s", lost[0].seed) == lost[0]


def test_one_at_a_time_ends_beyond():
    """A single draw above what the outcomes cover takes none of them, and there is no state after it."""
    here, levels = model(FEW), spectrum(FEW, 16)
    wave = fresh_wave(here, levels, "s")
    meter, step = possible(here, levels, wave, "H")
    assert drawn(step, 0.0).drawn == 0
    assert drawn(step, (1 - step.rest) * (1 - 1e-9)).drawn == len(step.outcomes) - 1
    lost = drawn(step, 1 - step.rest + 1e-9)
    assert lost.drawn is None
    assert lost.beyond
    with pytest.raises(SheetError, match="not known"):
        after(meter, wave, lost)


def test_what_evolution_loses_is_missing_afterwards():
    """Carried by bound levels only, a state misses the share they do not hold in every later measurement."""
    held = course(FEW, "s", ["H"]).outcomes(())
    later = course(FEW, "s", ["x"], after=[1.0]).outcomes(())
    assert sum(o.probability for o in later) == pytest.approx(sum(o.probability for o in held), abs=1e-6)


def test_a_time_before_each_measurement():
    """A quarter of a period before the first measurement turns momentum into place (closed form), and times add up."""
    for outcome in course(LINE, "c", ["x"], after=[math.pi / 2]).outcomes(()):
        expected = (math.erf(outcome.high - 0.7) - math.erf(outcome.low - 0.7)) / 2
        assert outcome.probability == pytest.approx(expected, abs=1e-8)
    split = course(LINE, "c", ["x > 1000", "x"], after=[0.5, math.pi / 2 - 0.5], width=0.2)
    for outcome in split.outcomes((0,)):
        expected = (math.erf(outcome.high - 0.7) - math.erf(outcome.low - 0.7)) / 2
        assert outcome.probability == pytest.approx(expected, abs=1e-8)


def test_one_time_is_between_all():
    """A single time is that between measurements; a wrong number of times is refused."""
    single = course(LINE, "c", ["x > 1", "x > 1", "x > 1"], after=0.3)
    several = course(LINE, "c", ["x > 1", "x > 1", "x > 1"], after=[0, 0.3, 0.3])
    assert single.outcomes((1, 0)) == several.outcomes((1, 0))
    with pytest.raises(SheetError, match="2 times are given for 3"):
        course(LINE, "c", ["x", "x", "x"], after=[0, 1])


def test_both_orders_after_a_wait():
    """Half a period mirrors a state in place and momentum (closed form): both orders differ as in the mirrored state."""
    mirrored = "H = p^2/2 + x^2/2; x in (-inf, inf); state c = exp(-(x + 1.3)^2/2 - 0.7*i*x)"
    waited = both_orders(course(LINE, "c", ["x > 0", "H"], after=[math.pi, 0.0]))
    plain = both_orders(course(mirrored, "c", ["x > 0", "H"]))
    assert waited.distance == pytest.approx(plain.distance, abs=1e-5)
