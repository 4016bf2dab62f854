"""Smallest gaps: places and sizes against closed forms and independent solutions, crossings told from avoided ones."""

import numpy as np
import pytest
from scipy.special import mathieu_a, mathieu_b
from sweep_making import RING, request

from specterm.analysis.sweep import sweep


def assert_gap(gap, at, size, digits=1e-6, rounding=1e-15):
    """Assert place and size of a gap, to `digits` and within the errors claimed; `rounding` is that of the size expected."""
    assert gap.at == pytest.approx(at, abs=digits)
    assert gap.gap == pytest.approx(size, rel=digits)
    assert abs(gap.at - at) <= gap.at_error
    assert abs(gap.gap - size) <= gap.gap_error + rounding


def splitting(points=160, half=5.0):
    """Return the lowest splitting of p^2 + (x^2 - 4)^2/2 from a sinc basis (Colbert and Miller; recomputed here)."""
    x = np.linspace(-half, half, points)
    step = x[1] - x[0]
    k = np.arange(points)
    with np.errstate(divide="ignore"):
        matrix = 2.0 * (-1.0) ** (k[:, None] - k) / (k[:, None] - k) ** 2
    np.fill_diagonal(matrix, np.pi**2 / 3)
    values = np.linalg.eigvalsh(matrix / step**2 + np.diag((x**2 - 4) ** 2 / 2))
    return values[1] - values[0]


def test_double_well_under_bias():
    """The smallest gap of a biased double well is the tunnelling splitting, where the bias makes it symmetric (two levels)."""
    found = sweep(request("H = p^2 + (x^2-4)^2/2 + (F - 0.137)*x; F = 0; x in (-inf, inf)", "F=-0.4:0.5:24", count=2))
    assert len(found.gaps) == 1
    assert_gap(found.gaps[0], 0.137, splitting(), 1e-9, rounding=1e-12)
    assert not found.gaps[0].crossing


def test_narrow_gap_between_points():
    """A gap a thousand times narrower than a step is found from its far wings, and branches go straight through it."""
    text = "H = p^2 + 4*(x^2-4)^2 + (F - 0.137)*x; F = 0; x in (-inf, inf)"
    found = sweep(request(text, "F=-0.4:0.5:10", count=2))
    (gap,) = found.gaps
    assert gap.at == pytest.approx(0.137, abs=1e-9)
    assert 0 < gap.gap < 1e-4
    assert not gap.crossing
    assert found.branches[0].tolist() == [0, 1]
    assert found.branches[-1].tolist() == [1, 0]


def test_circuit_phase_against_offset_charge():
    """Levels of a junction island come closest at half a pair: Mathieu's a_1 - b_1 (field 9 of the check values; scipy)."""
    text = "H = 4*(-i*D - ng)^2 - cos(phi); ng = 0.2; phi in ring(-pi, pi)"
    found = sweep(request(text, "ng=0.21:0.93:13", count=3))
    q = 0.5
    closest = [gap for gap in found.gaps if gap.pair == (0, 1)]
    assert len(closest) == 1
    assert_gap(closest[0], 0.5, abs(mathieu_a(1, q) - mathieu_b(1, q)))
    assert closest[0].gap == pytest.approx(0.996112, abs=5e-7)
    assert not closest[0].crossing


def test_crossings_on_a_ring():
    """Free waves on a ring cross at phases 0 and 1/2 (closed form): zero gaps, told as crossings."""
    found = sweep(request(RING, "phi=-0.23:0.71:17", count=4))
    places = {gap.pair: gap for gap in found.gaps}
    for pair, at in (((0, 1), 0.5), ((1, 2), 0.0), ((2, 3), 0.5)):
        assert places[pair].crossing
        assert abs(places[pair].at - at) <= max(places[pair].at_error, 1e-12)
        assert places[pair].gap <= 2 * places[pair].gap_error


def test_a_notch_makes_the_crossing_avoided():
    """A weak cosine on the ring opens the crossing at phase 1/2 to its amplitude (first order; Mathieu's a_1 - b_1 exactly)."""
    found = sweep(request("H = p^2 + 0.002*cos(x); phi = 0; x in ring(0, 2*pi), phase phi", "phi=0.3:0.71:11", count=2))
    (gap,) = found.gaps
    q = 4 * 0.002 / 2
    assert_gap(gap, 0.5, abs(mathieu_a(1, q) - mathieu_b(1, q)) / 4)
    assert not gap.crossing


def test_levels_that_only_drift_have_no_smallest_gap():
    """Evenly spaced levels, and gaps that only grow, give none."""
    assert not sweep(request("H = p^2/2 + w^2*x^2/2; w = 1; x in (-inf, inf)", "w=1:2:9", count=4)).gaps
    assert not sweep(request("H = p^2/2 + x^2/2 + c; c = 1; x in (-inf, inf)", "c=1:2:9", count=4)).gaps


def test_gaps_beyond_double_precision_are_no_crossings():
    """Two wells far apart: their splitting is lost in rounding, but levels between walls never cross, and a note says so."""
    text = "H = p^2 + 400*(x^2-9)^2 + F*x; F = 0; x in (-inf, inf)"
    found = sweep(request(text, "F=-1:1.1:8", count=2))
    (gap,) = found.gaps
    assert not gap.crossing
    assert any("never cross" in note for note in found.notes)


def test_narrow_gaps_on_a_ring_are_not_resolved():
    """A cosine opens every crossing at phase 1/2; the gap of levels 6 and 7 is lost in rounding, and is called neither."""
    found = sweep(request("H = p^2 + 0.1*cos(x); phi = 0; x in ring(0, 2*pi), phase phi", "phi=0.4:0.63:4", count=8))
    told = {gap.pair: gap.crossing for gap in found.gaps}
    assert told == {(0, 1): False, (2, 3): False, (4, 5): False, (6, 7): None}
    assert any("cross, or nearly so" in note for note in found.notes)


def test_parity_tells_true_crossings():
    """Even and odd levels of cos(x) and cos(2x) on a ring cross at b = -1/2 (Whittaker and Hill's equation, from memory)."""
    text = "H = p^2 + cos(x) + b*cos(2*x){}; b = 0; x in ring(-pi, pi)"
    found = sweep(request(text.format(""), "b=-0.9:0:4", count=3))
    (gap,) = found.gaps
    assert gap.pair == (1, 2)
    assert gap.at == pytest.approx(-0.5, abs=1e-10)
    assert gap.crossing is True
    (broken,) = sweep(request(text.format(" + 1e-3*sin(x)"), "b=-0.9:0:4", count=3)).gaps
    assert broken.gap > 1e-5
    assert broken.crossing is False


def test_pairs_that_are_degenerate_all_along_have_no_smallest_gap():
    """With threefold symmetry on a ring levels come in pairs at any height: rounding between them is no gap (symmetry)."""
    found = sweep(request("H = p^2 + V3*cos(3*x); V3 = 4; x in ring(0, 2*pi)", "V3=3.6:4.4:9", count=6))
    assert [gap for gap in found.gaps if gap.gap < 1e-6] == []
