"""Solving from the spectrum of a nearby operator: the same levels, and only where it fits."""

import numpy as np
import pytest
from spectrum_making import spectrum

from specterm.language import parse
from specterm.model import build
from specterm.spectrum import solve

OPEN, WALLS, RING = "x in (-inf, inf)", "x in (-5, 4)", "x in ring(-3, 3)"


def model(operator, domain):
    """Return the model of an operator on a domain."""
    return build(parse(f"H = {operator}; {domain}"))


@pytest.mark.parametrize(("before", "after", "domain"), [
    ("p^2 + x^4", "p^2 + 1.01*x^4", OPEN),
    ("p^2 + x^4", "p^2 + 30*x^4", OPEN),
    ("p^2 + x^2", "p^2 + (x - 6)^2", OPEN),
    ("p^2 + x^2", "p^2 + x^2 + 40*exp(-(x/0.001)^2)", OPEN),
    ("p^2 + (x^2 - 9)^2", "p^2 + (x^2 - 9)^2 + 0.1*x", OPEN),
    ("p^2 + x^2", "p^2 + x^2 + 5*(x > 1)", WALLS),
    ("p^2 + cos(x)", "p^2 + 2*cos(x)", RING),
    ("p^2", "p^2 + cos(2*pi*x/6)", RING),
    ("p*(1 + 0.1*tanh(x))*p + x^2", "p*(1 + 0.3*tanh(x))*p + x^2", OPEN),
])  # fmt: skip
def test_levels_are_those_found_anew(before, after, domain):
    """Values agree within the errors of both, and as many levels are returned, complete, however far the start is off."""
    like, changed = solve(model(before, domain), count=8), model(after, domain)
    started, anew = solve(changed, count=8, like=like), solve(changed, count=8)
    assert len(started.levels) == 8
    assert started.complete
    for a, b in zip(started.levels, anew.levels, strict=True):
        assert (a.index, a.kind) == (b.index, b.kind)
        assert a.parity in (b.parity, None)
        assert abs(a.value - b.value) <= a.error + b.error


@pytest.mark.parametrize("like", [
    "H = p^2 + x^2; x in (-5, 5)", "H = p^2; x in ring(-3, 3)", "H = p^4 + x^2; x in (-inf, inf)",
    "H = p^2 + x^2; x in (0, inf)",
    "H = p^2 - exp(-x^2); x in (-inf, inf)", "H = p^2 + exp(-x^2); x in (-inf, inf)",
])  # fmt: skip
def test_a_start_that_does_not_fit_is_not_used(like):
    """Other ends, another basis, another number of levels, none at all: the levels are those found without."""
    changed = model("p^2 + x^2", OPEN)
    started, anew = solve(changed, count=6, like=spectrum(like)), solve(changed, count=6)
    assert np.array_equal(started.values, anew.values)


def test_a_start_whose_last_levels_are_one():
    """At phase 1/2 levels of a ring are pairs: the last pair of the start leaves room for the levels of the next."""
    ring = "H = p^2; x in ring(0, 2*pi), phase {}"
    like = solve(build(parse(ring.format(0.5))), count=4)
    found = solve(build(parse(ring.format(0.455))), count=4, like=like)
    assert found.values == pytest.approx([0.455**2, 0.545**2, 1.455**2, 1.545**2], abs=1e-10)
