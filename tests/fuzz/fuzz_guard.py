"""What no input may make the program do, watched by an audit hook: code run, files written, processes or connections made."""

from __future__ import annotations

import os
import sys
from collections.abc import Iterator
from contextlib import contextmanager

WRITING = os.O_WRONLY | os.O_RDWR | os.O_CREAT | os.O_TRUNC | os.O_APPEND
CODE = ("compile", "exec", "pickle.find_class", "marshal.loads", "code.__new__", "ctypes.dlopen")
PROCESSES = (
    "subprocess.Popen", "os.system", "os.exec", "os.fork", "os.forkpty", "os.posix_spawn", "os.spawn", "os.startfile",
    "os.kill",
)  # fmt: skip
CHANGES = (
    "os.mkdir", "os.rename", "os.remove", "os.rmdir", "os.link", "os.symlink", "os.truncate", "os.chmod", "os.chown",
    "os.utime",
    "os.putenv", "os.unsetenv", "os.chdir", "os.setxattr",
)  # fmt: skip
FAMILIES = ("socket.", "shutil.", "tempfile.", "urllib.", "http.", "ftplib.", "smtplib.", "webbrowser.")


class Guard:
    """Notes forbidden events while it is armed; one for the process, for an audit hook can never be taken out."""

    def __init__(self) -> None:
        """Start disarmed."""
        self.armed = False
        self.seen: list[str] = []
        self.mine: frozenset[str] = frozenset()
        sys.addaudithook(self._hook)

    @contextmanager
    def watching(self, *mine: str) -> Iterator[list[str]]:
        """Note what happens inside; the files in `mine` may be written. Yields the list of what was seen."""
        self.seen, self.mine, self.armed = [], frozenset(mine), True
        try:
            yield self.seen
        finally:
            self.armed = False

    def _hook(self, event: str, arguments: tuple[object, ...]) -> None:
        if not self.armed:
            return
        if event == "open":
            path, mode, flags = arguments
            writes = (isinstance(flags, int) and flags & WRITING) or (isinstance(mode, str) and set(mode) & set("wax+"))
            if writes and not isinstance(path, int) and str(path) not in self.mine:
                self.seen.append(f"written: open {path!r}")
        elif event in CHANGES:
            self.seen.append(f"written: {event} {arguments!r}"[:200])
        elif event in CODE or event in PROCESSES or event.startswith(FAMILIES):
            self.seen.append(f"code: {event} {arguments!r}"[:200])


guard = Guard()
