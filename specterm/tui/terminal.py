"""What has to be settled before anything heavy is imported: is there a terminal, and what can it show."""

from __future__ import annotations

import contextlib
import os
import sys
from collections.abc import MutableMapping
from pathlib import Path
from typing import TextIO

_HOPELESS = ("", "dumb", "unknown")
_THREADS = ("OPENBLAS_NUM_THREADS", "OMP_NUM_THREADS", "MKL_NUM_THREADS")
_LOG_SIZE = 1_000_000
_TERMINAL = "/dev/tty"
_FRAMES = "250"
"""Frames a second that the library may draw: how often is decided here (pace.py), what it adds is only delay."""


def usable() -> bool:
    """Return whether a full screen can be shown: terminals on 1 and 2, a keyboard, and a TERM that is one."""
    return os.environ.get("TERM", "") not in _HOPELESS and all(_is_terminal(number) for number in (1, 2)) and _keyboard()


def _keyboard() -> bool:
    """Return whether keys can be read: from a terminal on 0, or from the one of the session where 0 brought the sheet."""
    if _is_terminal(0):
        return True
    try:
        os.close(os.open(_TERMINAL, os.O_RDWR | os.O_NOCTTY | os.O_CLOEXEC))
    except OSError:
        return False
    return sys.__stdin__ is not None


def take_keyboard() -> None:
    """Read keys from the session's terminal where standard input is something else, such as a pipe that brought the sheet."""
    if not _is_terminal(0):
        handle = os.open(_TERMINAL, os.O_RDWR | os.O_NOCTTY)
        os.dup2(handle, 0)
        os.close(handle)


def _is_terminal(number: int) -> bool:
    """Return whether a file descriptor is a terminal; a closed one is not."""
    try:
        return os.isatty(number)
    except OSError:
        return False


def settle(environ: MutableMapping[str, str]) -> None:
    """Set in the environment what libraries read once when they are imported.

    The size is asked of the terminal, not of COLUMNS and LINES; one BLAS thread; the terminal's own sixteen colours; 256
    colours in GNU screen, which misreads true colour; no delay of frames.
    """
    environ.pop("COLUMNS", None)
    environ.pop("LINES", None)
    for name in _THREADS:
        environ.setdefault(name, "1")
    environ["TEXTUAL_THEME"] = "ansi-dark"
    environ.setdefault("TEXTUAL_ANIMATIONS", "none")
    environ.setdefault("TEXTUAL_FPS", _FRAMES)
    in_screen = "STY" in environ or environ.get("TERM", "").startswith("screen")
    if in_screen and "TMUX" not in environ:
        environ["TEXTUAL_COLOR_SYSTEM"] = "256"


def own_stream(log: Path) -> TextIO:
    """Turn descriptor 2 to `log` and return a UTF-8 stream to the terminal, for drawing alone."""
    stream = os.fdopen(os.dup(2), "w", encoding="utf-8", errors="replace")
    handle = _log(log)
    os.dup2(handle, 2)
    os.close(handle)
    _draw_on(stream)
    return stream


def _draw_on(stream: TextIO) -> None:
    """Make `stream` what a full-screen program takes for the terminal."""
    vars(sys)["__stderr__"] = stream


def _log(path: Path) -> int:
    """Return a descriptor that takes messages: the log file, started anew when it has grown large, or nowhere."""
    try:
        path.parent.mkdir(mode=0o700, parents=True, exist_ok=True)
        fresh = os.O_TRUNC if path.exists() and path.stat().st_size > _LOG_SIZE else os.O_APPEND
        return os.open(path, os.O_WRONLY | os.O_CREAT | os.O_CLOEXEC | os.O_NOFOLLOW | fresh, 0o600)
    except OSError:
        return os.open(os.devnull, os.O_WRONLY | os.O_CLOEXEC)


def give_back(stream: TextIO) -> None:
    """Turn descriptor 2 back to the terminal."""
    with contextlib.suppress(OSError):
        stream.flush()
    os.dup2(stream.fileno(), 2)
    _draw_on(sys.stderr)


def start_tracker() -> None:
    """Start what multiprocessing keeps beside its processes, once.

    It wants a descriptor of the stream for errors, which a full-screen program has put something without one in the place of.
    """
    from multiprocessing import resource_tracker  # noqa: PLC0415 - only for work in other processes

    captured = sys.stderr
    sys.stderr = sys.__stderr__
    try:
        resource_tracker.ensure_running()
    finally:
        sys.stderr = captured
