"""Random layered wells against transfer matrices (layered.py), which count levels in closed form: recomputed here."""

import math

from hypothesis import assume, given, settings
from hypothesis import strategies as st
from layered import Layer, between_walls, forever, sheet
from solved import spectrum

ROUNDING = 1e-13
"""Relative rounding of the transfer matrices themselves, measured from the highest energy in play."""


def tenths(low, high):
    """Return a strategy for numbers with one decimal."""
    return st.integers(round(low * 10), round(high * 10)).map(lambda n: n / 10)


LAYER = st.builds(Layer, tenths(0.2, 4), tenths(-20, 30), tenths(0.1, 3))


def certified(count_below, found, top):
    """Assert that the count steps from n to n + 1 across the error of level n."""
    for level in found.levels:
        slack = level.error + ROUNDING * top
        assert count_below(level.value - slack) <= level.index, f"level {level.index} is too high"
        assert count_below(level.value + slack) >= level.index + 1, f"level {level.index} is too low"


@settings(max_examples=40)
@given(st.lists(LAYER, min_size=1, max_size=7))
def test_layers_between_walls(layers):
    """Eight levels of up to seven layers with masses of their own: each brackets a root, none is missed."""
    found = spectrum(sheet(layers, "layers"), 8)
    top = abs(found.levels[-1].value) + max(abs(v.height) for v in layers)
    certified(lambda e: between_walls(layers, e), found, top)


@settings(max_examples=40)
@given(st.lists(LAYER, min_size=3, max_size=7))
def test_layers_without_end(layers):
    """All bound levels of layers whose outer ones go on for ever; their number is that of the roots below the threshold."""
    threshold = min(layers[0].height, layers[-1].height)
    just_below = threshold - 1e-9 * (1 + abs(threshold))
    expected = forever(layers, just_below)
    assume(forever(layers, threshold - 1e-5 * (1 + abs(threshold))) == expected)
    found = spectrum(sheet(layers, "(-inf, inf)"), expected or None)
    assert found.threshold == threshold
    assert found.bound == expected
    if expected:
        certified(lambda e: forever(layers, min(e, math.nextafter(threshold, -math.inf))), found, 1e3 + abs(threshold))


@settings(max_examples=10)
@given(st.lists(LAYER, min_size=3, max_size=7))
def test_more_levels_than_bound(layers):
    """Two levels more than are bound are of kind "box" and claim no error; the bound ones stay."""
    text = sheet(layers, "(-inf, inf)")
    alone = spectrum(text, None)
    assume(alone.bound <= 10)
    more = spectrum(text, alone.bound + 2)
    assert [level.kind for level in more.levels] == ["bound"] * alone.bound + ["box"] * 2
    assert [level.error for level in more.levels[alone.bound :]] == [None, None]
    for a, b in zip(alone.levels, more.levels, strict=False):
        assert abs(a.value - b.value) <= a.error + b.error
