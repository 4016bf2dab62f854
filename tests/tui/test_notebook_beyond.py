"""The notebook where a result lies beyond what was computed, and where time passes between measurements."""

import math

import pytest
from fake import pressed, settled, typed, words

from specterm.tui.app import make_app
from specterm.tui.options import Options

FEW = "d = 3\nH = p^2/2 - d*exp(-x^2/2)\nx in (-inf, inf)\nstate s = exp(-(x - 30)^2)\n"
WELL = "H = p^2/2\nx in (0, pi)\nhalf = x < pi/2\nstate left = sin(x) + sin(2*x)\n"


async def test_a_result_beyond_ends_the_chain():
    """A state far outside the well gives no bound level: the entry has no value, and only a new preparation goes on."""
    async with make_app(FEW, None, Options(glyphs="braille")).run_test(size=(120, 40)) as pilot:
        await settled(pilot)
        await pressed(pilot, "6", "d")
        await typed(pilot, "x > 25")
        await pressed(pilot, "c", "L")
        await typed(pilot, "1")
        await pressed(pilot, "d")
        await typed(pilot, "H")
        await pressed(pilot, "c")
        entry = pilot.app.bench.notebook.entries[-1]
        assert (entry.kind, math.isnan(entry.value)) == ("measured", True)
        assert entry.probability == pytest.approx(1, abs=1e-3)
        assert "beyond what was computed" in words(pilot)
        assert "prepare a state anew" in words(pilot)
        count = len(pilot.app.bench.notebook.entries)
        await pressed(pilot, "c", "L")
        assert len(pilot.app.bench.notebook.entries) == count
        await pressed(pilot, "N")
        await typed(pilot, "level(0)")
        await pressed(pilot, "c")
        assert pilot.app.bench.notebook.entries[-1].value == pytest.approx(-2.228381214)


async def test_runs_wait_as_the_notebook_does():
    """Runs repeat the waits too: after half a beat of the two levels, 2 pi/3, the state is on the right (4 sigma)."""
    async with make_app(WELL, None, Options(glyphs="braille")).run_test(size=(120, 40)) as pilot:
        await settled(pilot)
        await pressed(pilot, "6", "L")
        await typed(pilot, f"{2 * math.pi / 3:.12f}")
        await pressed(pilot, "d")
        await typed(pilot, "half")
        await pressed(pilot, "c", "R", "ctrl+u")
        await typed(pilot, "2000")
        joints = pilot.app.painter.complete().answer.result.joints
        # the state turned: 1/2 - 4/(3 pi) on the left, from the closed form of the overlap of sin x and sin 2x
        share = 0.5 - 4 / (3 * math.pi)
        found = {joint.values: joint for joint in joints}[1.0,]
        assert found.probability == pytest.approx(share, abs=1e-6)
        assert abs(found.count - 2000 * share) < 4 * math.sqrt(2000 * share * (1 - share))
