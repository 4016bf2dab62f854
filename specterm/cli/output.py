"""Where results go: to standard output or to a file."""

from __future__ import annotations

import sys
from pathlib import Path

from specterm.errors import printable
from specterm.session.document import write_text


def deliver(text: str, output: str | None) -> None:
    """Write the result to the file, whole or not at all, or to standard output."""
    if output is not None and output != "-":
        write_text(Path(output), text + "\n")
        return
    sys.stdout.write(printable(text) + "\n")
    sys.stdout.flush()
