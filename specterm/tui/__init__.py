"""The terminal interface; `run` starts it and imports it only then."""

from __future__ import annotations

import contextlib
import os
import sys
from pathlib import Path
from typing import NoReturn

from specterm.tui.options import Options
from specterm.tui.terminal import give_back, own_stream, settle, take_keyboard, usable

__all__ = ["Options", "run", "usable"]


def run(text: str, path: Path | None = None, options: Options | None = None) -> NoReturn:
    """Show a sheet full screen until the user leaves, and end the process.

    `path` is the sheet's file, or None. Call `usable` first: without a terminal there is nothing to show it on. The process
    ends here and now, as all is saved by then: an interpreter that tidies up keeps the prompt back for up to half a second.
    """
    settle(os.environ)
    from dataclasses import replace  # noqa: PLC0415 - the environment is settled first

    from specterm.session.place import folder  # noqa: PLC0415 - as above
    from specterm.tui.app import make_app  # noqa: PLC0415 - as above

    chosen = replace(options or Options(), guarded=True)
    take_keyboard()
    stream = own_stream(folder() / "log")
    try:
        app = make_app(text, path, chosen)
        status = app.run(mouse=chosen.mouse)
    finally:
        give_back(stream)
    if app.last_words:
        print(app.last_words, file=sys.stderr)
    _end(app.return_code or status or 0)


def _end(status: int) -> NoReturn:
    """End the process at once; computations in processes of their own end with it."""
    for stream in (sys.stdout, sys.stderr):
        with contextlib.suppress(OSError, ValueError):
            stream.flush()
    os._exit(status)
