"""The end of the connection: unsaved text is kept and the terminal is left sane."""

from __future__ import annotations

import asyncio
import os
import signal
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from specterm.tui.app import Specterm

_EXITS = {signal.SIGTERM: 143, signal.SIGHUP: 129}
_EVERY = 1.0


def watch_signals(app: Specterm, guarded: bool) -> None:
    """Leave in order on SIGTERM and SIGHUP, and at once when the terminal has gone without a signal."""
    if not guarded:
        return
    loop = asyncio.get_running_loop()
    for number, status in _EXITS.items():
        loop.add_signal_handler(number, _end, app, status)
    app.set_interval(_EVERY, lambda: _check(app))


def _end(app: Specterm, status: int) -> None:
    """Keep the text and close the app."""
    app.take_typed()
    app.keeping.now()
    app.exit(status, return_code=status)


def _check(app: Specterm) -> None:
    """Keep the text and go when standard input is no terminal any more; the input thread would spin for ever."""
    if not os.isatty(0):
        app.keeping.now()
        os._exit(_EXITS[signal.SIGHUP])
