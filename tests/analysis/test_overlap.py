"""Overlaps against closed forms, and levels matched by them."""

from math import exp, factorial, pi, sin

import numpy as np
import pytest
from analysis_making import spectrum

from specterm.analysis.overlap import assigned, matched, overlaps

TRAP = "H = p^2/2 + x^2/2; x in (-inf, inf)"
MOVED = "H = p^2/2 + (x - 0.7)^2/2; x in (-inf, inf)"


def test_displaced_oscillators():
    """|<0|n'>|^2 is the Poisson distribution of mean d^2/2 (coherent states; from memory), on meshes that differ."""
    mean = 0.7**2 / 2
    shares = overlaps(spectrum(TRAP, 12), spectrum(MOVED, 9))
    assert shares.shape == (12, 9)
    expected = [exp(-mean) * mean**n / factorial(n) for n in range(9)]
    np.testing.assert_allclose(shares[0], expected, rtol=0, atol=1e-10)


def test_same_mesh_and_another_agree():
    """States on one mesh are orthonormal, and overlaps taken on it are those of the general rule."""
    found = spectrum(TRAP, 12)
    np.testing.assert_allclose(overlaps(found, found), np.eye(12), rtol=0, atol=1e-11)


def test_wells_of_two_widths():
    """Ground states of wells (0, 1) and (0, 2): the closed integral of sin(pi x) sin(pi x/2) sqrt(2), the rest being zero."""
    shares = overlaps(spectrum("H = p^2; x in (0, 1)", 3), spectrum("H = p^2; x in (0, 2)", 3))
    integral = 2**0.5 * (sin(pi / 2) / (pi / 2) - sin(3 * pi / 2) / (3 * pi / 2)) / 2
    assert shares[0, 0] == pytest.approx(integral**2, abs=1e-12)


def test_no_levels_and_no_common_domain():
    """Without levels, or without a common part of the domains, there is nothing to match."""
    apart = overlaps(spectrum("H = p^2; x in (0, 1)", 2), spectrum("H = p^2; x in (3, 4)", 3))
    assert apart.shape == (2, 3)
    assert not apart.any()
    unbound = spectrum("H = p^2 + exp(-x^2); x in (-inf, inf)")
    assert overlaps(unbound, spectrum(TRAP, 2)).shape == (0, 2)
    assert matched(spectrum("H = p^2; x in (0, 1)", 2), spectrum("H = p^2; x in (3, 4)", 3)) == (None, None)


def test_levels_that_have_crossed():
    """On a ring the waves 0 and -1 change order as the phase passes 1/2; all others stay (closed form (n + phase)^2)."""
    before, after = (spectrum(f"H = p^2; x in ring(0, 2*pi), phase {phase}", 3) for phase in (0.49, 0.51))
    assert matched(before, after)[:2] == (1, 0)


def test_degenerate_pairs_are_matched_as_groups():
    """At phase 0 pairs are degenerate, any mixture will do: they are matched to the pair beside it, in order."""
    at, beside = (spectrum(f"H = p^2; x in ring(0, 2*pi), phase {phase}", 5) for phase in (0, 0.01))
    assert matched(at, beside) == (0, 1, 2, 3, 4)


@pytest.mark.parametrize(("shares", "expected"), [
    ([[0.9, 0.1], [0.1, 0.9]], (0, 1)),
    ([[0.1, 0.9], [0.9, 0.1]], (1, 0)),
    ([[0.5, 0.5], [0.5, 0.5]], (0, 1)),
    ([[0.2, 0.2], [0.1, 0.1]], (None, None)),
    ([[0.3, 0.2], [0.1, 0.1]], (0, None)),
    ([[0.95, 0.0], [0.0, 0.4]], (0, 1)),
    ([[0.95, 0.0], [0.0, 0.1]], (0, None)),
    ([[0.9, 0.05]], (0,)),
    ([[0.9], [0.05]], (0, None)),
    (np.zeros((2, 0)), (None, None)),
])  # fmt: skip
def test_assignment(shares, expected):
    """The largest overlap in all decides; mixed pairs go by order; less than half is enough only for both as the largest."""
    assert assigned(np.array(shares)) == expected
