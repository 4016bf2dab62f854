"""What one input goes through, and what is noted about it: crashes, time, files, code, control characters."""

from __future__ import annotations

import contextlib
import io
import json
import os
import signal
import sys
import time
import traceback
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from fuzz_guard import guard

from specterm.stopping import stopping

PATIENCE = float(os.environ.get("FUZZ_PATIENCE", "1"))
"""The limits of time are so many times as long: the test suite must not depend on the speed of the machine."""
LIMIT = 2.0 * PATIENCE
"""Seconds of processor time after which an input counts as hanging."""
ASKED, PROMPT = 1.0, 0.3 * PATIENCE
"""Work is asked to stop after so many seconds, and is late when it goes on for more than so many after that."""
LEVELS, MOST_LEVELS = 3, 12
"""So many levels are computed where nobody says how many, and at most."""


class Hanging(BaseException):
    """Raised in the midst of whatever uses more than `LIMIT` seconds of processor time."""


@dataclass
class Verdict:
    """What one input did: `faults` as (sort, what) pairs, the seconds for text to model, and all the seconds."""

    faults: list[tuple[str, str]] = field(default_factory=list)
    building: float = 0.0
    seconds: float = 0.0
    ways: set[str] = field(default_factory=set)


def faults(folder: Path) -> list[Callable[[Verdict], None]]:
    """Return works that do what no input may do, one of each sort."""

    def busy(seconds: float) -> None:
        start = time.process_time()
        while time.process_time() - start < seconds:
            pass

    return [
        lambda _: {}["crash"], lambda _: busy(2 * LIMIT), lambda _: busy(ASKED + 2 * PROMPT),
        lambda _: (folder / "new").touch(),
        lambda _: exec("pass"), lambda verdict: shown(verdict, "\x1b[2J", "an answer"),
    ]  # fmt: skip


def _alarm(_signal: int, _frame: Any) -> None:
    raise Hanging


def prepare() -> None:
    """Bound every solve of this process in levels and tolerance, and let the clock of `LIMIT` ring."""
    from specterm import spectrum  # noqa: PLC0415 - wrapped before anything takes `solve` from it
    from specterm.spectrum import engine  # noqa: PLC0415

    whole = engine.solve

    def limited(model: Any, **options: Any) -> Any:
        options["count"] = min(options.get("count") or LEVELS, MOST_LEVELS)
        options["tolerance"] = max(options.get("tolerance", 1e-4), 1e-4)
        return whole(model, **options)

    spectrum.solve = limited
    signal.signal(signal.SIGPROF, _alarm)


def judged(work: Callable[[Verdict], None], *mine: str) -> Verdict:
    """Run `work` under the guard and the clock; `mine` are files it may write."""
    verdict = Verdict()
    start = time.process_time()
    with guard.watching(*mine) as seen, stopping(lambda: time.process_time() - start > ASKED):
        signal.setitimer(signal.ITIMER_PROF, LIMIT)
        try:
            work(verdict)
        except Hanging:
            verdict.faults.append(("hang", place()))
        except MemoryError:
            verdict.faults.append(("crash", "MemoryError " + place()))
        except Exception as error:
            verdict.faults.append(("crash", f"{type(error).__name__}: {str(error)[:100]!r} {place()}"))
        finally:
            signal.setitimer(signal.ITIMER_PROF, 0)
    verdict.seconds = time.process_time() - start
    verdict.faults += [("written" if event.startswith("written") else "code", event) for event in seen]
    if verdict.seconds > LIMIT and not any(sort == "hang" for sort, _ in verdict.faults):
        verdict.faults.append(("hang", f"{verdict.seconds:.1f} s in all"))
    if verdict.building > ASKED * PATIENCE and verdict.seconds > ASKED * PATIENCE:
        verdict.faults.append(("slow", f"{verdict.building:.1f} s from text to model"))
    if verdict.seconds > ASKED + PROMPT and not any(sort == "hang" for sort, _ in verdict.faults):
        verdict.faults.append(("late", f"stopped {verdict.seconds - ASKED:.2f} s after it was asked to"))
    return verdict


def place() -> str:
    """Return where the present exception comes from: the innermost lines of the program's own code."""
    frames = traceback.extract_tb(sys.exc_info()[2])
    own = [f for f in frames if "specterm" in f.filename and "fuzz" not in f.filename][-4:]
    return " < ".join(f"{Path(f.filename).name}:{f.lineno} {f.name}" for f in reversed(own))


def unclean(text: str) -> str:
    """Return the first character that could steer a terminal or spoof its reader, "" where there is none."""
    if text.isprintable():
        return ""
    return next((f"U+{ord(c):04X}" for c in text if not c.isprintable() and c != "\n"), "")


def shown(verdict: Verdict, text: str, where: str) -> None:
    """Note a control character in what goes to the terminal."""
    found = unclean(text)
    if found:
        verdict.faults.append(("control", f"{found} in {where}"))


@contextmanager
def refusals(verdict: Verdict, text: str) -> Iterator[None]:
    """Let the program's own errors pass, shown as they would be."""
    from specterm.errors import SpectermError, describe  # noqa: PLC0415

    try:
        yield
    except SpectermError as error:
        shown(verdict, describe(error, text, "sheet"), "an error")
        if not error.message:
            verdict.faults.append(("crash", "an error without words"))


def command(verdict: Verdict, words: list[str]) -> None:
    """Run the command line in this process; its own last resort for defects counts as a crash."""
    from specterm.cli import main as program  # noqa: PLC0415

    out, err = io.StringIO(), io.StringIO()
    place_of: list[str] = []
    tell = sys.modules["specterm.cli.main"]._tell

    def telling(text: str, status: int = 2) -> int:
        if text.startswith("specterm failed here") or text.startswith("specterm: out of memory"):
            place_of.append(f"{text.splitlines()[0][:150]} {place()}")
        return tell(text, status)

    sys.modules["specterm.cli.main"]._tell = telling
    try:
        with contextlib.redirect_stdout(out), contextlib.redirect_stderr(err), contextlib.suppress(SystemExit):
            program(words)
    finally:
        sys.modules["specterm.cli.main"]._tell = tell
    verdict.faults += [("crash", where) for where in place_of]
    shown(verdict, out.getvalue(), "standard output")
    shown(verdict, err.getvalue(), "standard error")
    if "--json" in words and out.getvalue():
        _read_back(verdict, out.getvalue())


def _read_back(verdict: Verdict, text: str) -> None:
    try:
        json.loads(text)
    except ValueError as error:
        verdict.faults.append(("crash", f"JSON that cannot be read: {error}"))


def bounded(bytes_of_memory: int) -> None:
    """Let this process take no more memory, and write no file, however it tries."""
    import resource  # noqa: PLC0415

    resource.setrlimit(resource.RLIMIT_AS, (bytes_of_memory, bytes_of_memory))


def fixtures(folder: Path) -> None:
    """Make the files that hostile sheets name: good ones, circles, pipes, links to devices."""
    from fuzz_tables import GOOD  # noqa: PLC0415

    plain = "H = p^2/2 + x^2/2\nx in (-inf, inf)\n"
    (folder / "good.csv").write_text(GOOD)
    (folder / "other.sheet").write_text(plain)
    (folder / "loop_a.sheet").write_text(plain + 'state s = level(0) of "loop_b.sheet"\n')
    (folder / "loop_b.sheet").write_text(plain + 'state s = level(0) of "loop_a.sheet"\n')
    (folder / "self.sheet").write_text(plain + 'state s = level(0) of "self.sheet"\n')
    (folder / "binary.csv").write_bytes(bytes(range(256)) * 40)
    (folder / "directory").mkdir()
    (folder / "deep").mkdir()
    os.mkfifo(folder / "fifo")
    (folder / "zero").symlink_to("/dev/zero")
    (folder / "circle").symlink_to("circle")
    with (folder / "huge.csv").open("wb") as file:
        file.truncate(60_000_000)
