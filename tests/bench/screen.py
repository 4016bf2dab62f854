"""Measure the screen in a real pseudo-terminal: key to last byte, bytes a key, bytes idle, cold start over imports.

Run: python tests/bench/screen.py [SHEET] [--keys 60]. Not collected by pytest; nothing is asserted.
"""

from __future__ import annotations

import argparse
import fcntl
import os
import pty
import select
import signal
import statistics
import struct
import subprocess
import sys
import tempfile
import termios
import time
from pathlib import Path

REPO = Path(__file__).resolve().parent.parent.parent
SHEET = """units: energy meV, length nm, mass m_e
H = p^2/(2*m) + V
m = 0.067
V = where(abs(x) < 5, 0, 300)
x in (-40, 40)
state packet = exp(-(x-2)^2/8)
"""
QUIET = 0.15
CODE = """import sys
from pathlib import Path
from specterm.tui import run
sys.exit(run(Path(sys.argv[1]).read_text(), Path(sys.argv[1])))
"""
FAKE = str(REPO / "tests" / "tui" / "child.py")


class Terminal:
    """A session in a pseudo-terminal of its own."""

    def __init__(self, arguments: list[str], columns: int, rows: int, state: str) -> None:
        """Start it."""
        self.start = time.perf_counter()
        self.pid, self.handle = pty.fork()
        if self.pid == 0:
            environ = {**os.environ, "TERM": "xterm-256color", "LANG": "C.UTF-8", "PYTHONPATH": str(REPO)}
            environ["XDG_STATE_HOME"] = state
            environ.pop("COLORTERM", None)
            os.execve(sys.executable, [sys.executable, *arguments], environ)
        fcntl.ioctl(self.handle, termios.TIOCSWINSZ, struct.pack("HHHH", rows, columns, 0, 0))
        self.seen = b""

    def drain(self, quiet: float = QUIET, limit: float = 20.0) -> tuple[int, float]:
        """Read until nothing comes for `quiet` seconds; return the bytes and the time of the last one."""
        count, last = 0, time.perf_counter()
        end = last + limit
        while time.perf_counter() < end and select.select([self.handle], [], [], quiet)[0]:
            try:
                data = os.read(self.handle, 1 << 16)
            except OSError:
                break
            if b"\x1b[?2026$p" in data:
                os.write(self.handle, b"\x1b[?2026;2$y")
            count, last = count + len(data), time.perf_counter()
            self.seen += data
        return count, last

    def until(self, words: bytes, limit: float = 30.0) -> float:
        """Read until `words` came; return seconds since the start, up to the last byte that came with them."""
        end = time.perf_counter() + limit
        while words not in self.seen and time.perf_counter() < end:
            _, last = self.drain(quiet=0.02, limit=0.05)
        return last - self.start

    def key(self, data: bytes) -> tuple[float, int]:
        """Press a key; return seconds to the last byte of the repaint, and the bytes."""
        pressed = time.perf_counter()
        os.write(self.handle, data)
        select.select([self.handle], [], [], 2.0)
        count, last = self.drain()
        return last - pressed, count

    def close(self) -> None:
        """End it."""
        os.kill(self.pid, signal.SIGTERM)
        self.drain(limit=2.0)
        os.waitpid(self.pid, 0)
        os.close(self.handle)


def measure(arguments: list[str], columns: int, rows: int, keys: int, state: str) -> None:
    """Print the figures for one size."""
    session = Terminal(arguments, columns, rows, state)
    first = session.until(b"complete")
    session.drain(quiet=0.5)
    idle, _ = session.drain(quiet=2.0, limit=2.0)
    for data, name in ((b"k", "step"), (b"v", "view"), (b"s", "weigh")):
        pressed = [session.key(b"j" if data == b"k" and turn // 4 % 2 else data) for turn in range(keys)]
        times = sorted(1000 * seconds for seconds, _ in pressed)
        sizes = [count for _, count in pressed]
        middle, late = statistics.median(times), times[int(0.95 * (len(times) - 1))]
        print(f"{columns}x{rows} {name:5s} median {middle:5.1f} ms  p95 {late:5.1f} ms  bytes {statistics.median(sizes):7.0f}")
    print(f"{columns}x{rows} start to levels {1000 * first:.0f} ms  idle {idle} bytes in 2 s")
    session.close()


def imports(modules: str) -> float:
    """Return the best of five seconds that a process importing `modules` takes."""
    best = float("inf")
    for _ in range(5):
        start = time.perf_counter()
        subprocess.run([sys.executable, "-c", f"import {modules}"], check=True)
        best = min(best, time.perf_counter() - start)
    return best


def main() -> None:
    """Measure both sizes."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("sheet", nargs="?", type=Path)
    parser.add_argument("--keys", type=int, default=60)
    parser.add_argument("--fake", action="store_true", help="the tests' engine, which answers at once")
    options = parser.parse_args()
    with tempfile.TemporaryDirectory() as folder:
        sheet = options.sheet or Path(folder) / "well.sheet"
        if options.sheet is None:
            sheet.write_text(SHEET)
        arguments = [FAKE, str(sheet)] if options.fake else ["-c", CODE, str(sheet)]
        for columns, rows in ((120, 40), (80, 24)):
            measure(arguments, columns, rows, options.keys, folder)
    print(f"importing textual, numpy, scipy.linalg: {1000 * imports('textual.app, numpy, scipy.linalg'):.0f} ms")


if __name__ == "__main__":
    main()
