"""The one place for users of the package."""

import subprocess
import sys

import pytest

from specterm.analysis import physics
from specterm.language import parse
from specterm.model import build


def test_every_name_is_there():
    """All names promised exist, and functions are functions, not the modules of the same name."""
    for name in physics.__all__:
        assert callable(getattr(physics, name)), name


def test_from_sheet_to_physics():
    """A few lines lead from a sheet to means, lines, outcomes and times (closed forms of the oscillator)."""
    model = build(parse("H = p^2/2 + x^2/2\nx in (-inf, inf)\nstate s = exp(-(x - 1)^2/2)"))
    spectrum = physics.solve(model, count=24)
    assert physics.expectation(model, spectrum, "x", "s").mean == pytest.approx(1, abs=1e-9)
    assert physics.transitions(model, spectrum).sums[0] == pytest.approx(1, abs=1e-9)
    assert physics.evolve(model, spectrum, "s", [3.141592653589793]).mean[0] == pytest.approx(-1, abs=1e-8)
    course = physics.course_of(model, spectrum, "s", ["H"])
    assert physics.measure(course, "s", 1) == physics.measure(course, "s", 1)


def test_levels_alone_do_not_load_it():
    """`specterm levels` needs neither this module nor scipy."""
    command = "main(['levels', '-e', 'H = p^2; x in (0, 1)'])"
    words = f"import sys; from specterm.cli import main; {command}; print(sorted(sys.modules))"
    ran = subprocess.run([sys.executable, "-c", words], capture_output=True, text=True, check=True, timeout=60)
    assert "specterm.analysis.physics" not in ran.stdout
    assert "'scipy" not in ran.stdout
    assert "specterm.analysis.measurement" not in ran.stdout
