"""Measure the screen in a real pseudo-terminal: latency and bytes of keys, idle, start, gaps of the loop, stop, slow lines.

Run: python tests/bench/screen.py [PART ...] [--keys 60] [--rounds 10], PARTS: keys pages idle start gaps stop held tmux.
Not collected by pytest; nothing is asserted. Times are those of a machine that does nothing else.
"""

from __future__ import annotations

import argparse
import json
import os
import re
import statistics
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable
from pathlib import Path

import pyte
from screen_terminal import REPO, SlowLine, Terminal, python

CHILD = str(Path(__file__).resolve().parent / "screen_child.py")
SIZES = ((120, 40), (80, 24))
PRESETS = REPO / "presets"
SHEET, NUMBER = "coupled-wells", b"F"
LADDER = "H = p^2/2 + k*x^2/2\nk = 1.000\nx in (-inf, inf)\n"
MODULES = "textual.app, textual.widgets, numpy, scipy.linalg"
_PART = ("solve", "plot", "draw", "compositor")


def spans(log: Path) -> list[tuple[str, float, float]]:
    """Return what the child wrote down."""
    return [tuple(json.loads(line)) for line in log.read_text().splitlines()] if log.exists() else []


def spread(values: list[float]) -> tuple[float, float]:
    """Return median and 95th percentile."""
    ordered = sorted(values)
    return statistics.median(ordered), ordered[int(0.95 * (len(ordered) - 1))]


def told(name: str, pressed: list[tuple[float, float, int]], log: Path) -> None:
    """Print one line: latency, bytes, and the medians of its parts (drawing without the plot)."""
    middle, late = spread([1e3 * (last - start) for start, last, _ in pressed])
    parts = {part: [0.0] * len(pressed) for part in _PART}
    for what, start, end in spans(log):
        for place, (first, last, _) in enumerate(pressed):
            if what in parts and first <= start <= last + 0.05:
                parts[what][place] += 1e3 * (end - start)
    parts["draw"] = [draw - plot for draw, plot in zip(parts["draw"], parts["plot"], strict=True)]
    shares = "  ".join(f"{part} {statistics.median(values):4.1f}" for part, values in parts.items())
    size = statistics.median([count for _, _, count in pressed])
    print(f"  {name:16s} {middle:6.1f} {late:6.1f} ms {size:7.0f} B   {shares}", flush=True)


class Bench:
    """What all parts need: a folder of their own, how often, and colours."""

    def __init__(self, folder: Path, options: argparse.Namespace) -> None:
        """Keep them."""
        self.folder, self.keys, self.rounds = folder, options.keys, options.rounds
        self.colours: dict[str, str] = {}
        if options.colours == "true":
            self.colours["COLORTERM"] = "truecolor"
        elif options.colours == "16":
            self.colours["TERM"] = "xterm"
        self.log = folder / "log"

    @property
    def environ(self) -> dict[str, str]:
        """An environment with a state folder of its own."""
        return {**self.colours, "XDG_STATE_HOME": tempfile.mkdtemp(dir=self.folder)}

    def sheet(self, name: str = SHEET) -> Path:
        """Return a copy of a preset that may be edited."""
        for path in PRESETS.iterdir():
            (self.folder / path.name).write_bytes(path.read_bytes())
        return self.folder / f"{name}.sheet"

    def session(self, size: tuple[int, int], sheet: Path, *count: str, **environ: str) -> Terminal:
        """Return a session with stopwatches, ready."""
        found = Terminal(python(CHILD, str(self.log), str(sheet), *count), size, {**self.environ, **environ})
        found.until(b"quit")
        found.drain(quiet=1.0)
        return found


def keys(bench: Bench) -> None:
    """Measure single keys: stepping, nudging, views, weighing, typing."""
    for size in SIZES:
        print(f"{size[0]}x{size[1]}: key, median, p95, bytes, medians of the parts (ms)")
        session = bench.session(size, bench.sheet())
        for name, cycle in (("step", b"kkkkjjjj"), ("view", b"v"), ("weigh", b"s")):
            told(name, [session.key(cycle[n % len(cycle) :][:1]) for n in range(bench.keys)], bench.log)
        for data in (b"p", NUMBER, b"\r"):
            session.key(data)
        told("nudge", [session.key(b"]") for _ in range(bench.keys)], bench.log)
        session.key(b"e")
        typed = b"# some words, and some more of them\r# and another line\r"
        told("type", [session.key(typed[n % len(typed) :][:1]) for n in range(bench.keys)], bench.log)
        session.close()


def pages(bench: Bench) -> None:
    """Measure pages whose answers are there already, and the cursor or a step on them."""
    for size in SIZES:
        print(f"{size[0]}x{size[1]}: page, median, p95, bytes, medians of the parts (ms)")
        session = bench.session(size, bench.sheet())
        for data in (b"8", b"l", b"F=0:20:41\r"):
            session.key(data)
        for digit in b"12345678":
            session.key(bytes([digit]))
            session.drain(quiet=3.0, limit=60.0)
        for digit in b"2345678":
            turned = []
            for _ in range(max(5, bench.keys // 6)):
                session.key(b"1")
                turned.append(session.key(bytes([digit])))
            told(f"page {chr(digit)}", turned, bench.log)
            if digit in b"58":
                moved = [session.key(b"\x1b[D" if n // 8 % 2 else b"\x1b[C") for n in range(bench.keys // 2)]
                told(f"page {chr(digit)} cursor", moved, bench.log)
        session.close()


def idle(bench: Bench) -> None:
    """Measure bytes in ten seconds without a key."""
    for size in SIZES:
        session = bench.session(size, bench.sheet())
        session.key(b"e")
        count, _ = session.drain(quiet=10.0, limit=10.0)
        print(f"{size[0]}x{size[1]}: idle for 10 s, the cursor in the sheet: {count} bytes")
        session.close()


def start(bench: Bench) -> None:
    """Measure process start to the first full screen with levels, over a process that imports only; the runs alternate."""
    whole, bare = [], []
    for _ in range(bench.rounds + 1):
        begun = time.perf_counter()
        subprocess.run([sys.executable, "-c", f"import {MODULES}"], check=True)
        bare.append(time.perf_counter() - begun)
        session = Terminal(python("-m", "specterm", str(bench.sheet())), (120, 40), bench.environ)
        whole.append(session.until(b"complete") - session.start)
        session.close()
    shown, imported = statistics.median(whole[1:]), statistics.median(bare[1:])
    print(f"start to levels {1e3 * shown:.0f} ms, importing {MODULES} {1e3 * imported:.0f} ms: {shown / imported:.2f} x")


def gaps(bench: Bench) -> None:
    """Measure the longest gap of the loop during the usual solve of each preset and during (30 s of) one of 500 levels."""
    for path in sorted(PRESETS.glob("*.sheet")):
        found = []
        for count in ("10", "500"):
            session = bench.session((120, 40), bench.sheet(path.stem), count, SPECBENCH_BEAT="1")
            time.sleep(1.0)
            again = time.perf_counter()
            session.key(b"r")
            session.drain(quiet=1.5 if count == "10" else 10.0, limit=30.0)
            ended = time.perf_counter()
            session.close()
            logged = [(what, first, last) for what, first, last in spans(bench.log) if again <= first and last <= ended]
            lasted = [last - again for what, _, last in logged if what == "solve"] or [ended - again]
            stalls = [last - first for what, first, last in logged if what == "gap"]
            found.append(f"{count:>3s} levels: {1e3 * max(lasted):6.0f} ms, gap {1e3 * max(stalls, default=0.0):4.0f} ms")
        print(f"{path.stem:18s} {';  '.join(found)}", flush=True)


def stop(bench: Bench) -> None:
    """Measure from x to words that say so, and from q to the end of the process, in a solve that takes seconds."""
    said, left = [], []
    for _ in range(bench.rounds):
        session = bench.session((120, 40), bench.sheet("circuit-phase"), "500")
        before = len(session.seen)
        pressed = time.perf_counter()
        os.write(session.handle, b"x")
        said.append(session.until(b"stopped", since=before) - pressed)
        before = len(session.seen)
        os.write(session.handle, b"r")
        session.until(b"x stops it", since=before)
        time.sleep(1.0)
        pressed = time.perf_counter()
        os.write(session.handle, b"q")
        session.drain(quiet=10.0)
        os.waitpid(session.pid, 0)
        left.append(time.perf_counter() - pressed)
        os.close(session.handle)
    for name, values in (("x to 'stopped'", said), ("q to the prompt", left)):
        middle, late = spread([1e3 * value for value in values])
        print(f"{name}: median {middle:.0f} ms, p95 {late:.0f} ms", flush=True)


def held(bench: Bench, *, inside: bool = False) -> None:
    """Hold a key for three seconds, 20 a second, over 1 Mbit/s with a round trip of 50 ms."""
    ladder = bench.folder / "ladder.sheet"
    ladder.write_text(LADDER)
    cases = [("step", b"", b"k", "level 60 "), ("view", b"", b"v", "psi, level 0"), ("nudge", b"pk\r", b"]", "k = 1.060")]
    cases += [("type", b"e", b"#", "###H = p^2")] + [("step, unanswered", b"", b"k", "level 60 ")] * (not inside)
    for name, setting, data, words in cases:
        command = python("-m", "specterm", str(ladder), "-n", "8" if name == "nudge" else "70")
        if inside:
            command = ("tmux", "-L", "specbench", "-f", "/dev/null", "new-session", *command)
        line = SlowLine(command, (120, 40), bench.environ, answers="unanswered" not in name)
        line.rest(2.0)
        for byte in setting:
            line.press(bytes([byte]))
            line.rest()
        begun, before = time.perf_counter(), line.sent
        for number in range(60):
            line.run(begun + number / 20 - time.perf_counter())
            line.press(data)
        released = time.perf_counter()
        line.rest()
        right = "right" if words in shown(line.shown, (120, 40)) else "WRONG"
        print(f"{name:17s} end, {right}, {line.last - released:5.2f} s after the last key; {line.sent - before} B", flush=True)
        line.press(b"\tqd" if name in ("nudge", "type") else b"q")
        line.rest(1.0, 3.0)
        line.close()


def tmux(bench: Bench) -> None:
    """Do the same inside tmux, whose client is at the end of the slow line."""
    held(bench, inside=True)


def shown(data: bytes, size: tuple[int, int]) -> str:
    """Return what a terminal shows that was sent `data`."""
    screen = pyte.Screen(*size)
    pyte.ByteStream(screen).feed(re.sub(rb"\x1b\[[<>][0-9;]*[a-z]|\x1b\[\?[0-9;]*\$p", b"", data))
    return "\n".join(screen.display)


PARTS: dict[str, Callable[[Bench], None]] = {
    "keys": keys, "pages": pages, "idle": idle, "start": start, "gaps": gaps, "stop": stop, "held": held,
    "tmux": tmux,
}  # fmt: skip


def main() -> None:
    """Measure the parts asked for."""
    parser = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    parser.add_argument("parts", nargs="*", default=list(PARTS), metavar="PART", help=" ".join(PARTS))
    parser.add_argument("--keys", type=int, default=60)
    parser.add_argument("--rounds", type=int, default=10)
    parser.add_argument("--colours", choices=("16", "256", "true"), default="256")
    options = parser.parse_args()
    unknown = [part for part in options.parts if part not in PARTS]
    if unknown:
        parser.error(f"no such part: {', '.join(unknown)}")
    with tempfile.TemporaryDirectory() as folder:
        bench = Bench(Path(folder), options)
        for part in options.parts:
            print(f"-- {part}: {(PARTS[part].__doc__ or '').splitlines()[0]}  load {os.getloadavg()[0]:.1f}", flush=True)
            PARTS[part](bench)


if __name__ == "__main__":
    main()
