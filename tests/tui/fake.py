"""An engine for the screen's tests: the harmonic oscillator whatever the sheet says, and errors on request."""

from __future__ import annotations

import asyncio
import time
from types import SimpleNamespace

import numpy as np
import standin

from specterm.errors import PhysicsError, SheetError, Span, WorkStopped
from specterm.tui.app import make_app
from specterm.tui.options import Options

SHEET = "# An oscillator (invented)\nH = p^2/2 + x^2/2\nx in (-inf, inf)\nstate packet = exp(-(x-1)^2/2)\n"


def unknown(text):
    """Know no observable."""
    raise SheetError(f"unknown name {text!r}", mend="this engine has no observables")


class FakeEngine:
    """`bad` in a sheet cannot be understood, with `unphysical` there are no levels, `slow` waits, `deaf` does not listen."""

    def __init__(self):
        """Count what is asked."""
        self.solved = []
        self.gate = None

    def build(self, text, folder, overrides):
        """Return a model of the right shape."""
        del folder, overrides
        if "bad" in text:
            place = text.index("bad")
            raise SheetError("unknown name 'bad'", mend="define it", span=Span(place, place + 3))
        units = SimpleNamespace(energy="meV", length="nm", time="ps", mass="m_e")
        domain = SimpleNamespace(coordinate="x", left=-np.inf, right=np.inf, left_end="open", right_end="open")
        states = tuple(line.split()[1] for line in text.split("\n") if line.startswith("state "))
        parts = {"units": units, "domain": domain, "states": states, "coordinate_unit": "nm"}
        parts |= {"main": "H", "plain": (), "operators": {}, "functions": {}}
        return SimpleNamespace(text=text, warnings=(), hbar=0.5, observable=unknown, **parts)

    def solve(self, model, *, count, near, tolerance, should_stop, progress):
        """Return the oscillator's levels."""
        del near, tolerance
        self.solved.append((model.text, count))
        progress("bracketing")
        if "unphysical" in model.text:
            raise PhysicsError("H has no lowest level", mend="check the sign")
        if "deaf" in model.text:
            time.sleep(60)
        while "slow" in model.text and not should_stop():
            self.gate.wait(0.01)
        if should_stop():
            raise WorkStopped("stopped")
        if "crash" in model.text:
            raise ZeroDivisionError("by zero")
        return standin.spectrum(count or 6)

    def potential(self, model, x):
        """Return x^2/2."""
        del model
        return standin.potential(x)

    def moments(self, model, spectrum, index):
        """Return the oscillator's moments: the spreads are sqrt(n + 1/2)."""
        del model, spectrum
        spread = (index + 0.5) ** 0.5
        return SimpleNamespace(x=0.0, spread_x=spread, p=0.0, spread_p=spread)

    def project(self, model, spectrum, name, folder):
        """Return Poisson weights of mean 1/2, those of a displaced ground state."""
        del model, folder
        weight, found = np.exp(-0.5), []
        for level in spectrum.levels:
            found.append(SimpleNamespace(index=level.index, value=level.value, weight=weight, error=1e-9, amplitude=1j))
            weight *= 0.5 / (level.index + 1)
        wave = lambda x: np.pi**-0.25 * np.exp(-((np.asarray(x) - 1) ** 2) / 2) + 0j  # noqa: E731 - a wave is a callable
        captured = sum(weight.weight for weight in found)
        return SimpleNamespace(state=name, weights=tuple(found), captured=captured, mean=1.0, spread=0.7, notes=(), wave=wave)


def app(text=SHEET, path=None, **options):
    """Return an app around the fake engine."""
    return make_app(text, path, Options(glyphs="braille", **options), FakeEngine())


async def settled(pilot):
    """Wait until no computation runs and all is drawn."""
    app = pilot.app
    for _ in range(400):
        await pilot.pause()
        if app._pause is None and not app.work.busy and not app.painter.waiting and app.work.resting:
            break
        await asyncio.sleep(0.01)
    await pilot.pause()


def lines(pilot):
    """Return the screen as lines of text."""
    height = pilot.app.size.height
    strips = pilot.app.screen._compositor.render_strips()
    return ["".join(segment.text for segment in strip).rstrip() for strip in strips][:height]


async def pressed(pilot, *keys):
    """Press keys and wait until all they started is done."""
    await pilot.press(*keys)
    await settled(pilot)


async def typed(pilot, text):
    """Type text into a dialog and take it."""
    await pilot.press(*text, "enter")
    await settled(pilot)


def words(pilot):
    """Return the screen as one text."""
    return "\n".join(lines(pilot))
