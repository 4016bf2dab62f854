"""The number of bound levels, against exact counts, at and beside the strengths where one more appears.

All counts are recomputed here: zeros of the solution at the threshold in closed form.
"""

import math

import pytest
from scipy import optimize
from spectrum_making import ready, spectrum

from specterm.spectrum.bound import bound_levels

HAIRS = [-1e-3, -1e-7, 1e-7, 1e-3]


def count(text):
    """Return the number of bound levels."""
    return bound_levels(ready(text))


@pytest.mark.parametrize("hair", HAIRS)
@pytest.mark.parametrize("levels", [1, 2, 5, 30])
def test_square_well(levels, hair):
    """-V on (-1, 1): floor(2 sqrt(V)/pi) + 1 levels."""
    strength = (levels * math.pi / 2 * (1 + hair)) ** 2
    assert count(f"H = p^2 - where(abs(x) < 1, {strength!r}, 0); x in (-inf, inf)") == levels + (hair > 0)


@pytest.mark.parametrize("depth", [1e-4, 1e-2])
def test_shallow_wells_bind_one(depth):
    """Any shallow well on a line binds exactly one level, square or smooth; beside a wall it binds none."""
    assert count(f"H = p^2 - where(abs(x) < 1, {depth}, 0); x in (-inf, inf)") == 1
    assert count(f"H = p^2 - {depth}*exp(-x^2); x in (-inf, inf)") == 1
    assert count(f"H = p^2 - {depth}*exp(-x^2); x in (0, inf)") == 0
    assert count(f"H = p^2 - {depth}*exp(-x^2); x in (0, inf), free left") == 1


@pytest.mark.parametrize("hair", HAIRS)
@pytest.mark.parametrize("levels", [0, 1, 4])
def test_square_well_beside_a_wall(levels, hair):
    """-V on (0, 1), wall at 0: floor(sqrt(V)/pi + 1/2) levels."""
    strength = ((levels + 0.5) * math.pi * (1 + hair)) ** 2
    assert count(f"H = p^2 - where(x < 1, {strength!r}, 0); x in (0, inf)") == levels + (hair > 0)


@pytest.mark.parametrize("power", [1, 2, 3, 5, 10, 1e-3, 0.5, 1.999999, 2.000001, 9.99999, 10.00001])
def test_sech(power):
    """-l(l+1)/cosh^2: ceil(l) levels, l of them for a whole l, where one more sits exactly at the threshold."""
    assert count(f"l = {power}; H = p^2 - l*(l+1)/cosh(x)^2; x in (-inf, inf)") == math.ceil(power)


@pytest.mark.parametrize("hair", [*HAIRS, 0.0])
@pytest.mark.parametrize("levels", [1, 2, 6])
def test_morse_by_a_hair(levels, hair):
    """D (1 - e^-x)^2: as many levels as whole numbers n with n < sqrt(D) - 1/2."""
    depth = ((levels + 0.5) * (1 + hair)) ** 2
    assert count(f"H = p^2 + {depth!r}*(1 - exp(-x))^2; x in (-inf, inf)") == levels + (hair > 0)


@pytest.mark.parametrize("hair", [-1e-3, -1e-5, 1e-5, 1e-3])
@pytest.mark.parametrize("levels", [1, 2, 7])
def test_tail_of_the_fourth_power(levels, hair):
    """-g/(1+x^2)^2: at E = 0 x = tan(t) turns it into v'' + (1 + g) v = 0 on an interval of pi: whole n with n^2 < 1 + g."""
    strength = ((levels + 1) * (1 + hair)) ** 2 - 1
    assert count(f"H = p^2 - {strength!r}/(1+x^2)^2; x in (-inf, inf)") == levels + (hair > 0)


@pytest.mark.parametrize("hair", [-1e-2, -1e-3, 1e-3, 1e-2])
@pytest.mark.parametrize("tail", [0.2, 0.1, -0.5, -2.0, -12.0])
def test_inverse_square_tails(tail, hair):
    """-V on (0, 1), -c/x^2 beyond: one level from k cot k = (1 - sqrt(1 - 4 c))/2, k^2 = V, on (the least tail's slope)."""
    slope = (1 - math.sqrt(1 - 4 * tail)) / 2
    k = optimize.brentq(lambda k: k / math.tan(k) - slope, 1e-6, math.pi - 1e-9, xtol=1e-15)
    strength = (k * (1 + hair)) ** 2
    assert count(f"H = p^2 - where(x < 1, {strength!r}, {tail}/x^2); x in (0, inf)") == int(hair > 0)


ENDLESS = [
    "H = p^2 - 1/x; x in (0, inf)",
    "H = p^2 - 1/sqrt(1+x^2); x in (-inf, inf)",
    "H = p^2 - 1/(1+abs(x))^1.5; x in (-inf, inf)",
    "H = p^2 - 0.3/(1+x^2); x in (-inf, inf)",
    "H = p^2 + 5/(1+x^2)^2 - 1e-3/(1+x^2)^0.5; x in (-inf, inf)",
]


@pytest.mark.parametrize("text", ENDLESS)
def test_infinitely_many(text):
    """A tail that falls more slowly than 1/x^2, or as an inverse square above the critical strength, binds without end."""
    assert count(text) is None


FREE = ["H = p^2 + 1/x; x in (0, inf)", "H = p^2 + exp(-x^2); x in (-inf, inf)", "H = p^2; x in (-inf, inf)"]


@pytest.mark.parametrize("text", FREE)
def test_none(text):
    """Repulsion, or nothing, binds nothing: no level, and a note says so."""
    found = spectrum(text)
    assert found.bound == 0
    assert found.levels == ()
    assert any("no level is bound" in note for note in found.notes)


@pytest.mark.parametrize("offset", [0, 7, -7, 1e3])
def test_offsets_change_nothing(offset):
    """A constant added to the potential leaves the number of bound levels alone: -2.5 exp(-x^2) has one, -2.7 exp(-x^2) two."""
    assert count(f"H = p^2 + {offset} - 2.5*exp(-x^2); x in (-inf, inf)") == 1
    assert count(f"H = p^2 + {offset} - 2.7*exp(-x^2); x in (-inf, inf)") == 2


def test_the_lower_of_two_thresholds_counts():
    """With unequal limits only levels under the lower one are bound: a step beside a well, exact by the phase k + atan(k/q)."""
    V, step = 30.0, 8.0
    k = math.sqrt(V)
    phase = k * 2 - math.atan(math.sqrt(step) / k)
    expected = math.ceil(phase / math.pi)
    assert count(f"H = p^2 + where(x < -1, {step}, where(x < 1, -{V}, 0)); x in (-inf, inf)") == expected


def test_discrete_spectra_have_no_number():
    """Where the spectrum is discrete anyway there is no threshold and no number of bound levels."""
    found = spectrum("H = p^2 + x^4; x in (-inf, inf)", 3)
    assert (found.bound, found.threshold) == (None, None)
