"""Reading files that strangers name: only regular ones, only so large, and never one that makes the reader wait."""

from __future__ import annotations

import errno
import os
import stat
from pathlib import Path


class NotRegularError(OSError):
    """The path is that of a folder, a pipe, a device, or a file of the system that is made up while it is read."""


class TooLargeError(OSError):
    """The file is larger than what may be read; `size` is its size in bytes."""

    def __init__(self, size: int) -> None:
        super().__init__(f"it holds {size} bytes")
        self.size = size


def read_regular(path: Path | str, most: int) -> bytes:
    """Return the bytes of a regular file of at most `most` bytes; raises OSError (also for a path that cannot be one).

    Files that say they are empty, as those under /proc do, are taken at their word: reading them could go on for ever.
    """
    try:
        handle = os.open(path, os.O_RDONLY | os.O_NONBLOCK | os.O_NOCTTY | os.O_CLOEXEC)
    except ValueError as error:
        raise OSError(errno.EINVAL, str(error)) from None
    try:
        found = os.fstat(handle)
        if not stat.S_ISREG(found.st_mode):
            raise NotRegularError(errno.EINVAL, "it is not a regular file")
        if found.st_size > most:
            raise TooLargeError(found.st_size)
        with os.fdopen(handle, "rb", closefd=False) as file:
            data = file.read(min(found.st_size, most) + 1)[:most] if found.st_size else b""
    finally:
        os.close(handle)
    return data
