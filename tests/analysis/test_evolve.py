"""Evolution by exact phases against closed forms."""

import math

import numpy as np
import pytest
from analysis_making import model, spectrum

from specterm.analysis import project
from specterm.analysis.capture import captured_by
from specterm.analysis.evolution import evolve, packet_of, revivals
from specterm.errors import PhysicsError

OSCILLATOR = (
    "H = p^2/2 + x^2/2\nx in (-inf, inf)\nstate s = exp(-(x - 1)^2/2)\nstate two = sqrt(0.3)*level(0) + sqrt(0.7)*level(1)"
)
WALLS = "H = p^2/2\nx in (0, 1)\nstate mix = level(0) + level(1) + level(2)\nstate flat = 1"


def course(text, state, times, count=24, **options):
    """Return the evolution of a state of a sheet."""
    return evolve(model(text), spectrum(text, count), state, times, **options)


def test_coherent_state():
    """Survival exp(-|1 - exp(-i t)|^2/2), <x> = cos t, spread 1/sqrt 2 for ever (closed form for a displaced ground state)."""
    times = np.linspace(0, 9, 19)
    found = course(OSCILLATOR, "s", times)
    expected = np.exp(-(np.abs(1 - np.exp(-1j * times)) ** 2) / 2)
    assert (np.abs(found.survival - expected) <= found.survival_error).all()
    assert found.survival_error.max() < 1e-8
    assert np.allclose(found.mean, np.cos(times), atol=1e-9)
    assert np.allclose(found.spread, math.sqrt(0.5), atol=1e-9)
    assert found.classical == pytest.approx(2 * math.pi, rel=1e-9)
    assert found.revival is None


def test_momentum_of_a_coherent_state():
    """<p> = -sin t, spread 1/sqrt 2 (closed form)."""
    times = np.linspace(0, 5, 7)
    found = course(OSCILLATOR, "s", times, observed="p")
    assert np.allclose(found.mean, -np.sin(times), atol=1e-9)
    assert np.allclose(found.spread, math.sqrt(0.5), atol=1e-8)


def test_two_levels_beat():
    """Survival 1 - 4 * 0.3 * 0.7 sin^2(t/2), period 2 pi (closed form)."""
    times = np.linspace(0, 20, 11)
    found = course(OSCILLATOR, "two", times)
    assert (np.abs(found.survival - (1 - 0.84 * np.sin(times / 2) ** 2)) <= found.survival_error).all()
    assert (found.classical, found.revival) == (pytest.approx(2 * math.pi), None)


def test_energy_does_not_move():
    """Mean and spread of the operator itself are constants of the motion."""
    found = course(OSCILLATOR, "s", [0, 0.3, 11.0, 1e3], observed="H")
    assert np.allclose(found.mean, 1.0, atol=1e-9)
    assert np.allclose(found.spread, math.sqrt(0.5), atol=1e-8)


def test_revival_between_walls():
    """Between walls all comes back after 4/pi, whatever the state: E = pi^2 n^2/2 (closed form)."""
    found = course(WALLS, "mix", [4 / math.pi], 3)
    assert found.survival[0] == pytest.approx(1, abs=1e-10)
    assert found.revival == pytest.approx(4 / math.pi, rel=1e-10)


def test_packet_keeps_its_norm():
    """The density of the packet integrates to the captured share at every time."""
    found = spectrum(OSCILLATOR, 24)
    packet = packet_of(model(OSCILLATOR), found, project(model(OSCILLATOR), found, "s"))
    x = np.linspace(-9, 9, 4001)
    density = np.abs(packet.wave(x, np.array([0.0, 1.1, 40.0]))) ** 2
    assert np.allclose(np.trapezoid(density, x, axis=1), 1, atol=1e-9)


def test_what_is_not_captured_widens_the_error():
    """With two levels of a state that needs more, the true survival lies within the error told, and a note says so."""
    times = np.linspace(0, 6, 13)
    found = course(OSCILLATOR, "s", times, 3)
    expected = np.exp(-(np.abs(1 - np.exp(-1j * times)) ** 2) / 2)
    assert (np.abs(found.survival - expected) <= found.survival_error).all()
    assert any("captured" in note or "levels" in note for note in found.notes)


def test_a_state_mostly_beyond_the_levels_is_refused():
    """Where the levels hold less than half of the state its evolution is not told."""
    far = "H = p^2/2 + x^2/2\nx in (-inf, inf)\nstate far = exp(-(x - 6)^2/2)"
    with pytest.raises(PhysicsError, match="hold only"):
        course(far, "far", [1.0], 4)


def test_as_many_levels_as_a_share_needs():
    """To hold 1 - 1e-10 of a coherent state of mean 18 levels are added until the Poisson sum is there (closed form)."""
    far = "H = p^2/2 + x^2/2\nx in (-inf, inf)\nstate far = exp(-(x - 6)^2/2)"
    found, weights = captured_by(model(far), "far", 1 - 1e-10)
    assert weights.captured >= 1 - 1e-10
    assert len(found.levels) == 64
    with pytest.raises(PhysicsError, match="share"):
        captured_by(model(far), "far", 1.5)


def test_bound_levels_that_cannot_hold_a_state():
    """Where the bound levels hold less than asked for, those are returned and say how much (a well with one level)."""
    well = "H = p^2 - 1.5/cosh(x)^2\nx in (-inf, inf)\nstate wide = exp(-(x/4)^2)"
    found, weights = captured_by(model(well), "wide", 0.9999)
    assert len(found.levels) == found.bound
    assert weights.captured < 0.9999


def test_revivals_need_levels():
    """One level neither beats nor revives."""
    found = spectrum(WALLS, 1)
    assert revivals(model(WALLS), project(model(WALLS), found, "level(0)")) == (None, None)


def test_times_too_long_for_the_phases():
    """Far beyond hbar over the errors of the levels nothing is known: the survival has error 1 and a note says so."""
    found = evolve(model(WALLS), spectrum(WALLS, 8), "level(1)", [0.0, 1.0])
    assert not any("phases" in note for note in found.notes)
    text = WALLS + "\nstate both = level(0) + level(1)"
    late = evolve(model(text), spectrum(text, 8), "both", [0.0, 1e20])
    assert late.survival_error[1] == 1
    assert any("from time 1e+20 on" in note for note in late.notes)
    with pytest.raises(PhysicsError, match="beyond all numbers"):
        evolve(model(text), spectrum(text, 8), "both", [1e308])


def test_a_share_out_of_reach_is_not_chased():
    """A constant between walls jumps at them: 1 - 1e-9 of it is out of reach of 300 levels, and 128 tell as much."""
    found, weights = captured_by(model(WALLS), "flat", 1 - 1e-9, most=300)
    assert len(found.levels) == 128
    assert weights.captured == pytest.approx(1 - 4 / (np.pi**2 * 128), abs=1e-4)
    found, weights = captured_by(model(WALLS), "flat", 0.999, most=1000)
    assert weights.captured >= 0.999
