"""Kinds of terminals: colours, glyphs, sizes, multiplexers, slow and silent ones; each in a real pseudo-terminal."""

import base64
import re
import shutil
import subprocess
import sys
import uuid

import pytest
from test_terminal import CHILD, Session

from specterm.tui.cell_pane import LOOKS
from specterm.tui.layout import SMALLEST

QUESTION = b"\x1b[6n"
_COLOUR = re.compile(rb"\x1b\[([0-9;:]*)m")


def colours(raw):
    """Return all numbers in the colour sequences of some output."""
    return {int(number) for found in _COLOUR.findall(raw) for number in re.split(rb"[;:]", found) if number}


@pytest.mark.parametrize(
    "environ",
    [
        {"COLORTERM": "truecolor"}, {}, {"TERM": "xterm"}, {"TERM": "screen"}, {"TERM": "vt100"}, {"TERM": "linux"},
        {"TERM": "screen-256color", "STY": "1.here", "COLORTERM": "truecolor"}, {"NO_COLOR": "1", "COLORTERM": "truecolor"},
    ],
)  # fmt: skip
def test_every_tier_of_colour(tmp_path, environ):
    """With true colour, 256, 16 or none the screen is whole, and only the terminal's own sixteen colours are used."""
    session = Session(tmp_path, size=(120, 40), **{"COLORTERM": "", **environ})
    session.until("complete")
    session.child.send("k")
    session.until(">1")
    session.until("psi, level 1")
    session.child.send("q")
    status, raw = session.end()
    assert status == 0
    used = colours(raw)
    assert used <= {0, 1, 2, 4, 7, *range(30, 38), 39, *range(40, 48), 49, *range(90, 98)}
    assert 38 not in used
    assert ("NO_COLOR" in environ) == (not used & {31, 35})


def _contrast(one, other):
    """Return the contrast of two colours (r, g, b up to 255) as WCAG 2.1 defines it (w3.org/TR/WCAG21, from memory)."""

    def luminance(colour):
        parts = [part / 255 for part in colour]
        linear = [part / 12.92 if part <= 0.03928 else ((part + 0.055) / 1.055) ** 2.4 for part in parts]
        return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]

    light, dark = sorted((luminance(one), luminance(other)), reverse=True)
    return (light + 0.05) / (dark + 0.05)


def test_colours_are_read_on_black_and_on_white():
    """Every colour used has a contrast of 3 or more with black and with white, by xterm's usual values (from memory)."""
    xterm = {"red": (205, 0, 0), "magenta": (205, 0, 205)}
    for style in LOOKS.values():
        if style.color is not None:
            assert _contrast(xterm[style.color.name], (0, 0, 0)) >= 3
            assert _contrast(xterm[style.color.name], (255, 255, 255)) >= 3
        assert style.bgcolor is None


@pytest.mark.parametrize(("environ", "glyphs"), [({"LC_ALL": "C"}, "ascii"), ({"TERM": "linux"}, "block"), ({}, "braille")])
def test_glyphs_come_from_the_locale(tmp_path, environ, glyphs):
    """Without UTF-8 the screen is plain ASCII, on a Linux console it has blocks, else braille; g changes that at any time."""
    session = Session(tmp_path, command=["-m", "specterm"], **environ)
    session.until("complete")
    seen = "".join(session.screen.display)
    assert ("⠤" in seen or "⡇" in seen) == (glyphs == "braille")
    assert ("▘" in seen or "▌" in seen or "▐" in seen) == (glyphs == "block")
    assert seen.isascii() == (glyphs == "ascii")
    session.child.send("g")
    session.until({"ascii": "glyphs: braille", "block": "glyphs: ascii", "braille": "glyphs: block"}[glyphs])
    session.child.send("q")
    assert session.end()[0] == 0


@pytest.mark.parametrize("kind", ["dumb", "unknown"])
def test_a_dumb_terminal_gets_text(tmp_path, kind):
    """With TERM=dumb levels and figure come as text, without a control character, and one line says why."""
    session = Session(tmp_path, command=["-m", "specterm"], TERM=kind)
    status, raw = session.end()
    assert status == 0
    assert b"\x1b" not in raw
    assert raw.decode().count("draws no screen") == 1
    assert "0.5" in raw.decode()


def test_any_size_at_any_moment(tmp_path):
    """However the window changes the session goes on; too small, it says what it needs, and nothing typed is lost."""
    session = Session(tmp_path)
    session.until("complete")
    session.child.send("e")
    session.until("Tab back")
    for rows, columns in ((5, 20), (1, 1), (60, 200), (12, 300), (3, 100), (SMALLEST[1], SMALLEST[0]), (8, 30)):
        session.resize(columns, rows)
        session.child.send("#")
    session.until("too small")
    session.until(f"{SMALLEST[0]} x")
    session.resize(100, 30)
    session.until("#######H")
    session.child.send("\t")
    session.child.send("qd")
    status, raw = session.end()
    assert status == 0
    assert session.sane(raw)


def test_copying(tmp_path):
    """The y key writes a file, shows its path, and sends the same text to the terminal's clipboard."""
    session = Session(tmp_path, size=(120, 40))
    session.until("complete")
    session.child.send("y")
    session.until("copied.txt")
    session.child.send("q")
    _, raw = session.end()
    (sent,) = re.findall(rb"\x1b\]52;c;([A-Za-z0-9+/=]*)\x07", raw)
    assert base64.b64decode(sent).decode() == (session.state / "specterm" / "copied.txt").read_text()


def test_no_answer_is_left_for_the_shell(tmp_path):
    """However late the terminal answers, the session ends after the answer to its last question, and asks none when idle."""
    session = Session(tmp_path, answers=False)
    session.until("complete")
    for _ in range(20):
        session.answer()
        session.child.send("k")
        session.listen(0.05)
    session.child.send("q")
    while session.child.isalive() and session.listen(0.1):
        session.answer()
    session.answer()
    status, raw = session.end()
    assert status == 0
    assert raw.count(QUESTION) == session.answered


def test_a_silent_terminal_is_served_all_the_same(tmp_path):
    """A terminal that never answers sees the end of whatever keys come, and q still ends the session."""
    session = Session(tmp_path, answers=False)
    session.until("complete")
    session.child.send("kkkkkjjjkk")
    session.until("psi, level 4")
    session.child.send("q")
    assert session.end()[0] == 0


def test_idle_is_silent_and_a_step_is_small(tmp_path):
    """At 120x40 a step takes less than 14 kB at 256 colours (the budget of the design), and then nothing is sent."""
    session = Session(tmp_path, size=(120, 40))
    session.until("complete")
    session.listen(1.0)
    before = len(session.raw)
    session.child.send("k")
    session.until("psi, level 1")
    session.listen(1.0)
    assert 0 < len(session.raw) - before < 14_000
    before = len(session.raw)
    session.listen(1.5)
    assert len(session.raw) == before


def test_inside_tmux(tmp_path):
    """Inside tmux the screen is whole, keys step, and q gives the pane back."""
    tmux = shutil.which("tmux")
    if tmux is None:
        pytest.skip("there is no tmux here")
    socket = f"specterm-test-{uuid.uuid4().hex[:8]}"
    words = [tmux, "-L", socket, "-f", "/dev/null", "new-session", sys.executable, str(CHILD), "SHEET"]
    session = Session(tmp_path, size=(100, 30), program=words, COLORTERM="truecolor")
    session.until("complete")
    session.child.send("kk")
    session.until("psi, level 2")
    session.child.send("y")
    session.until("written to")
    session.child.send("q")
    session.until("[exited]")
    assert session.end()[0] == 0
    gone = subprocess.run([tmux, "-L", socket, "list-sessions"], capture_output=True, check=False)
    assert gone.returncode != 0


def test_inside_screen(tmp_path):
    """Inside GNU screen the screen is whole, keys step, and q gives the window back."""
    program = shutil.which("screen")
    if program is None:
        pytest.skip("there is no screen here")
    name = f"specterm-test-{uuid.uuid4().hex[:8]}"
    (tmp_path / "rooms").mkdir(mode=0o700)
    words = [program, "-c", "/dev/null", "-U", "-S", name, sys.executable, str(CHILD), "SHEET"]
    session = Session(tmp_path, size=(100, 30), program=words, COLORTERM="truecolor", SCREENDIR=str(tmp_path / "rooms"))
    session.until("complete")
    session.child.send("kk")
    session.until("psi, level 2")
    session.child.send("q")
    assert session.end()[0] == 0
