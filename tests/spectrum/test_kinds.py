"""What sort of levels: bound, box, band, unresolved; near an energy; from the top; which notes go with them."""

import numpy as np
import pytest
from spectrum_making import model, spectrum, within

from specterm.errors import PhysicsError
from specterm.spectrum import solve

SECH = "H = p^2 - 6/cosh(x)^2; x in (-inf, inf)"
OSCILLATOR = "H = p^2 + x^2; x in (-inf, inf)"


def kinds(found):
    """Return the kinds of all levels."""
    return [level.kind for level in found.levels]


def test_bound_then_box():
    """More levels than are bound: first the bound ones, then box levels without error, all above the threshold."""
    found = spectrum(SECH, 5)
    assert kinds(found) == ["bound", "bound", "box", "box", "box"]
    assert (found.bound, found.threshold) == (2, 0)
    within(type("Two", (), {"levels": found.levels[:2]}), [-4, -1])
    assert all(level.error is None and level.value > 0 for level in found.levels[2:])
    assert any("3 of the levels lie in the continuum" in note for note in found.notes)


@pytest.mark.parametrize("domain", ["(0.95, inf)", "(-inf, -3)", "(7, inf)", "(-inf, inf)", "(0, inf)"])
def test_boxes_where_nothing_happens(domain):
    """Box levels of a free particle on any half line lie above the threshold; there is nothing to put the box around."""
    found = spectrum(f"H = p^2; x in {domain}", 3)
    assert kinds(found) == ["box"] * 3
    assert all(level.value > 0 for level in found.levels)


def test_without_a_number_only_bound_ones():
    """Without a number asked for, only the true levels are returned, ten at most."""
    assert kinds(spectrum(SECH)) == ["bound", "bound"]
    assert len(spectrum(OSCILLATOR).levels) == 10
    assert len(spectrum("H = p^2 - 200.5/cosh(x)^2; x in (-inf, inf)").levels) == 10


@pytest.mark.parametrize(("phase", "kind"), [("", "bound"), (", phase 0.2", "band"), (", phase 0", "band")])
def test_band(phase, kind):
    """On a ring levels are of kind band where the sheet gives a Bloch phase, else bound."""
    assert set(kinds(spectrum(f"H = p^2 + cos(x); x in ring(0, 2*pi){phase}", 4))) == {kind}


def test_unresolved():
    """A tolerance beyond double precision leaves levels unresolved, with honest errors and a note."""
    found = spectrum(OSCILLATOR, 3, tolerance=1e-17)
    assert kinds(found) == ["unresolved"] * 3
    within(found, [1, 3, 5])
    assert any("unresolved" in note for note in found.notes)


NEAR = [(101.3, [49, 50, 51, 52]), (1.0, [0, 1, 2, 3]), (-5.0, [0, 1, 2, 3]), (100.9, [48, 49, 50, 51])]


@pytest.mark.parametrize(("near", "expected"), NEAR)
def test_near(near, expected):
    """The levels nearest to an energy, as many as asked for, with their right numbers."""
    found = spectrum(OSCILLATOR, 4, near=near)
    assert [level.index for level in found.levels] == expected
    within(found, 2 * np.array(expected) + 1.0)
    assert found.complete


def test_near_far_up():
    """Level number 1000 of an oscillator is found near its energy with its number."""
    found = spectrum(OSCILLATOR, 1, near=2001.2)
    assert [level.index for level in found.levels] == [1000]
    within(found, [2001.0])


def test_near_under_a_threshold():
    """Near an energy just under the threshold the highest bound levels are returned; in the continuum there are none."""
    text = "H = p^2 - 110/cosh(x)^2; x in (-inf, inf)"
    found = spectrum(text, 3, near=-0.5)
    assert [level.index for level in found.levels] == [7, 8, 9]
    within(found, [-9, -4, -1])
    with pytest.raises(PhysicsError, match="continuum"):
        solve(model(text), count=3, near=0.5)


def test_near_in_a_coulomb_tail():
    """Near an energy with infinitely many levels above it the nearest are found: -1/(n+1)^2 (closed form)."""
    found = spectrum("H = p^2 - 2/x; x in (0, inf)", 2, near=-0.0100001)
    assert [level.index for level in found.levels] == [9, 10]
    within(found, [-1 / 100, -1 / 121])


def test_from_the_top():
    """An operator with a highest level only is counted from the top and says so."""
    found = spectrum("H = D^2 - x^2; x in (-inf, inf)", 4)
    assert found.from_top
    within(found, [-1, -3, -5, -7])
    assert any("from the top" in note for note in found.notes)
    assert not spectrum(OSCILLATOR, 4).from_top


def test_threshold_from_the_top():
    """Turned over, the threshold is where the continuum ends."""
    found = spectrum("H = D^2 + 6/cosh(x)^2 + 1; x in (-inf, inf)", 2)
    within(found, [5, 2])
    assert (found.threshold, found.bound) == (1, 2)


@pytest.mark.parametrize(
    ("text", "parity"),
    [
        (OSCILLATOR, ["even", "odd", "even"]),
        ("H = p^2 + (x-7)^4; x in (-inf, inf)", ["even", "odd", "even"]),
        ("H = p^2 + x; x in (0, inf)", [None] * 3),
        ("H = p^2 + x^4 + x^3/10; x in (-inf, inf)", [None] * 3),
        ("H = p*(1+x^2)*p + x^2; x in (-3, 3)", ["even", "odd", "even"]),
        ("H = p^2 + x^2; x in (-3, 3), free left", [None] * 3),
        ("H = p^2 + cos(x); x in ring(0, 2*pi)", [None] * 3),
        ("H = (p - 1)^2 + x^2; x in (-inf, inf)", [None] * 3),
    ],
)
def test_parity(text, parity):
    """Mirror-symmetric operators alternate between even and odd; all others have no parity."""
    assert [level.parity for level in spectrum(text, 3).levels] == parity


def test_nodes():
    """Level n has n nodes on a line; on a ring nodes mean nothing."""
    assert [level.nodes for level in spectrum(OSCILLATOR, 4).levels] == [0, 1, 2, 3]
    assert {level.nodes for level in spectrum("H = p^2 + cos(x); x in ring(0, 2*pi)", 4).levels} == {None}


@pytest.mark.parametrize(("count", "tolerance"), [(0, 1e-8), (-3, 1e-8), (3, 0.0), (3, -1e-8), (3, 1.0), (3, float("nan"))])
def test_senseless_requests(count, tolerance):
    """A number of levels below one, or a tolerance outside (0, 1), is refused."""
    with pytest.raises(PhysicsError):
        solve(model(OSCILLATOR), count=count, tolerance=tolerance)


def test_what_the_spectrum_says_of_itself():
    """The result tells basis, unknowns, domain and time, and its values are those of its levels."""
    found = spectrum(OSCILLATOR, 4)
    assert "spectral elements" in found.basis
    assert found.unknowns > 20
    assert found.left < -3 < 3 < found.right
    assert found.seconds > 0
    np.testing.assert_array_equal(found.values, [level.value for level in found.levels])
    assert found.complete
