"""Hostile inputs: a bounded, seeded run, every input that ever failed, and what is no file at all."""

import json
import os
import shlex
import subprocess
import sys
from pathlib import Path

import pytest

from specterm.errors import SheetError
from specterm.session.notebook import notebook_from
from specterm.session.pins import pin_from

HERE = Path(__file__).parent
ROOT = HERE.parents[1]
CORPUS = sorted(path for path in (HERE / "corpus").iterdir() if path.suffix in {".sheet", ".csv"})
CHILD = [sys.executable, str(HERE / "run.py")]
SPECIAL = (
    "fifo", "zero", "directory", "circle", "missing.csv", "huge.csv", "/dev/zero", "/proc/self/environ", "/proc/self/mem",
)  # fmt: skip


def ran(*words: str, patience: int = 1) -> subprocess.CompletedProcess[str]:
    """Run the fuzzer in a process of its own, for an audit hook stays for ever."""
    settings = {**os.environ, "FUZZ_PATIENCE": str(patience)}
    return subprocess.run([*CHILD, *words], capture_output=True, text=True, timeout=600, check=False, env=settings)


def specterm(*words: str, data: bytes = b"") -> subprocess.CompletedProcess[bytes]:
    """Run the command line with data on its standard input."""
    command = [sys.executable, "-m", "specterm", *words]
    return subprocess.run(command, input=data, capture_output=True, timeout=60, check=False, cwd=ROOT)


@pytest.mark.parametrize("words", [("--sheets", "700", "--tables", "200"), ("--corpus",)], ids=["seeded", "corpus"])
def test_nothing_hostile_does_harm(words):
    """No input crashes, hangs, writes a file, runs code, or passes a control character on."""
    result = ran(*words, "--seed", "20261201", "--processes", "1", patience=10)
    assert result.returncode == 0, result.stdout[-4000:] + result.stderr[-2000:]


def test_the_run_finds_what_it_looks_for():
    """The watch itself works: planted faults of every sort are all reported."""
    result = ran("--planted")
    found = {line.split(": ")[1] for line in result.stdout.splitlines() if line.startswith("  --")}
    assert found == {"crash", "hang", "late", "written", "code", "control"}


@pytest.fixture(scope="module")
def strange(tmp_path_factory):
    """Return a folder with files that are none: a pipe, links to a device and to itself, a folder, an endless file."""
    folder = tmp_path_factory.mktemp("strange")
    os.mkfifo(folder / "fifo")
    (folder / "zero").symlink_to("/dev/zero")
    (folder / "circle").symlink_to("circle")
    (folder / "directory").mkdir()
    with (folder / "huge.csv").open("wb") as file:
        file.truncate(60_000_000)
    return folder


@pytest.mark.parametrize("name", SPECIAL)
def test_what_is_no_plain_file_is_refused(strange, name):
    """Pipes, devices, folders, circles and endless files are refused as a sheet, a table, another sheet and observed lines."""
    sheet = strange / "good.sheet"
    path = name if name.startswith("/") else str(strange / name)
    sheet.write_text(f'H = p^2 + x^2\nx in (-1, 1)\nV = table("{path}")\n')
    lines = strange / "lines.sheet"
    lines.write_text(f'H = p^2 + k*x^2\nk = 1\nx in (-inf, inf)\nstate s = level(0) of "{path}"\n')
    fit = ("fit", str(lines), path, "--vary", "k")
    for words in (("levels", path), ("check", str(sheet)), ("weights", str(lines), "s"), fit):
        result = specterm(*words)
        assert result.returncode == 2, (words, result.stderr)
        assert b"failed here" not in result.stderr


def test_endless_input_is_refused():
    """Standard input that goes on for ever, or is not text, is refused after 1 MB."""
    for device in ("/dev/zero", "/dev/urandom"):
        with open(device, "rb") as endless:
            command = [sys.executable, "-m", "specterm", "levels", "-"]
            result = subprocess.run(command, stdin=endless, capture_output=True, timeout=60, check=False, cwd=ROOT)
        assert result.returncode == 2
        assert b"too large" in result.stderr


def test_control_characters_do_not_reach_the_terminal():
    """Whatever is given, in a sheet, an argument or a name of a file, comes out harmless."""
    evil = "\x1b]0;x\x07\u202e\x9b2J\u200b"
    good = "H = p^2 + k*x^2; k = 1; x in (-inf, inf)"
    for words, data in (
        (("levels", "-"), f"H = p^2 # {evil}\nx in (0, 1)"),
        (("levels", "-e", f"H = p^2 + {evil}; x in (0, 1)"), ""),
        (("levels", "-e", f'H = p^2 + table("{evil}"); x in (0, 1)'), ""),
        (("levels", "-e", good, f"--set={evil}=1"), ""),
        (("levels", "-e", good, f"--set=k={evil}"), ""),
        (("levels", "-e", good, "--tol", evil), ""),
        (("expectation", "-e", good, evil), ""),
        (("sweep", "-e", good, f"{evil}=1:2:3"), ""),
        (("levels", evil), ""),
        ((evil,), ""),
    ):
        result = specterm(*words, data=data.encode())
        said = (result.stdout + result.stderr).decode()
        assert result.returncode == 2, words
        assert all(c.isprintable() or c == "\n" for c in said), (words, said)


@pytest.mark.parametrize("path", CORPUS, ids=lambda path: path.name)
def test_corpus_is_small_and_says_how_it_is_run(path):
    """Every kept input is small; a command line in its first line can be read."""
    data = path.read_bytes()
    assert len(data) < 50_000
    if data.startswith(b"# words: "):
        assert shlex.split(data.split(b"\n", 1)[0].decode()[9:])


def test_parts_of_sessions_with_odd_numbers_are_refused():
    """Numbers that nothing could be done with are no notebook and no pin."""
    for seed in (-1, 10**30, float("inf"), None):
        with pytest.raises(SheetError):
            notebook_from({"seed": seed, "entries": []})
    deep = json.loads("[" * 900 + "]" * 900)
    with pytest.raises(SheetError):
        pin_from({"name": "a", "text": "b", "folder": "c", "count": deep, "near": None, "tolerance": 1e-8})
