"""Pseudo-terminals for the bench of the screen: one that answers at once, one behind a slow line that is modelled here."""

from __future__ import annotations

import contextlib
import fcntl
import heapq
import os
import pty
import select
import signal
import struct
import sys
import termios
import time
from collections.abc import Sequence
from pathlib import Path

REPO = Path(__file__).resolve().parent.parent.parent
QUIET = 0.15
_ANSWERS = {b"\x1b[?2026$p": b"\x1b[?2026;2$y", b"\x1b[6n": b"\x1b[1;1R"}
_LONGEST = max(map(len, _ANSWERS)) - 1
_SEGMENT = 1448
_BUFFERED = 512 * 1024


def spawn(command: Sequence[str], size: tuple[int, int], environ: dict[str, str]) -> tuple[int, int]:
    """Return process id and handle of a command in a pseudo-terminal of its own."""
    pid, handle = pty.fork()
    if pid == 0:
        whole = {**os.environ, "TERM": "xterm-256color", "LANG": "C.UTF-8", "PYTHONPATH": str(REPO), **environ}
        for name in ("COLORTERM", "TMUX", "STY", "SSH_CONNECTION"):
            if name not in environ:
                whole.pop(name, None)
        fcntl.ioctl(0, termios.TIOCSWINSZ, struct.pack("HHHH", size[1], size[0], 0, 0))
        os.execvpe(command[0], list(command), whole)
    return pid, handle


def python(*arguments: str) -> tuple[str, ...]:
    """Return the command that runs this interpreter."""
    return (sys.executable, *arguments)


class Terminal:
    """A session whose terminal takes and answers everything at once."""

    def __init__(self, command: Sequence[str], size: tuple[int, int], environ: dict[str, str], *, answers: bool = True) -> None:
        """Start it; `answers` says whether questions of the program are answered."""
        self.start = time.perf_counter()
        self.pid, self.handle = spawn(command, size, environ)
        self.seen = b""
        self.answers = answers
        self._tail = b""

    def _read(self) -> bytes:
        """Read what there is, b"" at the end, and answer questions in it."""
        try:
            data = os.read(self.handle, 1 << 16)
        except OSError:
            return b""
        self.seen += data
        if self.answers:
            for answer in questions(self._tail, data):
                os.write(self.handle, answer)
        self._tail = (self._tail + data)[-_LONGEST:]
        return data

    def drain(self, quiet: float = QUIET, limit: float = 20.0) -> tuple[int, float]:
        """Read until nothing comes for `quiet` seconds; return the bytes and the time of the last one."""
        count, last = 0, time.perf_counter()
        end = last + limit
        while time.perf_counter() < end and select.select([self.handle], [], [], quiet)[0]:
            data = self._read()
            if not data:
                break
            count, last = count + len(data), time.perf_counter()
        return count, last

    def until(self, words: bytes, limit: float = 60.0, since: int = 0) -> float:
        """Read until `words` came after the first `since` bytes; return the time of the last byte that came with them."""
        end, last = time.perf_counter() + limit, time.perf_counter()
        while words not in self.seen[since:]:
            if time.perf_counter() > end:
                raise TimeoutError(f"{words!r} did not come: {self.seen[-3000:]!r}")
            if select.select([self.handle], [], [], 0.05)[0]:
                if not self._read():
                    raise EOFError(self.seen[-3000:])
                last = time.perf_counter()
        return last

    def key(self, data: bytes) -> tuple[float, float, int]:
        """Press a key; return when, when the last byte of the repaint came, and the bytes."""
        pressed = time.perf_counter()
        os.write(self.handle, data)
        select.select([self.handle], [], [], 2.0)
        count, last = self.drain()
        return pressed, last, count

    def close(self) -> None:
        """End it."""
        with contextlib.suppress(ProcessLookupError):
            os.kill(self.pid, signal.SIGTERM)
        self.drain(limit=2.0)
        os.waitpid(self.pid, 0)
        os.close(self.handle)


def questions(tail: bytes, data: bytes) -> list[bytes]:
    """Return the answers to the questions that end in `data`, which comes after `tail`."""
    whole, found = tail + data, []
    for question, answer in _ANSWERS.items():
        new = whole.count(question) - tail.count(question)
        found += [answer] * new
    return found


class SlowLine:
    """A session behind a line of `rate` bits a second and a round trip of `trip` seconds.

    Like a login server, the near end takes up to 512 kB ahead of the line; the far end is the emulator, which answers.
    """

    def __init__(
        self, command: Sequence[str], size: tuple[int, int], environ: dict[str, str], *, rate: float = 1e6, trip: float = 0.05,
        answers: bool = True,
    ) -> None:  # fmt: skip
        """Start it."""
        self.pid, self.handle = spawn(command, size, environ)
        self.rate, self.trip, self.answers = rate / 8, trip, answers
        self.free = 0.0
        self.sent = 0
        self.shown = b""
        self.last = time.perf_counter()
        self._coming: list[tuple[float, int, bytes]] = []
        self._going: list[tuple[float, int, bytes]] = []
        self._number = 0
        self._held = 0
        self._tail = b""

    def press(self, data: bytes) -> None:
        """Press a key at the far end."""
        self._push(self._going, time.perf_counter() + self.trip / 2, data)

    def _push(self, heap: list[tuple[float, int, bytes]], when: float, data: bytes) -> None:
        """Put data on its way."""
        self._number += 1
        heapq.heappush(heap, (when, self._number, data))

    def run(self, seconds: float) -> bool:
        """Let the line work for a while; return False once the program has ended."""
        end = time.perf_counter() + seconds
        while (now := time.perf_counter()) < end:
            due = min([end, *(heap[0][0] for heap in (self._coming, self._going) if heap)])
            handles = [self.handle] if self._held < _BUFFERED else []
            if select.select(handles, [], [], max(0.0, due - now))[0] and not self._take():
                return False
            self._deliver(time.perf_counter())
        return True

    def _take(self) -> bool:
        """Take output of the program onto the line."""
        try:
            data = os.read(self.handle, 1 << 15)
        except OSError:
            return False
        now = time.perf_counter()
        for first in range(0, len(data), _SEGMENT):
            piece = data[first : first + _SEGMENT]
            self.free = max(now, self.free) + len(piece) / self.rate
            self._held += len(piece)
            self._push(self._coming, self.free + self.trip / 2, piece)
        return bool(data)

    def _deliver(self, now: float) -> None:
        """Give what has arrived to the emulator, and its answers and keys to the program."""
        while self._coming and self._coming[0][0] <= now:
            when, _, data = heapq.heappop(self._coming)
            self.shown += data
            self.sent += len(data)
            self._held -= len(data)
            self.last = when
            for answer in questions(self._tail, data) if self.answers else ():
                self._push(self._going, when + self.trip / 2, answer)
            self._tail = (self._tail + data)[-_LONGEST:]
        while self._going and self._going[0][0] <= now:
            os.write(self.handle, heapq.heappop(self._going)[2])

    def rest(self, quiet: float = 1.0, limit: float = 60.0) -> None:
        """Let the line work until nothing has come for `quiet` seconds."""
        end = time.perf_counter() + limit
        while time.perf_counter() < end and self.run(0.05):
            if not self._coming and time.perf_counter() - self.last > quiet:
                return

    def close(self) -> None:
        """End it."""
        with contextlib.suppress(ProcessLookupError):
            os.kill(self.pid, signal.SIGTERM)
        with contextlib.suppress(OSError):
            while os.read(self.handle, 1 << 16):
                pass
        os.waitpid(self.pid, 0)
        os.close(self.handle)
