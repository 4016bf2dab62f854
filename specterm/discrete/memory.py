"""How much memory this process may still take, and a refusal before more is taken."""

from __future__ import annotations

from pathlib import Path

from specterm.errors import PhysicsError

SHARE = 0.5
"""A computation may take this share of what the machine (or its control group) has left."""

SMALL = 3e7
"""Less than this many bytes is taken without a look at what is left."""


def memory_left() -> float:
    """Return the bytes left to this process: the least of the machine's and its control groups'; inf where none tells."""
    left = [_machine()]
    left += [_group("memory.max", "memory.current", folder) for folder in _groups(Path("/sys/fs/cgroup"), "")]
    old = Path("/sys/fs/cgroup/memory")
    left += [_group("memory.limit_in_bytes", "memory.usage_in_bytes", folder) for folder in _groups(old, "memory")]
    return min(left)


def _groups(root: Path, controller: str, told: Path = Path("/proc/self/cgroup")) -> list[Path]:
    """Return the folders of this process's control group and of all above it, up to `root`."""
    found = [root]
    try:
        lines = told.read_text(encoding="utf-8").splitlines()
    except (OSError, ValueError):
        return found
    for line in lines:
        _, controllers, path = (*line.split(":", 2), "", "")[:3]
        if controller in controllers.split(","):
            parts = [part for part in path.split("/") if part not in ("", "..")]
            found += [root.joinpath(*parts[:depth]) for depth in range(1, len(parts) + 1)]
    return found


def _machine() -> float:
    try:
        for line in Path("/proc/meminfo").read_text(encoding="ascii").splitlines():
            if line.startswith("MemAvailable:"):
                return 1024.0 * float(line.split()[1])
    except (OSError, ValueError, IndexError):
        return float("inf")
    return float("inf")


def _group(limit: str, used: str, folder: Path) -> float:
    try:
        return float((folder / limit).read_text(encoding="ascii")) - float((folder / used).read_text(encoding="ascii"))
    except (OSError, ValueError):
        return float("inf")


def refuse_above(needed: float, what: str) -> None:
    """Raise PhysicsError where `needed` bytes for `what` are more than the share of the memory left."""
    if needed < SMALL:
        return
    left = memory_left()
    if needed > SHARE * left:
        raise PhysicsError(
            f"{what} would take {needed / 1e9:.2g} GB, and {left / 1e9:.2g} GB are left",
            mend="ask for fewer levels, or use a larger machine",
        )
