"""The error estimate and its parts, on meshes and boxes made poor by hand: never below the true error, never wildly above.

True levels are closed forms, recomputed here, unless another source stands beside them.
"""

import numpy as np
import pytest
from spectrum_making import by_hand, ready, spectrum, within

from specterm.discrete.mesh import Edge
from specterm.spectrum.accuracy import SAFETY, accuracy

OSCILLATOR = "H = p^2 + x^2; x in (-inf, inf)"
SECH = "H = p^2 - 12/cosh(x)^2; x in (-inf, inf)"
BOX = "H = p^2; x in (0, 1)"
WELL_AND_WALLS = "H = p^2 + where(abs(x) < 1, 0, 30); x in (-2, 2)"
MORSE = "H = p^2 + 30.25*(1 - exp(-x))^2; x in (-inf, inf)"
DISC = "H = p^2 - 1/(4*x^2); x in (0, 1)"
WIDE = {
    "oscillator": (OSCILLATOR, (-9, 9), {}, 2 * np.arange(4) + 1.0),
    "sech": (SECH, (-18, 18), {}, -np.array([9.0, 4.0])),
    "box": (BOX, (0, 1), {}, (np.arange(1, 5) * np.pi) ** 2),
    "Morse": (MORSE, (-3, 12), {}, 30.25 - (5.0 - np.arange(3)) ** 2),
    # squares of the zeros of J_0 (Abramowitz and Stegun, table 9.5)
    "disc": (DISC, (0, 1), {"left": Edge(False, 0.5)}, np.array([2.404825557695773, 5.520078110286311]) ** 2),
}


@pytest.mark.parametrize("elements", [4, 6, 10, 16])
@pytest.mark.parametrize("order", [3, 4, 6, 8])
@pytest.mark.parametrize("name", WIDE)
def test_discretisation(name, order, elements):
    """On a coarse mesh the estimate lies between the true error and a thousand times it, where the mesh sees the state.

    Beside a singular end the upper bound holds without the allowance for what the rules do not see.
    """
    text, ends, edges, true = WIDE[name]
    solved = by_hand(text, np.linspace(*ends, elements + 1), order, len(true), **edges)
    if solved is None:
        pytest.skip("no level under the lowest of an element's interior")
    off = solved.values + ready(text).floor - true[: len(solved.values)]
    found = accuracy(ready(text), solved)
    estimate, sharp = found.total, found.total - SAFETY * found.unseen.sum(axis=0) * ("left" in edges)
    scale = np.maximum(solved.kinetic, np.abs(solved.values))
    seen = off < 0.1 * scale
    rounding = 1e-12 * np.abs(solved.values)
    assert (estimate[seen] >= off[seen] - rounding[seen]).all(), f"{estimate} for {off}"
    judged = seen & (off > 100 * rounding)
    assert (sharp[judged] <= 1000 * off[judged]).all(), f"{sharp} for {off}"


@pytest.mark.parametrize("name", ["oscillator", "sech", "Morse"])
def test_a_mesh_too_coarse_for_anything(name):
    """Where the error is of the size of the level itself the estimate says so too: at least a tenth of it."""
    text, _, _, true = WIDE[name]
    solved = by_hand(text, [-4, 0.3, 4], 3, 1)
    off = solved.values[0] + ready(text).floor - true[0]
    assert accuracy(ready(text), solved).total[0] >= 0.1 * off


@pytest.mark.parametrize("half", [2.5, 3.0, 3.5, 4.0, 5.0])
def test_cut_of_an_oscillator(half):
    """The rise of 2 n + 1 by walls at +-half is at most what the cut is said to cost, which is at most four times it."""
    solved = by_hand(OSCILLATOR, np.linspace(-half, half, 13), 12, 3)
    found = accuracy(ready(OSCILLATOR), solved)
    rise = solved.values + ready(OSCILLATOR).floor - (2 * np.arange(3) + 1)
    estimate = SAFETY * found.share.sum(axis=0) + 2 * found.cut.sum(axis=0) + found.noise
    np.testing.assert_array_equal(estimate, found.total)
    judged = rise > 1e-9
    assert (found.total >= rise).all(), f"{found.total} for {rise}"
    small = judged & (rise < 0.05)
    assert (found.cut.sum(axis=0)[small] < 4 * rise[small]).all()


@pytest.mark.parametrize("half", [4.0, 5.0, 6.0])
def test_wall_force(half):
    """For an exponential tail the cut's cost K psi'^2/(2 kappa) is the exact rise of the level, to first order in it."""
    solved = by_hand(SECH, np.linspace(-half, half, 25), 14, 1)
    rise = solved.values[0] + ready(SECH).floor + 9
    assert accuracy(ready(SECH), solved).cut[:, 0].sum() == pytest.approx(rise, rel=0.02)


def test_wall_force_of_a_level_above_the_tail():
    """A state whose energy lies above the potential at the cut has no decay there: the estimate is infinite."""
    solved = by_hand(OSCILLATOR, np.linspace(-1.0, 1.0, 5), 10, 2)
    assert np.isinf(accuracy(ready(OSCILLATOR), solved).total).all()


def test_no_cut_at_true_ends():
    """Walls of the sheet cost nothing."""
    solved = by_hand(BOX, np.linspace(0, 1, 5), 10, 3)
    assert (accuracy(ready(BOX), solved).cut == 0).all()


def test_unseen_jump():
    """A jump inside an element, unseen by the rule, is in the estimate: it covers the difference to the mesh that knows it."""
    known = by_hand(WELL_AND_WALLS, [-2, -1, 0, 1, 2], 16, 2)
    blind = by_hand(WELL_AND_WALLS, [-2, -0.9, 0, 1.1, 2], 12, 2)
    found = accuracy(ready(WELL_AND_WALLS), blind)
    assert (found.total >= np.abs(blind.values - known.values)).all()
    assert (found.unseen.sum(axis=0) > 0).all()


@pytest.mark.parametrize("offset", [0, 1e3, -1e6, 1e9])
def test_rounding_of_an_offset(offset):
    """Beside a large constant the last digits go, and the error says so."""
    found = spectrum(f"H = p^2 + x^2 + ({offset!r}); x in (-inf, inf)", 5)
    within(found, 2 * np.arange(5) + 1.0 + offset)
    assert all(level.error < 1e-13 * (abs(offset) + 100) for level in found.levels)


@pytest.mark.parametrize("scale", [1e-9, 1e-3, 1e3, 1e9])
def test_rounding_at_any_scale(scale):
    """Lengths and energies of any size leave the same relative error."""
    found = spectrum(f"s = {scale!r}; H = p^2 + x^2/s^4; x in (-inf, inf)", 5)
    within(found, (2 * np.arange(5) + 1.0) / scale**2)
    assert all(level.error < 1e-12 * abs(level.value) for level in found.levels)


@pytest.mark.parametrize("place", [1e3, -1e6, 1e8])
def test_rounding_of_a_far_place(place):
    """Far from the origin the rounding of x itself is in the error: it grows with the place, and still covers the truth."""
    found = spectrum(f"H = p^2 + (x - ({place!r}))^2; x in (-inf, inf)", 4)
    within(found, 2 * np.arange(4) + 1.0)


@pytest.mark.parametrize("tolerance", [1e-3, 1e-6, 1e-8, 1e-11])
@pytest.mark.parametrize("name", WIDE)
def test_tolerance(name, tolerance):
    """Whatever the tolerance, every error is below it (as a share of the level) and covers the truth."""
    text, _, _, true = WIDE[name]
    found = spectrum(text, len(true), tolerance=tolerance)
    within(found, true)
    floor = ready(text).floor
    steps = np.diff(true, append=true[-1] + (true[-1] - true[-2]), prepend=2 * true[0] - true[1]).max()
    for level, value in zip(found.levels, true, strict=True):
        assert level.error <= tolerance * max(value - floor, steps)
        assert level.kind == "bound"


@pytest.mark.parametrize("name", WIDE)
def test_levels_do_not_depend_on_how_many_are_asked_for(name):
    """The lowest level is the same, within the two errors, alone and among many."""
    text, _, _, true = WIDE[name]
    alone, among = spectrum(text, 1).levels[0], spectrum(text, len(true)).levels[0]
    assert abs(alone.value - among.value) <= alone.error + among.error
