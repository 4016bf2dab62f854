"""Kill an editing session at random moments and see what the next start offers.

Run: python tests/bench/kills.py [--kills 200] [--seed 1]. Not collected by pytest; nothing is asserted. A session in a real
pseudo-terminal types one numbered comment after the other into a sheet, saves it now and then, and is killed (SIGKILL) at a
random moment. Counted: sessions whose text comes back to within a second of the last key sent, and sheets that are damaged
(their file holds neither the text at the start nor one that was typed).
"""

from __future__ import annotations

import argparse
import os
import pty
import random
import select
import shutil
import signal
import sys
import tempfile
import time
from pathlib import Path

REPO = Path(__file__).resolve().parent.parent.parent
sys.path.insert(0, str(REPO))
from specterm.session.store import left_behind  # noqa: E402 - the path is set first

START = "H = p^2/2 + x^2/2\nx in (-inf, inf)\n"
CODE = """import sys
from pathlib import Path
from specterm.tui import run
sys.exit(run(Path(sys.argv[1]).read_text(), Path(sys.argv[1])))
"""
ALLOWED = 1.0


def drained(handle: int, seconds: float) -> None:
    """Read what comes for a while."""
    end = time.monotonic() + seconds
    while (left := end - time.monotonic()) > 0:
        if select.select([handle], [], [], left)[0]:
            try:
                if not os.read(handle, 65536):
                    return
            except OSError:
                return


def one(folder: Path, dice: random.Random) -> tuple[bool, bool, float]:
    """Run one session and kill it; return whether it came back in time, whether the sheet is damaged, and the seconds lost."""
    sheet, state = folder / "a.sheet", folder / "state"
    sheet.write_text(START)
    shutil.rmtree(state, ignore_errors=True)
    pid, handle = pty.fork()
    if pid == 0:
        environ = {**os.environ, "TERM": "xterm-256color", "LANG": "C.UTF-8", "PYTHONPATH": str(REPO)}
        os.execve(sys.executable, [sys.executable, "-c", CODE, str(sheet)], {**environ, "XDG_STATE_HOME": str(state)})
    drained(handle, 2.5)
    os.write(handle, b"e")
    drained(handle, 0.3)
    sent: list[tuple[float, str]] = []
    typed, saves = "", {START}
    end = time.monotonic() + dice.uniform(0.3, 5.0)
    while time.monotonic() < end:
        key = dice.choice("abcdefgh#")
        typed += key
        os.write(handle, key.encode())
        sent.append((time.monotonic(), typed))
        if dice.random() < 0.03:
            os.write(handle, b"\x13")
            saves.add(typed + START)
        drained(handle, dice.uniform(0.02, 0.25))
    os.kill(pid, signal.SIGKILL)
    died = time.monotonic()
    os.waitpid(pid, 0)
    os.close(handle)
    on_disk = sheet.read_text()
    damaged = on_disk != START and not any(on_disk == text + START for _, text in sent)
    os.environ["XDG_STATE_HOME"] = str(state)
    found = [left.saved.document.text for left in left_behind(sheet)]
    known = [at for at, text in sent if text + START in (*found, on_disk)]
    lost = died - max(known, default=sent[0][0] if sent else died)
    return lost <= ALLOWED, damaged, lost


def main() -> None:
    """Print the counts."""
    options = argparse.ArgumentParser()
    options.add_argument("--kills", type=int, default=200)
    options.add_argument("--seed", type=int, default=1)
    chosen = options.parse_args()
    dice = random.Random(chosen.seed)
    back, damaged, losses = 0, 0, []
    with tempfile.TemporaryDirectory() as name:
        for _ in range(chosen.kills):
            came, broken, lost = one(Path(name), dice)
            back, damaged = back + came, damaged + broken
            losses.append(lost)
    losses.sort()
    print(f"{chosen.kills} kills, seed {chosen.seed}: {back} back to within {ALLOWED:g} s of the last key")
    print(f"sheets damaged: {damaged}")
    print(f"time lost: median {losses[len(losses) // 2]:.2f} s, largest {losses[-1]:.2f} s")


if __name__ == "__main__":
    main()
