"""Solutions that last, in a process of their own: it can be ended at any moment, and its end does not end the session.

The parent (`ChildEngine`) sends one request and reads what comes back; the child (`python -m specterm.tui.child`) solves it and
ends. Both are of the same program: what they exchange never comes from a file.
"""

from __future__ import annotations

import contextlib
import os
import pickle
import select
import struct
import subprocess
import sys
import threading
from collections.abc import Callable
from dataclasses import replace
from math import isfinite
from pathlib import Path
from typing import IO, Any

from specterm.errors import PhysicsError, SheetError, SpectermError, WorkStopped
from specterm.spectrum.result import Spectrum
from specterm.tui.solving import BuiltIn, Engine, Request

_EVERY = 0.03
"""Seconds between two looks at whether to stop."""
_HEAD = struct.Struct("!Q")
_ERRORS: dict[str, type[SpectermError]] = {"SheetError": SheetError, "PhysicsError": PhysicsError}
_UNFIT = "unfit"


class ChildEngine(BuiltIn):
    """An engine that solves in a child process and does the rest here."""

    def __init__(self, engine: Engine, request: Request) -> None:
        """Solve `request` in a child; `engine` solves what a child cannot hand over."""
        self.engine, self.request = engine, request

    def solve(self, model: Any, **options: Any) -> Spectrum:  # noqa: ANN401 - a model
        """Return the spectrum; raises WorkStopped, or PhysicsError where the child is ended from outside."""
        should_stop: Callable[[], bool] = options["should_stop"]
        with _child() as process:
            _send(process.stdin, replace(self.request, overrides=dict(self.request.overrides)))
            while True:
                kind, content = _received(process, should_stop)
                if kind == "progress":
                    options["progress"](content)
                elif kind == "done":
                    found: Spectrum = content
                    return found
                elif kind == _UNFIT:
                    return self.engine.solve(model, **options)
                else:
                    raise _ERRORS.get(kind, PhysicsError)(content[0], mend=content[1], span=content[2])


class _child:  # noqa: N801 - it is used as a context
    """A child process that is ended when its context is left."""

    def __enter__(self) -> subprocess.Popen[bytes]:
        """Start it; -P keeps files of the current folder from being taken for modules."""
        words = [sys.executable, "-P", "-m", "specterm.tui.child"]
        self.process = subprocess.Popen(
            words, stdin=subprocess.PIPE, stdout=subprocess.PIPE, start_new_session=True
        )
        return self.process

    def __exit__(self, *_: object) -> None:
        """End it, whatever it does."""
        with contextlib.suppress(OSError):
            self.process.kill()
        self.process.wait()
        for pipe in (self.process.stdin, self.process.stdout):
            if pipe is not None:
                with contextlib.suppress(OSError):
                    pipe.close()


def _send(pipe: IO[bytes] | None, content: object) -> None:
    """Send one thing."""
    assert pipe is not None
    data = pickle.dumps(content)
    with contextlib.suppress(BrokenPipeError):
        pipe.write(_HEAD.pack(len(data)) + data)
        pipe.flush()


def _received(process: subprocess.Popen[bytes], should_stop: Callable[[], bool]) -> tuple[str, Any]:
    """Return the next thing the child says; raises WorkStopped, or PhysicsError where it has ended."""
    assert process.stdout is not None
    head = _bytes(process, process.stdout.fileno(), _HEAD.size, should_stop)
    data = _bytes(process, process.stdout.fileno(), _HEAD.unpack(head)[0], should_stop)
    found: tuple[str, Any] = pickle.loads(data)
    return found


def _bytes(process: subprocess.Popen[bytes], handle: int, count: int, should_stop: Callable[[], bool]) -> bytes:
    """Return so many bytes from the child."""
    parts: list[bytes] = []
    while count:
        if should_stop():
            raise WorkStopped("stopped")
        if not select.select([handle], [], [], _EVERY)[0]:
            continue
        part = os.read(handle, min(count, 1 << 20))
        if not part:
            raise PhysicsError(_end_of(process.wait()), mend="ask for fewer levels, or r to try again")
        parts.append(part)
        count -= len(part)
    return b"".join(parts)


def _end_of(status: int) -> str:
    """Return how a child came to its end, in words."""
    if status < 0:
        return f"the computation was ended from outside (signal {-status}), perhaps for want of memory"
    return f"the computation broke off (status {status})"


def main() -> int:
    """Solve the request on standard input; the answer goes to standard output, and nothing else does."""
    source, answers = os.fdopen(os.dup(0), "rb"), os.fdopen(os.dup(1), "wb")
    os.dup2(2, 1)
    (length,) = _HEAD.unpack(source.read(_HEAD.size))
    request: Request = pickle.loads(source.read(length))
    threading.Thread(target=_end_with_parent, args=(source,), daemon=True).start()
    _bound_memory()
    _send(answers, _answer(request, lambda words: _send(answers, ("progress", words))))
    return 0


def _answer(request: Request, progress: Callable[[str], None]) -> tuple[str, Any]:
    """Return what came of a request."""
    try:
        engine = BuiltIn()
        model = engine.build(request.text, request.folder, request.overrides)
        options = {"count": request.count, "near": request.near, "tolerance": request.tolerance}
        spectrum = engine.solve(model, **options, should_stop=lambda: False, progress=progress)
        pickle.dumps(spectrum)
    except SpectermError as error:
        return type(error).__name__, (error.message, error.mend, error.span)
    except MemoryError:
        return "PhysicsError", ("the computation ran out of memory", "ask for fewer levels", None)
    except (pickle.PicklingError, AttributeError, TypeError):
        return _UNFIT, None
    except Exception as error:  # the edge of the process: the parent must hear of a defect
        return "PhysicsError", (f"specterm failed here ({type(error).__name__}: {error})", "this is a defect: report it", None)
    return "done", spectrum


def _end_with_parent(source: IO[bytes]) -> None:
    """End when the parent is gone: its end of the pipe closes."""
    source.read(1)
    os._exit(1)


def _bound_memory() -> None:
    """Let this process take at most half of what the machine, or its control group, has left."""
    import resource  # noqa: PLC0415 - the parent does without it

    from specterm.discrete.memory import SHARE, memory_left  # noqa: PLC0415 - as above

    left = memory_left()
    with contextlib.suppress(OSError, ValueError, IndexError):
        taken = int(Path("/proc/self/statm").read_text(encoding="ascii").split()[0]) * resource.getpagesize()
        wanted, hard = taken + SHARE * left, resource.getrlimit(resource.RLIMIT_AS)[1]
        if isfinite(wanted) and (hard == resource.RLIM_INFINITY or wanted < hard):
            resource.setrlimit(resource.RLIMIT_AS, (int(wanted), hard))


if __name__ == "__main__":
    sys.exit(main())
