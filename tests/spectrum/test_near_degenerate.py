"""Levels close together: states orthonormal, values within their errors, on intervals and rings."""

import itertools

import numpy as np
import pytest
from spectrum_making import gram, model, spectrum, within

from specterm.spectrum import solve


def assert_orthonormal(found):
    """Assert norms of 1 to rounding, and overlaps no larger than what the states claim to be off."""
    overlaps = gram(found)
    np.testing.assert_allclose(np.diag(overlaps), 1, rtol=1e-12)
    claimed = found.vector_error[:, None] + found.vector_error[None, :] + 1e-12
    off = np.abs(overlaps - np.diag(np.diag(overlaps)))
    assert (off <= claimed).all(), f"overlap {off.max():.1e}, claimed {claimed.flat[off.argmax()]:.1e}"
    assert off.max() < 1e-5


DOUBLE = "H = p^2 + 8*(x^2 - {a}^2)^2/{a}^2; x in (-inf, inf)"
FREE_RING = "H = p^2; x in ring(0, 2*pi)"


@pytest.mark.parametrize("a", [1.0, 1.6, 2.0, 2.4, 2.8, 3.4])
def test_double_well(a):
    """States of a double well are orthonormal however small the splitting, and of alternating parity."""
    found = spectrum(DOUBLE.format(a=a), 6)
    assert_orthonormal(found)
    assert [level.parity for level in found.levels] == ["even", "odd"] * 3
    assert found.complete
    splitting = found.levels[1].value - found.levels[0].value
    assert splitting >= -(found.levels[0].error + found.levels[1].error)


def test_splitting_falls_exponentially():
    """The splitting falls steadily from 0.1 to below rounding as the wells part (tunnelling, recomputed here by ratios)."""
    gaps = [np.diff([level.value for level in spectrum(DOUBLE.format(a=a), 6).levels[:2]])[0] for a in (1.0, 1.6, 2.0, 2.4)]
    assert gaps[0] > 1e-2
    assert all(b < 0.2 * a for a, b in itertools.pairwise(gaps))


def test_many_wells():
    """Eight equal wells behind high barriers: a cluster of eight levels, then another, all states orthonormal."""
    found = spectrum("H = p^2 + 400*cos(4*x)^2; x in (0, 2*pi)", 16)
    assert_orthonormal(found)
    values = np.array([level.value for level in found.levels])
    assert found.complete
    assert values[7] - values[1] < 0.1 * (values[9] - values[7])


def test_free_ring_pairs():
    """On a free ring of length 2 pi the levels are 0, 1, 1, 4, 4, ... and their states orthonormal."""
    found = spectrum(FREE_RING, 9)
    within(found, [0, 1, 1, 4, 4, 9, 9, 16, 16], rounding=1e-14)
    assert_orthonormal(found)


@pytest.mark.parametrize(
    "phase",
    [0.5, 0.25, 1e-3, 1e-9, -0.3],
)
def test_ring_with_phase(phase):
    """With phase q the levels of a free ring are (n + q)^2, in near pairs for small q (closed form, recomputed here)."""
    found = spectrum(f"H = p^2; x in ring(0, 2*pi), phase {phase}", 7)
    within(found, np.sort((np.arange(-8, 9) + phase) ** 2)[:7], rounding=1e-14)
    assert_orthonormal(found)


@pytest.mark.parametrize("count", [1, 2, 3, 4, 6, 8])
def test_cut_through_a_pair(count):
    """Asking for part of a degenerate pair returns as many levels as asked for, the same as with more."""
    found, more = solve(model(FREE_RING), count=count), spectrum(FREE_RING, 9)
    assert [level.index for level in found.levels] == list(range(count))
    within(found, [level.value for level in more.levels[:count]], rounding=1e-13)


def test_deep_lattice_band():
    """The lowest band of a deep lattice is flat to 1e-12 over the phase, and every phase's states are orthonormal."""
    lowest = []
    for phase in (0.0, 0.1, 0.35, 0.5):
        found = spectrum(f"H = p^2 + 3000*sin(x)^2; x in ring(0, pi), phase {phase}", 4)
        assert_orthonormal(found)
        lowest.append((found.levels[0].value, found.levels[0].error))
    assert all(abs(value - lowest[0][0]) <= error + lowest[0][1] + 1e-12 for value, error in lowest)
    assert {level.kind for level in spectrum("H = p^2 + 3000*sin(x)^2; x in ring(0, pi), phase 0.1", 4).levels} == {"band"}


@pytest.mark.parametrize("count", [1, 3, 5])
def test_a_partner_that_was_not_asked_for(count):
    """The last state computed says that it may be mixed with its partner just above, which was not (closed wells, a = 3.4)."""
    found = spectrum(DOUBLE.format(a=3.4), count)
    assert found.vector_error[-1] == 1


def test_a_free_neighbour_above_does_not_blur_the_last_state():
    """Where the next level is far, the last state is as well known as the same one among more levels, within a factor of 4."""
    few, many = spectrum("H = p^2 + x^2; x in (-inf, inf)", 3), spectrum("H = p^2 + x^2; x in (-inf, inf)", 4)
    assert few.vector_error[2] < 1e-7
    assert many.vector_error[2] < 1e-7


def test_many_levels_of_a_ring():
    """A free ring of 60 vertices and more, solved with sparse matrices: (n + f)^2 with a Bloch phase f (closed form)."""
    found = spectrum("H = p^2; x in ring(0, 2*pi), phase 0.2", 90)
    exact = np.sort((np.arange(-60, 61) + 0.2) ** 2)[:90]
    assert found.complete
    for level, value in zip(found.levels, exact, strict=True):
        assert abs(level.value - value) <= level.error + 1e-13 * value
