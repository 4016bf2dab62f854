"""Brackets from counts: on made-up counting functions no level is missed and close ones come together."""

import itertools

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from specterm.spectrum.isolate import ALONE, CLOSE, Ruler, isolate


class Counter:
    """The number of made-up levels below each energy, and how often it was asked."""

    def __init__(self, levels):
        self.levels, self.calls = np.sort(np.asarray(levels, dtype=float)), 0

    def __call__(self, energies):
        """Count."""
        self.calls += 1
        return np.searchsorted(self.levels, energies, side="left")


def checked(levels, first, last, low, high, bottom):
    """Return the groups, having checked what is promised of all of them."""
    count = Counter(levels)
    groups = isolate(count, first, last, low, high, Ruler(bottom))
    assert groups[0].first <= first
    assert groups[-1].first + groups[-1].size > last
    for group, after in itertools.pairwise(groups):
        assert group.first + group.size == after.first
        assert group.high <= after.low
    for group in groups:
        held = count.levels[group.first : group.first + group.size]
        assert (held >= group.low).all()
        assert (held < group.high).all()
        assert group.size == 1 or group.high - group.low <= CLOSE * abs((group.high + group.low) / 2 - bottom) * 1.001
    assert count.calls < 60
    return groups


def test_levels_apart_come_alone():
    """Levels apart are bracketed one by one, to a small share of their spacing."""
    levels = np.arange(1, 30) ** 1.5
    groups = checked(levels, 0, 19, 0.0, 95.0, 0.0)
    assert [g.size for g in groups] == [1] * 20
    assert max(g.high - g.low for g in groups) <= ALONE * 95 / 20 * (1 + 1e-9)


def test_only_those_asked_for():
    """Groups outside the numbers asked for are left out."""
    groups = checked(np.arange(100.0) + 0.3, 40, 44, 0.0, 100.0, 0.0)
    assert [g.first for g in groups] == [40, 41, 42, 43, 44]


@pytest.mark.parametrize("size", [2, 3, 7])
@pytest.mark.parametrize("spread", [0.0, 1e-13, 3e-12])
def test_clusters_come_whole(size, spread):
    """Levels closer than a count can tell apart come as one group, the loners around them alone."""
    levels = np.concatenate([[1.0], 2.0 + spread * np.arange(size), [3.0]])
    groups = checked(levels, 0, size + 1, 0.0, 4.0, 0.0)
    assert [g.size for g in groups] == [1, size, 1]


def test_close_levels_are_told_apart():
    """Levels a billionth apart are still bracketed one by one."""
    assert [g.size for g in checked([1.0, 2.0, 2.0 + 2e-9, 3.0], 0, 3, 0.0, 4.0, 0.0)] == [1, 1, 1, 1]


def test_levels_exactly_on_cuts():
    """Levels exactly at the first cuts of the bracket are found once each."""
    cuts = np.linspace(0.0, 12.0, 13)
    groups = checked(cuts[1:-1], 0, 10, 0.0, 12.0, 0.0)
    assert [g.size for g in groups] == [1] * 11


def test_part_of_a_cluster_brings_all_of_it():
    """Asking for one member of a cluster returns the whole cluster."""
    groups = checked([1.0, 2.0, 2.0, 2.0, 3.0], 2, 2, 0.0, 4.0, 0.0)
    assert [(g.first, g.size) for g in groups] == [(1, 3)]


@pytest.mark.parametrize("scale", [1e-30, 1e-9, 1e9, 1e30])
def test_any_scale(scale):
    """The work does not depend on the unit of energy."""
    assert [g.size for g in checked(scale * np.array([1.0, 1.5, 7.0]), 0, 2, 0.0, 8 * scale, 0.0)] == [1, 1, 1]


def test_levels_far_above_the_bottom():
    """Two levels nearer to each other than the last digit of their height end as one group, not in an endless search."""
    assert [g.size for g in checked([1e6, 1e6 + 1e-9], 0, 1, 0.0, 2e6, 0.0)] == [2]


def test_a_count_that_falls():
    """Where rounding makes a count fall by one, groups still hold all levels in order."""
    levels = np.arange(1.0, 11.0)

    def shaky(energies):
        exact = np.searchsorted(levels, energies, side="left")
        return np.where(np.floor(energies * 1e3) % 7 == 0, exact - 1, exact) * (energies > 0)

    groups = isolate(shaky, 0, 9, -1.0, 11.0, Ruler(-1.0))
    assert sum(g.size for g in groups) >= 10
    assert all(a.first + a.size == b.first for a, b in itertools.pairwise(groups))


@given(
    st.lists(st.floats(0.001, 1.0), min_size=1, max_size=25),
    st.lists(st.integers(0, 24), max_size=6),
    st.floats(1e-14, 1e-7),
    st.data(),
)
def test_any_levels(single, doubled, apart, data):
    """Whatever the levels, some of them in near pairs, the brackets hold those asked for."""
    levels = np.array(single + [single[k % len(single)] + apart for k in doubled])
    first = data.draw(st.integers(0, len(levels) - 1))
    last = data.draw(st.integers(first, len(levels) - 1))
    checked(levels, first, last, 0.0, 1.01, 0.0)
