"""Sessions on the disk, so that a dropped connection, a kill or a crash loses nothing.

Every running session has a file of its own in the state folder, replaced whole at each change, and holds a lock beside it. A
file whose lock nobody holds was left behind: the next session for the same sheet offers it. Nothing here raises for what the
disk refuses: the work must go on.
"""

from __future__ import annotations

import contextlib
import fcntl
import hashlib
import os
import secrets
from dataclasses import dataclass
from pathlib import Path

from specterm.errors import SheetError
from specterm.session.document import read_text, write_text
from specterm.session.place import folder
from specterm.session.saved import LARGEST_SESSION, Saved, saved_from, text_of

KEPT = 100
"""Sessions left in order that are remembered, the newest ones."""


def sessions() -> Path:
    """Return the folder of the session files."""
    return folder() / "sessions"


def key_of(path: Path | None) -> str:
    """Return what the files of sessions for the sheet at `path` start with; all sheets without a file share one."""
    if path is None:
        return "untitled"
    whole = os.path.abspath(path)
    digest = hashlib.sha256(whole.encode("utf-8", "surrogateescape")).hexdigest()[:12]
    return f"{''.join(c if c.isalnum() else '_' for c in path.stem)[:40]}-{digest}"


class Store:
    """The file of one running session."""

    def __init__(self) -> None:
        """Start without a file; the first `keep` makes one."""
        self._name = ""
        self._lock: int | None = None
        self._file: Path | None = None

    @property
    def file(self) -> Path | None:
        """The session's file, None while there is none."""
        return self._file

    def keep(self, saved: Saved) -> bool:
        """Write the session; return whether that worked. A session not worth keeping leaves no file."""
        key = key_of(saved.document.path)
        if self._file is not None and not self._name.startswith(key + "."):
            self.drop()
        if not saved.worth_keeping:
            self.drop()
            return True
        try:
            self._begin(key)
            if self._file is None:
                return False
            write_text(self._file, text_of(saved), durable=False)
        except (SheetError, OSError, ValueError):
            return False
        return True

    def _begin(self, key: str) -> None:
        """Take a name and its lock."""
        if self._lock is not None:
            return
        place = sessions()
        place.mkdir(mode=0o700, parents=True, exist_ok=True)
        self._name = f"{key}.{os.getpid()}-{secrets.token_hex(4)}"
        self._lock = _locked(place / f"{self._name}.lock")
        self._file = place / f"{self._name}.json"

    def drop(self) -> None:
        """Remove the session's file; nothing of it is wanted any more."""
        if self._file is not None:
            _remove(self._file)
        self._unlock()

    def leave(self) -> None:
        """Let the file lie for the next session."""
        self._unlock()

    def _unlock(self) -> None:
        """Give the lock back."""
        if self._lock is not None and self._file is not None:
            with contextlib.suppress(OSError):
                self._file.with_suffix(".lock").unlink()
            with contextlib.suppress(OSError):
                os.close(self._lock)
        self._lock = self._file = None


@dataclass(frozen=True)
class Left:
    """A session that was left behind, and its file."""

    saved: Saved
    file: Path

    def remove(self) -> None:
        """Remove it: it has been taken up, or is not wanted."""
        _remove(self.file)
        with contextlib.suppress(OSError):
            self.file.with_suffix(".lock").unlink()


def left_behind(path: Path | None) -> tuple[Left, ...]:
    """Return sessions for the sheet at `path` that no running one owns, the newest first; unreadable ones are passed over."""
    found = []
    with contextlib.suppress(OSError):
        for file in sorted(sessions().glob(f"{key_of(path)}.*.json"), key=_age, reverse=True):
            if _owned(file.with_suffix(".lock")):
                continue
            with contextlib.suppress(SheetError):
                found.append(Left(saved_from(read_text(file, LARGEST_SESSION)), file))
    return tuple(found)


def tidy() -> None:
    """Remove the oldest sessions where there are more than are kept."""
    with contextlib.suppress(OSError):
        files = [file for file in sessions().glob("*.json") if not _owned(file.with_suffix(".lock"))]
        for file in sorted(files, key=_age)[: max(0, len(files) - KEPT)]:
            _remove(file)


def _age(file: Path) -> float:
    try:
        return file.stat().st_mtime
    except OSError:
        return 0.0


def _remove(file: Path) -> None:
    with contextlib.suppress(OSError):
        file.unlink()


def _locked(file: Path) -> int:
    """Return a descriptor that holds a lock; where the file system knows no locks the file itself says who holds it."""
    handle = os.open(file, os.O_RDWR | os.O_CREAT | os.O_CLOEXEC | os.O_NOFOLLOW, 0o600)
    with contextlib.suppress(OSError):
        os.write(handle, f"{os.uname().nodename} {os.getpid()}\n".encode())
        fcntl.flock(handle, fcntl.LOCK_EX | fcntl.LOCK_NB)
    return handle


def _owned(file: Path) -> bool:
    """Return whether a running session holds a lock."""
    try:
        handle = os.open(file, os.O_RDWR | os.O_CLOEXEC | os.O_NOFOLLOW)
    except FileNotFoundError:
        return False
    except OSError:
        return True
    try:
        fcntl.flock(handle, fcntl.LOCK_EX | fcntl.LOCK_NB)
    except BlockingIOError:
        return True
    except OSError:
        return _alive(os.read(handle, 200))
    finally:
        os.close(handle)
    return False


def _alive(words: bytes) -> bool:
    """Return whether the process that a lock file names runs; one on another machine counts as running."""
    host, _, number = words.decode("utf-8", "replace").strip().partition(" ")
    if host != os.uname().nodename or not number.isdigit():
        return True
    try:
        os.kill(int(number), 0)
    except ProcessLookupError:
        return False
    except (OSError, OverflowError):
        return True
    return True
