"""Means and spreads against closed forms, within the errors they carry."""

import math

import pytest
from analysis_making import model, spectrum

from specterm.analysis.expectation import expectation
from specterm.analysis.uncertainty import pair_of
from specterm.errors import PhysicsError, SheetError

OSCILLATOR = (
    "H = p^2/2 + x^2/2\nx in (-inf, inf)\nT = p^2/2\nstate moved = exp(-(x - 1.3)^2/2 + 0.7*i*x)\n"
    "state cut = step(x)*exp(-x^2)\nstate kink = exp(-abs(x))\nstate pair = level(0) + i*level(1)"
)
WALLS = "H = p^2/2\nx in (0, 1)\nstate flat = 1"
HYDROGEN = "H = p^2/2 - 1/r\nr in (0, inf)"


def in_state(text, observable, state, count=8):
    """Return an expectation in a state of a sheet."""
    return expectation(model(text), spectrum(text, count), observable, state)


def honest(found, mean, spread=None):
    """Assert that mean and spread are as expected within their reported errors, which are small."""
    assert abs(found.mean - mean) <= found.error, f"{found}: expected {mean!r}"
    if spread is not None:
        assert abs(found.spread - spread) <= found.spread_error, f"{found}: expected spread {spread!r}"


@pytest.mark.parametrize("n", [0, 1, 3, 7])
@pytest.mark.parametrize("observable", ["x^2", "p^2"])
def test_square_of_place_and_momentum_in_an_oscillator(n, observable):
    """<x^2> = <p^2> = n + 1/2 with spread sqrt((n^2 + n + 1)/2) (closed form)."""
    found = in_state(OSCILLATOR, observable, f"level({n})")
    honest(found, n + 0.5, math.sqrt((n * n + n + 1) / 2))
    assert found.error < 1e-8


@pytest.mark.parametrize("n", [0, 2, 5])
def test_own_operator_has_no_spread(n):
    """H in its own level has the level as mean and a spread that is zero within its error (definition of an eigenstate)."""
    honest(in_state(OSCILLATOR, "H", f"level({n})"), n + 0.5, 0.0)


def test_moved_ground_state():
    """A displaced Gauss packet of momentum 0.7: <x> = 1.3, <p> = 0.7, <H> = 1/2 + (1.3^2 + 0.7^2)/2 (closed form)."""
    honest(in_state(OSCILLATOR, "x", "moved"), 1.3, math.sqrt(0.5))
    honest(in_state(OSCILLATOR, "p", "moved"), 0.7, math.sqrt(0.5))
    honest(in_state(OSCILLATOR, "H", "moved"), 0.5 + (1.3**2 + 0.7**2) / 2, math.sqrt((1.3**2 + 0.7**2) / 2))


def test_sum_of_two_levels():
    """level(0) + i level(1): <p> = -1/sqrt 2 up to the sign rule of states, <H> = 1 with spread 1/2 (closed form)."""
    honest(in_state(OSCILLATOR, "H", "pair"), 1.0, 0.5)
    found = in_state(OSCILLATOR, "p", "pair")
    assert abs(abs(found.mean) - math.sqrt(0.5)) <= found.error


@pytest.mark.parametrize("n", [0, 1, 4])
def test_place_between_walls(n):
    """<x> = 1/2, spread sqrt(1/12 - 1/(2 k^2)) with k = (n + 1) pi; <p> = 0, spread k (closed form)."""
    k = (n + 1) * math.pi
    honest(in_state(WALLS, "x", f"level({n})"), 0.5, math.sqrt(1 / 12 - 1 / (2 * k * k)))
    honest(in_state(WALLS, "p", f"level({n})"), 0.0, k)
    honest(in_state(WALLS, "p^2", f"level({n})"), k * k, 0.0)


@pytest.mark.parametrize("n", [1, 2, 4])
def test_radial_means_of_hydrogen(n):
    """S states: <r> = 3 n^2/2, <1/r> = 1/n^2, <1/r^2> = 2/n^3, <p^2> = 1/n^2 (closed form, Bethe and Salpeter, from memory)."""
    state = f"level({n - 1})"
    honest(in_state(HYDROGEN, "r", state), 1.5 * n * n)
    honest(in_state(HYDROGEN, "1/r", state), 1 / n**2)
    honest(in_state(HYDROGEN, "1/r^2", state), 2 / n**3)
    honest(in_state(HYDROGEN, "p^2", state), 1 / n**2)


def test_a_mean_that_diverges_is_refused():
    """<1/r^3> of an s state does not exist: u^2/r^3 goes as 1/r (closed form)."""
    with pytest.raises(PhysicsError, match="not finite"):
        in_state(HYDROGEN, "1/r^3", "level(0)")


def test_momentum_of_a_state_that_jumps():
    """A state cut off at 0 has a finite <p> without spread, and no finite <p^2> (its slope holds a pulse)."""
    assert in_state(OSCILLATOR, "p", "cut").spread == math.inf
    with pytest.raises(PhysicsError, match="infinite"):
        in_state(OSCILLATOR, "p^2", "cut")
    with pytest.raises(PhysicsError, match="infinite"):
        in_state(WALLS, "H", "flat")


def test_kinetic_energy_of_a_state_that_bends():
    """exp(-|x|) has <p^2> = 1, and no spread of it (closed form: p^2 psi holds a pulse)."""
    found = in_state(OSCILLATOR, "p^2", "kink")
    honest(found, 1.0)
    assert found.spread == math.inf
    assert "slope jumps at" in found.notes[0]


@pytest.mark.parametrize("sheet", [
    "H = p*(1/m)*p/2\nm = where(x < 0, 1, 3)\nx in (-1, 1)",
    "H = p*(1/m)*p/2\nlayers x from -1: thickness, m\n  1 1\n  1 3\nx in layers",
])  # fmt: skip
def test_a_mass_that_jumps(sheet):
    """Where the mass jumps so does the slope: H itself has no spread in its level, p^2 has an infinite one (matching rule)."""
    found = in_state(sheet, "H", "level(0)", 4)
    honest(found, spectrum(sheet, 4).levels[0].value, 0.0)
    assert in_state(sheet, "p^2", "level(0)", 4).spread == math.inf


def test_twice_the_kinetic_energy_is_the_virial():
    """<x dV/dx> = 2 <T> in every level of an oscillator (virial theorem)."""
    for n in range(4):
        left, right = in_state(OSCILLATOR, "x^2", f"level({n})"), in_state(OSCILLATOR, "2*T", f"level({n})")
        assert abs(left.mean - right.mean) <= left.error + right.error


def test_growth_beyond_the_cut_is_told():
    """exp(x^2/2) makes the square of a level constant, so that its spread hangs on the cut: no error is claimed."""
    found = in_state(OSCILLATOR, "exp(x^2/2)", "level(0)")
    assert found.error is None
    assert "cut" in found.notes[-1]


def test_what_is_no_observable_is_refused():
    """Orders above two, operators that are not Hermitian and unknown names are told apart."""
    with pytest.raises(PhysicsError, match="Hermitian"):
        in_state(OSCILLATOR, "x*p", "level(0)")
    with pytest.raises(PhysicsError, match="order 4"):
        in_state(OSCILLATOR, "p^4", "level(0)")
    with pytest.raises(SheetError, match="observable"):
        in_state(OSCILLATOR, "nothing", "level(0)")
    with pytest.raises(SheetError, match="no state"):
        in_state(OSCILLATOR, "x", "absent")


def test_product_of_spreads_and_commutator():
    """[x, p] = i: the bound is 1/2 for every state, reached by the displaced ground state (Heisenberg's relation)."""
    pair = pair_of(model(OSCILLATOR), spectrum(OSCILLATOR, 8), ("x", "p"), "moved")
    assert pair.commutator == "i"
    assert not pair.commutes
    assert pair.product == pytest.approx(0.5, rel=1e-10)
    assert pair.bound == pytest.approx(0.5, rel=1e-12)
    assert pair_of(model(OSCILLATOR), spectrum(OSCILLATOR, 8), ("x", "x^2"), "moved").commutes
    other = pair_of(model(OSCILLATOR), spectrum(OSCILLATOR, 8), ("x^2", "p^2"), "level(1)")
    assert other.product >= other.bound - (other.bound_error or 0)


def pair(text, first, second, state="level(0)"):
    """Return two observables beside each other."""
    return pair_of(model(text), spectrum(text, 8), (first, second), state)


FREE_RING = "H = p^2/2\nx in ring(0, 1)"
SLOPES = "H = p^2/2\nx in (0, 1), free"
STEPPED = "H = p*(1/(2*m))*p + V\nV = step(x)\nm = 1 + 0.5*step(x)\nx in (-3, 3)"


@pytest.mark.parametrize(
    ("text", "first", "second", "shown"),
    [
        (OSCILLATOR, "x", "p", "i"),
        (OSCILLATOR, "H", "x", "-i*p"),
        (OSCILLATOR, "H", "p", "i*x"),
        (OSCILLATOR, "(x*p + p*x)/2", "H", "i*p^2 - i*x^2"),
        (OSCILLATOR, "p^2", "p*x^2*p", "-4*i*x*p^3 - 6*p^2"),
        (OSCILLATOR, "T", "x^2", "-2*i*x*p - 1"),
        ("H = p^2/2\nhbar = 0.5\nx in (0, 1)", "p", "x^2", "-i*x"),
        ("H = p^2/2\nx in ring(0, 2*pi)", "p", "cos(x)", "i*sin(x)"),
        (STEPPED, "H", "x", "-i*(1/m)*p + 0.25*((V)'/m^2)"),
        (STEPPED, "V", "p", "i*(V)'"),
    ],
)
def test_commutators_written_out(text, first, second, shown):
    """[A,B] in normal order, by hand from [x,p] = i hbar; it does not vanish."""
    found = pair(text, first, second)
    assert found.commutator == shown
    assert not found.commutes


@pytest.mark.parametrize(
    ("text", "first", "second"),
    [(OSCILLATOR, "H", "2*H + 1"), (WALLS, "x", "x^2"), (FREE_RING, "p", "H"), (HYDROGEN, "H", "3*H"), (STEPPED, "V", "m")],
)
def test_commutators_that_vanish(text, first, second):
    """What commutes on the domain is told, and bounds nothing."""
    found = pair(text, first, second)
    assert (found.commutator, found.commutes, found.bound) == ("0", True, 0.0)


@pytest.mark.parametrize("text", [WALLS, SLOPES, "H = p^2/2\nr in (0, 2)"])
def test_commutators_that_vanish_only_between_the_ends(text):
    """[p,p^2] is 0 as written, but p leads out of the domain of p^2 at walls and free ends (no common eigenstates there)."""
    found = pair(text, "p", "p^2")
    assert (found.commutator, found.commutes) == ("0", False)
    assert any("ends of the domain" in note for note in found.notes)


def test_lower_bound_where_the_commutator_is_of_third_order():
    """|<[p^2, p x^2 p]>|/2 = |Im <p^2 s, p x^2 p s>| in the packet exp(-(x-1)^2/2 + 2 i x) is 22 (recomputed here, mpmath)."""
    text = OSCILLATOR + "\nstate s = exp(-(x - 1)^2/2 + 2*i*x)"
    found = pair(text, "p^2", "p*x^2*p", "s")
    assert abs(found.bound - 22) <= found.bound_error < 1e-5
    assert found.product > found.bound


PARTED = "H = p^2/2 + 40*(x^2 - 4)^2\nx in ({left}, inf)"


def test_levels_too_near_to_be_told_apart_still_have_errors():
    """In two wells so far apart that their levels agree to rounding, <x> = 0 by symmetry lies within the error told."""
    found = in_state(PARTED.format(left="-inf"), "x", "level(1)")
    assert abs(found.mean) <= found.error < 5
    assert abs(found.spread**2 + found.mean**2 - 3.971849889) < 1e-8
    assert abs(found.spread - math.sqrt(3.971849889)) <= found.spread_error
    assert any("too near" in note for note in found.notes)


def test_what_all_mixtures_of_near_levels_agree_on_is_sharp():
    """<x^2> is that of a single well of the two (the same sheet on the half line, recomputed here)."""
    both = in_state(PARTED.format(left="-inf"), "x^2", "level(0)")
    single = in_state(PARTED.format(left="0"), "x^2", "level(0)")
    assert abs(both.mean - single.mean) <= both.error + single.error
    assert abs(both.spread - single.spread) <= both.spread_error + single.spread_error
    assert both.error < 1e-6


def test_a_level_whose_partner_was_not_computed_has_no_error():
    """With one level only nothing is known of its partner: <x> has no error."""
    assert in_state(PARTED.format(left="-inf"), "x", "level(0)", 1).error is None


@pytest.mark.parametrize("observable", ["1e308*x", "1e200*x"])
def test_values_too_large_to_be_squared_are_refused(observable):
    """What cannot be squared in double precision is told, not returned as infinity."""
    with pytest.raises(PhysicsError, match="too large"):
        in_state(WALLS, observable, "level(0)")


def test_operator_of_order_four_in_its_own_level():
    """An operator above order two has its own level for a mean, with the level's error, and no spread."""
    text = "H = p^4 + x^4; x in (-inf, inf)"
    levels = spectrum(text, 3)
    found = expectation(model(text), levels, "H", "level(2)")
    assert (found.mean, found.error, found.spread) == (levels.levels[2].value, levels.levels[2].error, 0.0)
