"""Solutions in a process of their own: the same levels, an end that really is one, words when the process dies."""

import os
import signal
import threading
import time
from pathlib import Path

import pytest
from fake import settled

from specterm.errors import PhysicsError, SheetError, WorkStopped
from specterm.tui import child, work
from specterm.tui.app import make_app
from specterm.tui.child import ChildEngine
from specterm.tui.options import Options
from specterm.tui.solving import BuiltIn, Request, compute

WELL = "L = 2\nH = p^2/2\nx in (0, L)\n"
LONG = "H = p^2 + x^4\nx in (-inf, inf)\n"


def outcome(text, count=5, stop=lambda: False, **more):
    """Return what comes of a sheet solved in a child."""
    request = Request(1, text, Path(), count, **more)
    return compute(ChildEngine(BuiltIn(), request), request, stop, lambda _: None)


def test_a_child_finds_the_same_levels():
    """Levels, errors and states of a child are those of this process, overrides included."""
    request = Request(1, WELL, Path(), 5, overrides={"L": "3"})
    here = compute(BuiltIn(), request, lambda: False, lambda _: None)
    there = outcome(WELL, overrides={"L": "3"})
    assert there.error is None
    assert there.spectrum.levels == here.spectrum.levels
    assert (there.spectrum.states.evaluate([1.0]) == here.spectrum.states.evaluate([1.0])).all()


def test_what_a_child_refuses_is_told_as_here():
    """An error of the child comes back with its kind and its words."""
    found = outcome("H = p^2 - x^4\nx in (-inf, inf)\n")
    assert isinstance(found.error, (PhysicsError, SheetError))
    assert "failed" not in found.error.message


def test_what_cannot_be_handed_over_is_solved_here():
    """First-order levels on a ring carry functions that no pipe takes: they are found in this process."""
    text = "drift = p\ndiagonalise drift\nx in ring(0, 6)\n"
    found = outcome(text, 3, near=0.0)
    assert found.error is None
    assert len(found.spectrum.levels) == 3


def test_stopping_ends_the_process(monkeypatch):
    """When asked to stop, the child is gone at once."""
    started = []
    popen = child.subprocess.Popen
    monkeypatch.setattr(child.subprocess, "Popen", lambda *a, **k: started.append(popen(*a, **k)) or started[-1])
    asked = []

    def stop():
        asked.append(1)
        return len(asked) > 20

    assert isinstance(outcome(LONG, 3000, stop).error, WorkStopped)
    assert started[0].poll() is not None


@pytest.mark.parametrize("number", [signal.SIGKILL, signal.SIGTERM])
def test_a_child_that_is_killed_is_told(monkeypatch, number):
    """A child ended from outside, as the system does for want of memory, gives words and no dead screen."""
    started = []
    popen = child.subprocess.Popen
    monkeypatch.setattr(child.subprocess, "Popen", lambda *a, **k: started.append(popen(*a, **k)) or started[-1])

    def kill():
        while not started:
            time.sleep(0.01)
        os.kill(started[0].pid, number)

    threading.Thread(target=kill).start()
    found = outcome(LONG, 3000)
    assert "ended from outside" in found.error.message


def test_a_child_ends_with_its_parent():
    """When the parent's end of the pipe closes, the child goes."""
    with child._child() as process:
        child._send(process.stdin, Request(1, LONG, Path(), 3000))
        process.stdin.close()
        assert process.wait(timeout=60) != 0


def test_memory_is_bounded(monkeypatch):
    """A child that runs out of the memory it may take says so."""
    monkeypatch.setattr("specterm.discrete.memory.memory_left", lambda: 1e3)
    found = child._answer(Request(1, LONG, Path(), 5000), lambda _: None)
    assert found[0] in ("PhysicsError", "SheetError")
    assert "GB" in found[1][0] or "memory" in found[1][0]


async def test_long_work_goes_to_a_child(monkeypatch):
    """What lasts longer than allowed here is solved again in a child, and its levels are shown."""
    monkeypatch.setattr(work, "_HERE", 0.0)
    async with make_app(WELL, None, Options(glyphs="braille")).run_test(size=(80, 24)) as pilot:
        for _ in range(600):
            await settled(pilot)
            if pilot.app.shown.outcome is not None:
                break
        assert pilot.app.shown.outcome.error is None
        assert pilot.app.shown.outcome.spectrum.levels[0].value == pytest.approx(3.141592653589793**2 / 8, rel=1e-10)
