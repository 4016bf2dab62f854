"""Every preset's derivatives against central differences of the solver (recomputed here, three steps extrapolated)."""

from functools import cache
from pathlib import Path

import numpy as np
import pytest

from specterm.analysis.sensitivities import sensitivities
from specterm.language import parse
from specterm.language.edits import plain_numbers, with_number
from specterm.model import build
from specterm.session.presets import presets
from specterm.spectrum import solve

FOLDER = Path(__file__).resolve().parent.parent.parent / "presets"
NAMES = [preset.name for preset in presets(FOLDER) if preset.name != "leaky-barrier"]
NEAR = {"edge-channel": 0.0}
COUNT = {"flat-band-ring": 3, "molecule-stretch": 5, "graded-mass": 2, "half-stack": 2}
STEPS = {("flat-band-ring", "L"): 1e-3, ("circuit-loop", "f"): 3e-4}


def levels(name, text):
    """Return the levels of a preset's changed text."""
    spectrum = solve(
        build(parse(text), folder=FOLDER), count=COUNT.get(name, 4), near=NEAR.get(name), tolerance=1e-10
    )
    return np.array([level.value for level in spectrum.levels])


@cache
def found(name):
    """Return text, levels and derivatives of a preset."""
    text = (FOLDER / f"{name}.sheet").read_text()
    model = build(parse(text), folder=FOLDER)
    spectrum = solve(model, count=COUNT.get(name, 4), near=NEAR.get(name))
    return text, spectrum, sensitivities(model, spectrum, FOLDER)


def differences(name, text, parameter):
    """Return central differences of the solver over steps h, 2 h and 3 h, extrapolated to order 6, and what they can be off."""
    value = plain_numbers(text)[parameter].value
    step = STEPS.get((name, parameter), 1e-2) * (abs(value) or 1.0)
    slopes = []
    for k in (1, 2, 3):
        up, down = (levels(name, with_number(text, parameter, repr(value + s * k * step))) for s in (1, -1))
        slopes.append((up - down) / (2 * k * step))
    best, rough = (15 * slopes[0] - 6 * slopes[1] + slopes[2]) / 10, (4 * slopes[0] - slopes[1]) / 3
    return best, np.abs(best - rough) + 1e-13 * np.abs(up).max() / step


@pytest.mark.parametrize("name", NAMES)
def test_preset_derivatives(name):
    """All derivatives agree with the solver's differences to 1e-6 of the largest, and within the error told and theirs."""
    text, spectrum, slopes = found(name)
    for parameter in slopes.parameters:
        known = slopes.column(parameter)
        if name == "rotor-torsion":
            assert np.isnan(known[3])
        else:
            assert np.isfinite(known).all()
        true, unsure = differences(name, text, parameter)
        kept = np.isfinite(known)
        off = np.abs(known - true)[kept]
        size = 1.0 if parameter == "tilt" else np.abs(true).max()
        assert off.max() <= 1e-6 * size, (parameter, off, size)
        told = slopes.errors[:, slopes.parameters.index(parameter)][kept]
        assert (off <= told + unsure[kept]).all(), (parameter, off, told)
    assert spectrum.complete
