"""The whole interface in a real pseudo-terminal: what reaches the terminal, and how it is left."""

import os
import re
import signal
import subprocess
import sys
import time
from pathlib import Path

import pexpect
import pyte
import pytest

from specterm.session.saved import saved_from
from specterm.tui import terminal

CHILD = Path(__file__).parent / "child.py"
REPO = CHILD.parent.parent.parent
SHEET = "H = p^2/2 + x^2/2\nx in (-inf, inf)\n"


class Session:
    """A child in a pseudo-terminal, with its screen read through pyte; questions of the child are answered."""

    name, text, beside = "well.sheet", SHEET, False

    def __init__(self, folder, size=(80, 24), command=None, program=None, answers=True, **environ):
        """Start the child on a sheet in `folder`: the tests' own, `command` of Python, or `program` with SHEET in its words."""
        self.path = folder / self.name
        self.path.write_text(self.text)
        self.state = folder / "state"
        inherited = {name: value for name, value in os.environ.items() if name not in ("TMUX", "STY", "COLORTERM", "NO_COLOR")}
        env = {**inherited, "TERM": "xterm-256color", "LANG": "C.UTF-8", "PYTHONPATH": str(REPO), **environ}
        env["XDG_STATE_HOME"] = str(self.state)
        columns, rows = size
        words = program or [sys.executable, *(command or [str(CHILD)]), "SHEET"]
        words = [(self.name if self.beside else str(self.path)) if word == "SHEET" else word for word in words]
        self.child = pexpect.spawn(words[0], words[1:], dimensions=(rows, columns), env=env, timeout=30, cwd=folder)
        self.screen = pyte.Screen(columns, rows)
        self.stream = pyte.ByteStream(self.screen)
        self.raw = b""
        self.answers, self.answered = answers, 0

    def listen(self, seconds):
        """Take what the child sends within some seconds, at least one look; return False once it has ended."""
        end = time.monotonic() + seconds
        while True:
            try:
                data = self.child.read_nonblocking(65536, timeout=0.05)
            except pexpect.TIMEOUT:
                data = b""
            except pexpect.EOF:
                return False
            self.raw += data
            if b"\x1b[?2026$p" in data:
                self.child.send(b"\x1b[?2026;2$y")
            if self.answers:
                self.answer()
            self.stream.feed(re.sub(rb"\x1b\[[<>][0-9;]*u|\x1b\[\?[0-9;]*\$p", b"", data))
            if time.monotonic() >= end:
                return True

    def answer(self):
        """Answer the questions about the cursor that have no answer yet."""
        while self.raw.count(b"\x1b[6n") > self.answered:
            self.answered += 1
            self.child.send(b"\x1b[1;1R")

    def resize(self, columns, rows):
        """Change the size of the window."""
        self.child.setwinsize(rows, columns)
        self.screen.resize(rows, columns)

    def until(self, words, seconds=30.0):
        """Read until `words` stand on the screen; fail with the screen when they do not come."""
        end = time.monotonic() + seconds
        while time.monotonic() < end:
            lives = self.listen(0.0)
            if words in "\n".join(self.screen.display):
                return
            if not lives:
                break
        pytest.fail(f"{words!r} did not come:\n" + "\n".join(self.screen.display))

    def end(self):
        """Wait for the end; return exit status and the last bytes."""
        rest = self.child.read()
        self.child.wait()
        return self.child.exitstatus, self.raw + rest

    def sane(self, raw):
        """Return whether the terminal was given back: no alternate screen, cursor shown, cooked mode."""
        return raw.rindex(b"\x1b[?1049l") > raw.rindex(b"\x1b[?1049h") and raw.rindex(b"\x1b[?25h") > raw.rindex(b"\x1b[?25l")


def test_start_step_and_quit(tmp_path):
    """A session starts, steps, quits with q and status 0, and the terminal is as it was; the mouse stays off."""
    session = Session(tmp_path, size=(120, 40))
    session.until("psi, level 0")
    session.until("complete")
    session.child.send("k")
    session.until("psi, level 1")
    session.child.send("\x1b[A")
    session.until("psi, level 2")
    session.child.send("q")
    status, raw = session.end()
    assert status == 0
    assert session.sane(raw)
    assert b"\x1b[?1000h" not in raw
    assert b"\x1b[?1003h" not in raw


def test_typing_in_a_real_terminal(tmp_path):
    """Letters typed at once after e are text, ctrl+s writes it, flow control notwithstanding, and q after Tab quits."""
    session = Session(tmp_path)
    session.until("complete")
    session.child.send("e# hi \x13")
    session.until(" saved /")
    assert session.path.read_text() == "# hi " + SHEET
    session.child.send("\tq")
    assert session.end()[0] == 0


@pytest.mark.parametrize(("number", "status"), [(signal.SIGTERM, 143), (signal.SIGHUP, 129)])
def test_signals_keep_the_text_and_the_terminal(tmp_path, number, status):
    """SIGTERM and SIGHUP end the session in order: unsaved text is kept, the terminal is given back."""
    session = Session(tmp_path)
    session.until("complete")
    session.child.send("e")
    session.until("Tab back")
    session.child.send("#")
    session.until("unsaved")
    session.child.kill(number)
    found, raw = session.end()
    assert found == status
    assert session.sane(raw)
    assert session.path.read_text() == SHEET
    (kept,) = (session.state / "specterm" / "sessions").glob("well-*.json")
    assert saved_from(kept.read_text()).document.text == "#" + SHEET


def test_a_closed_connection_ends_the_session(tmp_path):
    """When the terminal goes away the child ends, and unsaved text is kept."""
    session = Session(tmp_path)
    session.until("complete")
    session.child.send("e")
    session.until("Tab back")
    session.child.send("#")
    session.until("unsaved")
    os.close(session.child.child_fd)
    end = time.monotonic() + 20
    while time.monotonic() < end and Path(f"/proc/{session.child.pid}/stat").read_text().rpartition(")")[2].split()[0] != "Z":
        time.sleep(0.05)
    assert Path(f"/proc/{session.child.pid}/stat").read_text().rpartition(")")[2].split()[0] == "Z"
    (kept,) = (session.state / "specterm" / "sessions").glob("well-*.json")
    assert saved_from(kept.read_text()).document.text == "#" + SHEET
    os.waitpid(session.child.pid, 0)


def test_a_defect_leaves_words_and_the_text(tmp_path):
    """A defect of the screen itself shows no traceback, keeps unsaved text and says where it and the details are."""
    session = Session(tmp_path, SPECTERM_TEST_DEFECT="1")
    session.until("complete")
    session.child.send("e")
    session.until("Tab back")
    session.child.send("#")
    session.until("unsaved")
    session.child.send("\tv")
    status, raw = session.end()
    assert status == 1
    assert session.sane(raw)
    said = raw[raw.rindex(b"\x1b[?1049l") :]
    assert b"specterm failed; details are in" in said
    assert b"Traceback" not in raw
    assert "ZeroDivisionError" in (session.state / "specterm" / "log").read_text()
    (kept,) = (session.state / "specterm" / "sessions").glob("well-*.json")
    assert str(kept).encode() in said.replace(b"\r\n", b"\n")


def test_without_colour(tmp_path):
    """With NO_COLOR no colour is sent, and everything is still there."""
    session = Session(tmp_path, NO_COLOR="1")
    session.until("complete")
    session.child.send("q")
    status, raw = session.end()
    assert status == 0
    assert not re.search(rb"\x1b\[[0-9;]*(3[0-7]|38;5|38;2|9[0-7])[;m]", raw)


def test_no_terminal_is_told_apart(tmp_path):
    """With a pipe, or with TERM=dumb, `usable` says no, before anything heavy is imported."""
    (tmp_path / "a.sheet").write_text(SHEET)
    env = {**os.environ, "PYTHONPATH": str(REPO), "TERM": "xterm"}
    done = subprocess.run([sys.executable, CHILD, tmp_path / "a.sheet"], env=env, capture_output=True, text=True, check=False)
    assert (done.returncode, done.stdout) == (2, "no terminal\n")
    session = Session(tmp_path, TERM="dumb")
    assert session.end()[0] == 2


def test_importing_the_entry_is_light():
    """Importing `specterm.tui` brings neither textual nor numpy with it."""
    code = "import sys, specterm.tui; print([m for m in ('textual', 'numpy', 'rich', 'scipy') if m in sys.modules])"
    env = {**os.environ, "PYTHONPATH": str(REPO)}
    assert subprocess.run([sys.executable, "-c", code], env=env, capture_output=True, text=True, check=True).stdout == "[]\n"


def test_environment_is_settled():
    """Sizes are asked of the terminal, threads are one, GNU screen gets 256 colours and tmux keeps its own."""
    environ = {"COLUMNS": "10", "LINES": "5", "TERM": "screen-256color", "STY": "1.a"}
    terminal.settle(environ)
    assert "COLUMNS" not in environ
    assert environ["OPENBLAS_NUM_THREADS"] == "1"
    assert environ["TEXTUAL_COLOR_SYSTEM"] == "256"
    inside = {"TERM": "screen-256color", "TMUX": "x", "OMP_NUM_THREADS": "2"}
    terminal.settle(inside)
    assert "TEXTUAL_COLOR_SYSTEM" not in inside
    assert inside["OMP_NUM_THREADS"] == "2"


def test_nothing_typed_fast_is_lost(tmp_path):
    """Keys that arrive in one piece reach what they are meant for: a field, the text, the levels after it."""
    session = Session(tmp_path)
    session.until("complete")
    session.child.send("o./nowhere\r")
    session.until("cannot read ")
    session.child.send("e# quick \tkkk")
    session.until(">3")
    session.until("psi, level 3")
    session.child.send("/save as\r\x15" + str(tmp_path / "other.sheet") + "\rkq")
    status, raw = session.end()
    assert status == 0
    assert session.sane(raw)
    assert (tmp_path / "other.sheet").read_text() == "# quick " + SHEET


def test_suspending_and_coming_back(tmp_path):
    """From a shell with jobs ctrl+z gives the terminal back, and fg brings the screen back whole."""
    (tmp_path / "well.sheet").write_text(SHEET)
    environ = {**os.environ, "TERM": "xterm-256color", "LANG": "C.UTF-8", "PYTHONPATH": str(REPO), "PS1": "ready> "}
    environ["XDG_STATE_HOME"] = str(tmp_path / "state")
    shell = pexpect.spawn("bash", ["--norc", "-i"], dimensions=(24, 80), env=environ, timeout=30)
    shell.sendline(f"{sys.executable} {CHILD} {tmp_path / 'well.sheet'}")
    shell.expect("complete")
    shell.send("\x1a")
    shell.expect(r"\x1b\[\?1049l")
    shell.expect("ready> ")
    shell.sendline("echo a$((40+2))b; fg")
    shell.expect("a42b")
    shell.expect(r"\x1b\[\?1049h")
    shell.expect("complete")
    shell.send("q")
    shell.expect("ready> ")
    shell.sendline("exit")
    shell.expect(pexpect.EOF)


def test_without_a_shell_it_is_not_suspended(tmp_path):
    """Where no shell could bring it back, ctrl+z says so and the session goes on."""
    session = Session(tmp_path)
    session.until("complete")
    session.child.send("\x1a")
    session.until("no shell to go back to")
    session.child.send("q")
    assert session.end()[0] == 0


def test_leaving_does_not_wait(tmp_path):
    """While a computation that does not look up runs, q ends the session in a fraction of the time it still needs."""
    session = Session(tmp_path)
    session.until("complete")
    session.child.send("e#deaf\t")
    session.until("x stops it")
    session.child.send("qd")
    start = time.monotonic()
    assert session.end()[0] == 0
    assert time.monotonic() - start < 10
