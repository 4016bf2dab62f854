"""Every preset answers the verbs on states and lines, in text that fits 80 columns where it is drawn."""

import pytest

from specterm.session.presets import names

PRESETS = [name for name, _ in names()]
NEAR = {"edge-channel": ("--near", "0")}
SIZE = ("--width", "78", "--height", "18")
EMPTY = {"leaky-barrier"}
"""Binds nothing: there is no level to evolve, or to measure."""


def answered(run, *words):
    """Return what a verb answers; it may take an unresolved level as a reason to leave with 1, but never fails."""
    ran = run(*words)
    assert ran.status == 0, ran.err
    return ran.out


@pytest.mark.parametrize("preset", PRESETS)
def test_lines_and_matrices(run, preset):
    """Lines with their figure and the map of the momentum's matrix are drawn within 80 columns."""
    near = NEAR.get(preset, ())
    for words in (("transitions", preset, *SIZE), ("expectation", preset, "p", "--matrix", "--width", "78")):
        out = answered(run, *words, *near)
        framed = [line for line in out.splitlines() if "│" in line or "┌" in line or "░" in line]
        assert all(len(line) <= 80 for line in framed)


@pytest.mark.parametrize("preset", [p for p in PRESETS if p not in EMPTY])
def test_expectation_and_evolution(run, preset):
    """Means in the lowest level and the evolution of it are told."""
    near = NEAR.get(preset, ())
    assert "spread" in answered(run, "expectation", preset, "p", *near)
    assert "captured 1" in answered(run, "evolve", preset, "level(0)", "--times", "0:5:6", *SIZE, *near)
