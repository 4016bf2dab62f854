"""Unsaved text kept safe outside the user's file, for a dropped connection, a kill, a crash.

Each document has one rescue file in the user's state folder, named after its path; it exists only while there is unsaved text.
"""

from __future__ import annotations

import contextlib
import hashlib
import os
from pathlib import Path

from specterm.errors import SheetError
from specterm.session.document import Document, read_text, write_text


def folder() -> Path:
    """Return where rescued texts lie: `specterm` in the folder for state files (XDG base directory convention)."""
    base = os.environ.get("XDG_STATE_HOME") or os.path.expanduser("~/.local/state")
    return Path(base) / "specterm"


def place(path: Path | None) -> Path:
    """Return the rescue file of the document at `path`; all documents without a file share one."""
    if path is None:
        return folder() / "untitled.sheet"
    whole = os.path.abspath(path)
    return folder() / f"{path.stem[:60]}-{hashlib.sha256(whole.encode('utf-8', 'surrogateescape')).hexdigest()[:12]}.sheet"


def keep(document: Document) -> Path | None:
    """Write the text if it is unsaved; return the file written, or None.

    What was kept earlier stays when there is nothing unsaved now: it may not have been offered yet. Never raises: a full disk
    must not stop the work.
    """
    if not document.changed:
        return None
    target = place(document.path)
    try:
        target.parent.mkdir(mode=0o700, parents=True, exist_ok=True)
        write_text(target, document.text)
    except (SheetError, OSError):
        return None
    return target


def drop(path: Path | None) -> None:
    """Remove the rescue file of the document at `path`, if there is one."""
    with contextlib.suppress(OSError):
        place(path).unlink()


def found(document: Document) -> str | None:
    """Return text rescued earlier that differs from the document's, or None."""
    target = place(document.path)
    if not target.exists():
        return None
    try:
        text = read_text(target)
    except SheetError:
        return None
    return text if text != document.text else None
