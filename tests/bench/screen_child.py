"""The screen with its stopwatches, run by the bench in a pseudo-terminal: where the time of a key goes, gaps of the loop.

Run: python screen_child.py LOG SHEET [COUNT]. Each line of LOG is a JSON list: what, start, end, on the clock of the machine.
"""

from __future__ import annotations

import asyncio
import functools
import json
import os
import sys
import time
from pathlib import Path
from typing import Any

BEAT = 0.005


class Log:
    """Takes spans; one write each, so that threads do not mix."""

    def __init__(self, path: str) -> None:
        """Start an empty log."""
        self.handle = os.open(path, os.O_WRONLY | os.O_CREAT | os.O_TRUNC | os.O_APPEND)

    def span(self, what: str, start: float, end: float) -> None:
        """Write down one span."""
        os.write(self.handle, json.dumps([what, start, end]).encode() + b"\n")

    def timed(self, what: str, function: Any) -> Any:
        """Return `function` with a stopwatch."""

        @functools.wraps(function)
        def run(*arguments: Any, **options: Any) -> Any:
            start = time.perf_counter()
            try:
                return function(*arguments, **options)
            finally:
                self.span(what, start, time.perf_counter())

        return run


async def beat(log: Log) -> None:
    """Write down every gap of the loop above ten milliseconds."""
    while True:
        start = time.perf_counter()
        await asyncio.sleep(BEAT)
        gap = time.perf_counter() - start - BEAT
        if gap > 0.01:
            log.span("gap", start, start + gap)


def main() -> int:
    """Run the screen."""
    from specterm import tui  # noqa: PLC0415 - the environment is settled first

    tui.terminal.settle(os.environ)
    from textual.screen import Screen  # noqa: PLC0415

    from specterm.tui import app, painter, work  # noqa: PLC0415

    log = Log(sys.argv[1])
    painter._LARGE = tuple((name, log.timed("plot", draw)) for name, draw in painter._LARGE)
    painter.Painter._draw = log.timed("draw", painter.Painter._draw)
    work.compute = log.timed("solve", work.compute)
    Screen._compositor_refresh = log.timed("compositor", Screen._compositor_refresh)
    mounted = app.Specterm.on_mount

    def on_mount(self: Any) -> None:
        if "SPECBENCH_BEAT" in os.environ:
            self.beating = asyncio.get_running_loop().create_task(beat(log))
        mounted(self)

    app.Specterm.on_mount = on_mount
    path = Path(sys.argv[2])
    count = int(sys.argv[3]) if len(sys.argv) > 3 else None
    return tui.run(path.read_text(), path, tui.Options(count=count))


if __name__ == "__main__":
    sys.exit(main())
