"""The journal of a sweep: a line of JSON for each point done, so that a sweep that was cut off goes on where it was.

The first line says what it is and holds a fingerprint of the request; nothing in the file is ever run.
"""

from __future__ import annotations

import contextlib
import fcntl
import json
import math
import os
import stat
from dataclasses import asdict, dataclass, fields
from pathlib import Path
from types import TracebackType
from typing import Any, BinaryIO

from specterm.analysis.sweep_point import Point
from specterm.analysis.sweep_request import SweepRequest, fingerprint
from specterm.errors import SheetError, printable

FORMAT = "specterm sweep 1"
LONGEST = 20_000_000
"""The longest line read, in bytes."""
_NAMES = tuple(field.name for field in fields(Point))


@dataclass
class Journal:
    """A journal open for writing, with the points it held when it was opened."""

    file: BinaryIO
    points: dict[int, Point]
    path: Path

    def __enter__(self) -> Journal:
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        with contextlib.suppress(OSError):
            os.fsync(self.file.fileno())
        with contextlib.suppress(OSError):
            self.file.close()

    def add(self, point: Point) -> None:
        """Write a point, at once and whole; SheetError where the disk refuses."""
        line = json.dumps(asdict(point), separators=(",", ":"), allow_nan=False).encode() + b"\n"
        try:
            self.file.write(line)
            self.file.flush()
        except OSError as error:
            what = f"cannot be written: {error.strerror}"
            raise _refused(self.path, what, "free some space: what is written counts") from None


def open_journal(path: Path, request: SweepRequest) -> Journal:
    """Return the journal of a request, made where there is none; a last line cut short is dropped.

    Raises SheetError where the file is no journal, that of another request, damaged before its end, or in use.
    """
    try:
        handle = os.open(path, os.O_RDWR | os.O_CREAT | os.O_CLOEXEC | os.O_NONBLOCK, 0o666)
    except (OSError, ValueError) as error:
        raise _refused(path, f"cannot be opened: {getattr(error, 'strerror', error)}", "choose another file") from None
    if not stat.S_ISREG(os.fstat(handle).st_mode):
        os.close(handle)
        raise _refused(path, "is not a regular file", "choose another file")
    file = os.fdopen(handle, "r+b")
    try:
        fcntl.flock(handle, fcntl.LOCK_EX | fcntl.LOCK_NB)
    except OSError:
        file.close()
        raise _refused(path, "is in use by another sweep", "wait for it, or choose another file") from None
    try:
        return Journal(file, _read(file, path, request), path)
    except BaseException:
        file.close()
        raise


def _read(file: BinaryIO, path: Path, request: SweepRequest) -> dict[int, Point]:
    """Return the points in the file, which is left ready to be added to."""
    header = {"format": FORMAT, "request": fingerprint(request)}
    first = file.readline(LONGEST)
    written = json.dumps(header).encode() + b"\n"
    if first == b"" or (not first.endswith(b"\n") and written.startswith(first)):
        file.seek(0)
        file.truncate()
        file.write(written)
        file.flush()
        return {}
    found = _parsed(first)
    if not isinstance(found, dict) or found.get("format") != FORMAT:
        raise _refused(path, "is no journal of a sweep", "choose another file; this one was left as it is")
    if found != header:
        raise _refused(path, "belongs to another sheet or another sweep", "give the same sheet and options, or another file")
    points: dict[int, Point] = {}
    row, good = 1, len(first)
    while line := file.readline(LONGEST):
        row += 1
        if not line.endswith(b"\n"):
            if len(line) == LONGEST:
                raise _refused(path, f"is damaged at line {row}", "remove the line, or begin with another file")
            break
        point = _point(_parsed(line), request)
        if point is None:
            raise _refused(path, f"is damaged at line {row}", "remove the line, or begin with another file")
        points[point.index] = point
        good += len(line)
    file.seek(good)
    file.truncate()
    return points


def _refused(path: Path, what: str, mend: str) -> SheetError:
    return SheetError(f"the journal {printable(str(path))} {what}", mend=mend)


def _parsed(line: bytes) -> Any:  # noqa: ANN401 - whatever JSON holds; checked by who asks
    try:
        return json.loads(line)
    except (ValueError, RecursionError):
        return None


def _point(found: Any, request: SweepRequest) -> Point | None:  # noqa: ANN401 - as above
    """Return the point a line holds, None where anything about it is not as it was written."""
    if not isinstance(found, dict) or set(found) != set(_NAMES) or not isinstance(found["levels"], list):
        return None
    size = len(found["levels"])
    asked = size if request.quantity.kind != "levels" else 0
    good = (
        type(found["index"]) is int and 0 <= found["index"] < request.size,
        _listed(found["levels"], _is_number) and _listed(found["numbers"], _is_count, size),
        _listed(found["errors"], _is_known, size) and _listed(found["kinds"], _is_word, size),
        _listed(found["quantity"], _is_known, asked) and _listed(found["quantity_errors"], _is_known, asked),
        _listed(found["links"], lambda link: _is_link(link, size)),
        isinstance(found["problem"], str) and type(found["complete"]) is bool,
    )
    if not all(good):
        return None
    parts: dict[str, Any] = {name: tuple(value) if isinstance(value, list) else value for name, value in found.items()}
    parts["links"] = tuple((a, b, float(re), float(im)) for a, b, re, im in found["links"])
    parts["problem"] = printable(found["problem"])[:1000]
    return Point(**parts)


def _listed(value: Any, right, length: int | None = None) -> bool:  # type: ignore[no-untyped-def]  # noqa: ANN001, ANN401
    """Say whether a value is a list of so many right things."""
    return isinstance(value, list) and (length is None or len(value) == length) and all(right(one) for one in value)


def _is_number(value: object) -> bool:
    return type(value) is float and math.isfinite(value)


def _is_known(value: object) -> bool:
    return value is None or _is_number(value)


def _is_count(value: object) -> bool:
    return type(value) is int


def _is_word(value: object) -> bool:
    return value in ("bound", "box", "band", "resonance", "unresolved")


def _is_link(value: object, levels: int) -> bool:
    if not isinstance(value, list) or len(value) != 4:
        return False
    a, b, re, im = value
    counts = type(a) is int and type(b) is int and 0 <= a < 1_000_000 and 0 <= b < levels
    return counts and all(_is_number(part) and abs(part) < 2 for part in (re, im))
