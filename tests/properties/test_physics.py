"""Laws every spectrum obeys, on random operators. No outside source: each test states the law it rests on.

Levels are compared within the errors they report, so a law that holds exactly also tests that no error is too small.
"""

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from solved import EPS, all_same, points, sign_changes, spectrum

from specterm.analysis import moments, project
from specterm.language import parse
from specterm.model import build

COUNT = 6
FEW, SOME = settings(max_examples=8), settings(max_examples=15)


def hundredths(low, high):
    """Return a strategy for numbers with two decimals, so that sheets stay readable."""
    return st.integers(round(low * 100), round(high * 100)).map(lambda n: n / 100)


@st.composite
def cups(draw):
    """Draw a smooth confining potential of y: a quartic, at times with a ripple or a bump."""
    a, b, c, d = draw(hundredths(0.1, 2)), draw(hundredths(-1, 1)), draw(hundredths(-2, 3)), draw(hundredths(-2, 2))
    more = draw(st.sampled_from(["", " + cos(3*y)", " + 4*exp(-(y - 0.5)^2)", " - 3*sech(2*y)^2"]))
    return f"{a}*y^4 + {b}*y^3 + {c}*y^2 + {d}*y{more}"


@st.composite
def even_cups(draw):
    """Draw an even confining potential of y."""
    a, b, c = draw(hundredths(0.1, 2)), draw(hundredths(-2, 2)), draw(hundredths(-3, 3))
    return f"{a}*y^4 + {b}*y^2 + {c}*exp(-y^2)"


SCALES = st.sampled_from([1e-6, 1e-3, 0.03, 0.7, 11.0, 1e3, 1e6])


def place(potential, expression):
    """Return the potential with y replaced by an expression of x."""
    return potential.replace("y", f"({expression})")


def line(potential, kinetic="p^2/2", domain="(-inf, inf)", more=""):
    """Return a sheet of kinetic energy and potential."""
    return f"{more}H = {kinetic} + {potential}\nx in {domain}"


@SOME
@given(cups(), hundredths(-900, 900))
def test_a_constant_shifts_every_level(potential, shift):
    """H + c has the levels of H plus c."""
    y = place(potential, "x")
    all_same(spectrum(line(y), COUNT), spectrum(line(f"{y} + {shift}"), COUNT), shift=shift)


@SOME
@given(cups(), SCALES)
def test_scaling_the_length_changes_nothing(potential, scale):
    """With x = s z, p^2/2 + V(x) is p^2/(2 s^2) + V(s z)."""
    here = spectrum(line(place(potential, "x")), COUNT)
    all_same(here, spectrum(line(place(potential, "s*x"), "p^2/(2*s^2)", more=f"s = {scale}\n"), COUNT))


@SOME
@given(cups(), SCALES)
def test_scaling_the_energy_scales_every_level(potential, scale):
    """S H has the levels of H times s."""
    y = place(potential, "x")
    there = spectrum(line(f"s*({y})", "s*p^2/2", more=f"s = {scale}\n"), COUNT)
    all_same(spectrum(line(y), COUNT), there, scale=scale)


@SOME
@given(cups(), hundredths(-40, 40))
def test_moving_the_potential_moves_no_level(potential, shift):
    """V(x - a) has the levels of V(x); the rounding of x - a is part of the reported error."""
    all_same(spectrum(line(place(potential, "x")), COUNT), spectrum(line(place(potential, f"x - ({shift})")), COUNT))


@SOME
@given(cups())
def test_a_mirror_changes_no_level_and_turns_the_states(potential):
    """V(-x) has the levels of V(x), and its eigenstates are psi(-x) up to a sign."""
    here, there = spectrum(line(place(potential, "x")), COUNT), spectrum(line(place(potential, "-x")), COUNT)
    all_same(here, there)
    x, w = points(here)
    overlap = np.abs((here.states.evaluate(x) * there.states.evaluate(-x)) @ w)
    assert np.all(1 - overlap <= (here.vector_error + there.vector_error) ** 2 + 1e-13)


@SOME
@given(cups(), st.sampled_from([1e-3, 0.37, 2.5, 60.0]), SCALES)
def test_only_hbar_squared_over_mass_counts(potential, hbar, mass):
    """p^2/2m with hbar is p^2/2m' with hbar = 1 and m' = m/hbar^2."""
    y = place(potential, "x")
    one = spectrum(line(y, "p^2/(2*m)", more=f"hbar = {hbar}\nm = {mass}\n"), 4)
    other = spectrum(line(y, "p^2/(2*m)", more=f"m = {mass}/{hbar}^2\n"), 4)
    all_same(one, other)


@pytest.mark.parametrize("power", [1, 1.5, 2, 3, 4, 6, 8])
@FEW
@given(st.sampled_from([0.01, 0.8, 30.0]), st.sampled_from([1e-3, 1.0, 50.0]))
def test_virial_theorem(power, strength, mass):
    """For V = c |x|^k, 2 <T> = <x V'> = k <V>, and <T> + <V> is the level. 1e-9: second powers of states good to 1e-11."""
    text = line("c*abs(x)^k", "p^2/(2*m)", more=f"c = {strength}\nk = {power}\nm = {mass}\n")
    found, model = spectrum(text, COUNT), build(parse(text))
    x, w = points(found, 40)
    density = found.states.evaluate(x) ** 2 * w
    potential = density @ (strength * np.abs(x) ** power)
    for level in found.levels:
        kinetic = moments(model, found, level.index).spread_p ** 2 / (2 * mass)
        assert 2 * kinetic == pytest.approx(power * potential[level.index], rel=1e-9)
        assert kinetic + potential[level.index] == pytest.approx(level.value, rel=1e-9)


@SOME
@given(cups())
def test_the_index_is_the_number_of_nodes(potential):
    """Eigenstate n changes its sign n times (oscillation theorem), which is what `nodes` says."""
    found = spectrum(line(place(potential, "x")), 9)
    x, _ = points(found)
    for level, psi in zip(found.levels, found.states.evaluate(x), strict=True):
        assert sign_changes(psi) == level.index == level.nodes


@SOME
@given(cups(), hundredths(-0.9, 0.9))
def test_eigenstates_are_orthonormal(potential, tilt):
    """<m|n> is 1 or 0 within the errors claimed for the two states; with a vector potential the states are complex."""
    found = spectrum(line(place(potential, "x"), f"(p - {tilt}*x)^2/2"), 9)
    x, w = points(found)
    psi = found.states.evaluate(x)
    error = found.vector_error[:, None] + found.vector_error[None, :]
    assert np.all(np.abs((psi.conj() * w) @ psi.T - np.eye(9)) <= error + 1e-12)


@FEW
@given(cups(), hundredths(-1, 1), hundredths(0.25, 0.4), hundredths(-2, 2))
def test_weights_add_up_to_one(potential, centre, width, kick):
    """The weights of a packet never add up to more than 1, and to 1 once the levels reach far above its energy."""
    packet = f"\nstate packet = exp(-(x - ({centre}))^2/(4*{width}^2))*exp(i*({kick})*x)"
    text = line(place(potential, "x")) + packet
    model, found = build(parse(text)), spectrum(text, 70)
    held = project(model, found, "packet")
    error = sum(weight.error for weight in held.weights)
    assert held.captured <= 1 + error
    assert held.captured >= 1 - error - 1e-8
    few = project(model, spectrum(text, 3), "packet")
    for one, other in zip(few.weights, held.weights, strict=False):
        assert abs(one.weight - other.weight) <= one.error + other.error
        assert one.weight == pytest.approx(abs(one.amplitude) ** 2, rel=1e-14)


@FEW
@given(cups(), hundredths(-1, 1), hundredths(-0.5, 0.5), st.sampled_from(["(-inf, inf)", "(-1.3, 2.1)", "(-0.7, inf)"]))
def test_a_vector_potential_on_a_line_is_no_physics(potential, a, b, domain):
    """(p - A)^2/2 + V has the levels of p^2/2 + V for any A(x) in one dimension."""
    y = place(potential, "x")
    turned = spectrum(line(y, f"(p - ({a})*x - ({b})*x^2 - 0.3)^2/2", domain), COUNT)
    all_same(spectrum(line(y, domain=domain), COUNT), turned)


@SOME
@given(hundredths(-6, 6), hundredths(-3, 3), hundredths(0, 1), st.integers(-3, 3))
def test_a_whole_turn_of_phase_is_none(depth, second, phase, turns):
    """On a ring, phase and phase + 1 are the same, as are phase and -phase for real V, and p - k."""
    text = f"V = {depth}*cos(x) + ({second})*cos(2*x + 0.4)\nH = {{}} + V\nx in ring(0, 2*pi), phase {{}}"
    here = spectrum(text.format("p^2", phase), COUNT)
    for other in (text.format("p^2", phase + turns), text.format("p^2", -phase), text.format(f"(p - ({turns}))^2", phase)):
        all_same(here, spectrum(other, COUNT))


@FEW
@given(cups())
def test_walls_raise_levels_and_let_them_go(potential):
    """Walls that move out lower every level (min-max) down to those of the open line, where it ends within the errors."""
    y = place(potential, "x")
    free = spectrum(line(y), 4)
    before = [math.inf] * 4
    for wall in (1.5, 2.5, 4, 14):
        shut = spectrum(line(y, domain=f"(-{wall}, {wall})"), 4)
        for k, level in enumerate(shut.levels):
            assert free.levels[k].value - free.levels[k].error <= level.value + level.error
            assert level.value - level.error <= before[k]
            before[k] = level.value + level.error
    all_same(shut, free)


@SOME
@given(cups(), hundredths(0.01, 5), hundredths(-2, 2), hundredths(0.2, 2))
def test_more_potential_raises_every_level(potential, height, left, width):
    """Adding a positive bump raises all levels, by no more than its height (min-max)."""
    y = place(potential, "x")
    bump = f"{height}*(x > {left} and x < {left + width:.2f})"
    for low, high in zip(spectrum(line(y), COUNT).levels, spectrum(line(f"{y} + {bump}"), COUNT).levels, strict=True):
        slack = low.error + high.error
        assert low.value - slack <= high.value <= low.value + height + slack


@SOME
@given(cups(), st.sampled_from([("x^2", lambda x: x**2), ("cos(x)", np.cos), ("exp(-x^2)", lambda x: np.exp(-(x**2)))]))
def test_slopes_are_expectations(potential, term):
    """dE/dlam = <W> for H + lam W (Hellmann-Feynman), by central differences; two steps bound their bias."""
    word, function = term

    def at(lam):
        return spectrum(line(f"{place(potential, 'x')} + ({lam})*{word}"), 4)

    def slope(h):
        up, down = at(h), at(-h)
        return [
            ((a.value - b.value) / (2 * h), (a.error + b.error) / (2 * h)) for a, b in zip(up.levels, down.levels, strict=True)
        ]

    found = at(0)
    x, w = points(found)
    density = found.states.evaluate(x) ** 2 * w
    mean, square = density @ function(x), density @ function(x) ** 2
    for k, ((coarse, e1), (fine, e2)) in enumerate(zip(slope(2e-3), slope(1e-3), strict=True)):
        bias = abs(coarse - fine)  # the fine one is off by a third of it
        state = 2 * found.vector_error[k] * math.sqrt(square[k])
        assert abs(fine - mean[k]) <= e1 + e2 + bias + state + 1e-13 * abs(mean[k])


@SOME
@given(cups(), st.integers(4, 20))
def test_the_count_agrees_with_plain_differences(potential, count):
    """As many levels lie below the widest of the last gaps as a three-point matrix has negative pivots there (Sylvester)."""
    found = spectrum(line(place(potential, "x")), count)
    values = np.array([level.value for level in found.levels])
    gaps = np.diff(values)
    k = len(gaps) - 3 + int(np.argmax(gaps[-3:]))
    middle = (values[k] + values[k + 1]) / 2
    x = np.linspace(found.left, found.right, 6001)[1:-1]
    step = x[1] - x[0]
    potential_there = build(parse(line(place(potential, "x")))).operator.sturm().V(x)
    diagonal = 1 / step**2 + potential_there - middle
    assert negative_pivots(diagonal, -0.5 / step**2) == k + 1


def negative_pivots(diagonal, off):
    """Return the number of negative pivots of a symmetric tridiagonal matrix with constant neighbours."""
    pivot, count = math.inf, 0
    for value in diagonal.tolist():
        pivot = value - off * off / pivot
        count += pivot < 0
    return count


@SOME
@given(even_cups(), st.sampled_from([0.0, 0.25, -3.5]))
def test_parity_alternates(potential, centre):
    """In a potential even about some place the levels are even and odd in turn; the states are so about that place."""
    found = spectrum(line(place(potential, f"x - ({centre})")), COUNT)
    assert [level.parity for level in found.levels] == ["even", "odd"] * 3
    x = np.linspace(0, 3, 50)
    right, left = found.states.evaluate(centre + x), found.states.evaluate(centre - x)
    for k, level in enumerate(found.levels):
        sign = 1 if level.parity == "even" else -1
        assert np.allclose(right[k], sign * left[k], atol=1e-7)


@FEW
@given(hundredths(2, 30), hundredths(0.8, 2), st.sampled_from([6, 12, 25, 60]))
def test_two_far_copies_give_pairs(depth, width, distance):
    """Two equal wells far apart: each level of one well appears twice, split by less than its tail between the wells."""
    well = f"-{depth}*(abs(x - ({{}})) < {width / 2})"
    one = spectrum(line(well.format(0)), 1)
    single = spectrum(line(well.format(0)), one.bound)
    half = distance / 2
    double = spectrum(line(f"{well.format(half)} + {well.format(-half)}"), 2 * one.bound)
    for k, alone in enumerate(single.levels):
        tail = 8 * depth * math.exp(-math.sqrt(-2 * alone.value) * (distance - width))
        for level in double.levels[2 * k : 2 * k + 2]:
            if level.kind == "bound":
                assert abs(level.value - alone.value) <= tail + alone.error + level.error
    assert double.bound in {2 * one.bound, 2 * one.bound - 1}


@SOME
@given(cups(), st.integers(2, 25), st.integers(1, 6))
def test_levels_near_an_energy_are_those_of_the_whole_list(potential, middle, count):
    """Asked near an energy, the levels returned are the nearest ones, as many as asked, with the numbers of the whole list."""
    text = line(place(potential, "x"))
    whole = {level.index: level for level in spectrum(text, 40).levels}
    energy = whole[middle].value + 0.1 * (whole[middle + 1].value - whole[middle].value)
    near = spectrum(text, count, near=energy)
    nearest = sorted(whole.values(), key=lambda level: abs(level.value - energy))[:count]
    assert [level.index for level in near.levels] == sorted(level.index for level in nearest)
    for level in near.levels:
        other = whole[level.index]
        assert abs(level.value - other.value) <= level.error + other.error + 4 * EPS * abs(level.value)
