"""Results in files: whole or not at all, and nothing else touched."""

import json
import os
import subprocess
import sys

import pytest
from command_line import QUARTIC, steering

from specterm.cli.output import deliver

ENVIRON = {**os.environ, "PYTHONPATH": os.pathsep.join(sys.path), "OPENBLAS_NUM_THREADS": "1", "PYTHONWARNINGS": "error"}


def process(*words, data=None, **environ):
    """Return what a process of its own did."""
    return subprocess.run(
        [sys.executable, "-m", "specterm", *words], input=data, capture_output=True, env={**ENVIRON, **environ}, check=False
    )


@pytest.mark.parametrize("form", [("--json",), ("--csv",), ()])
def test_the_file_holds_what_would_be_printed(run, tmp_path, form):
    """-o writes what standard output would hold, there and nowhere else; standard output stays empty."""
    words = ("weights", "-e", f"{QUARTIC}; state s = exp(-x^2)", "s", "-n", 3, *form)
    path = tmp_path / "out.txt"
    ran = run(*words, "-o", path)
    assert (ran.status, ran.out) == (0, "")
    assert path.read_text(encoding="utf-8") == run(*words).out
    assert os.listdir(tmp_path) == ["out.txt"]


def test_an_old_file_is_replaced_whole(run, tmp_path):
    """A longer old file is replaced, its permissions kept; a link is followed."""
    path, link = tmp_path / "out.json", tmp_path / "link.json"
    path.write_text("old " * 10_000)
    path.chmod(0o640)
    link.symlink_to(path)
    assert run("levels", "-e", QUARTIC, "--json", "-o", link).status == 0
    assert json.loads(path.read_text(encoding="utf-8"))["complete"]
    assert path.stat().st_mode & 0o777 == 0o640
    assert link.is_symlink()
    assert sorted(os.listdir(tmp_path)) == ["link.json", "out.json"]


@pytest.mark.parametrize("sheet", ["H = x*p; x in (0, 1)", "H = p^2 + kappa; x in (0, 1)"])
def test_an_error_leaves_the_file_alone(run, tmp_path, sheet):
    """When there is no result the old file stays as it was."""
    path = tmp_path / "out.txt"
    path.write_text("old")
    assert run("levels", "-e", sheet, "-o", path).status in (1, 2)
    assert path.read_text() == "old"
    assert os.listdir(tmp_path) == ["out.txt"]


def test_a_failed_write_leaves_no_trace(run, tmp_path, monkeypatch):
    """When the disk is full the old file stays, nothing else is left behind, and the reason is told: exit 2."""
    path = tmp_path / "out.txt"
    path.write_text("old")

    def full(_handle):
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(os, "fsync", full)
    ran = run("levels", "-e", QUARTIC, "-o", path)
    assert ran.status == 2
    assert "no space left" in ran.err.lower()
    assert path.read_text() == "old"
    assert os.listdir(tmp_path) == ["out.txt"]


def test_results_do_not_steer_the_terminal(capsys):
    """Whatever a result holds, control characters in it are replaced on standard output."""
    deliver("a\x1b[2J\x9bb\nc", None)
    told = capsys.readouterr().out
    assert not steering(told)
    assert told.endswith("b\nc\n")


def test_notes_go_to_standard_error(run):
    """Notes and warnings do not mix with the result."""
    ran = run("levels", "-e", "H = p^2 - 2/cosh(x)^2; x in (-inf, inf)", "-n", 3, "--json")
    json.loads(ran.out)
    assert "continuum" in ran.err


def test_as_a_process():
    """As a process of its own: JSON from standard input, exit 0, nothing on standard error."""
    ran = process("levels", "-", "--json", data=QUARTIC.encode())
    assert (ran.returncode, ran.stderr) == (0, b"")
    assert len(json.loads(ran.stdout)["levels"]) == 10


def test_as_a_process_with_errors():
    """Bad input ends a process with 2, bad physics with 1."""
    assert process("levels", "-e", "H = p^2 + kappa; x in (0, 1)").returncode == 2
    ran = process("check", "-e", "H = x*p; x in (-inf, inf)")
    assert (ran.returncode, ran.stderr) == (1, b"")


def test_no_sheet_and_no_terminal():
    """With neither a sheet nor a terminal there is nothing to do: the help on standard error, exit 2."""
    ran = process()
    assert b"usage: specterm" in ran.stderr
    assert ran.returncode == 2


def test_a_dumb_terminal():
    """With TERM=dumb, and no UTF-8, a sheet alone prints levels and figure as plain ASCII and says why."""
    ran = process("-e", QUARTIC, TERM="dumb", LC_ALL="C", PYTHONUTF8="0", PYTHONIOENCODING="ascii")
    assert ran.returncode == 0
    text = ran.stdout.decode("ascii")
    assert "1.06036209048418" in text
    assert not steering(text)
    assert b"no terminal" in ran.stderr


def test_a_reader_that_leaves():
    """When the reader of the output has gone the process ends quietly."""
    program = f"{sys.executable} -m specterm levels -e '{QUARTIC}' -n 200 --json | head -n 1; exit ${{PIPESTATUS[0]}}"
    ran = subprocess.run(["bash", "-c", program], capture_output=True, env=ENVIRON, check=False)
    assert ran.stdout == b"{\n"
    assert b"Traceback" not in ran.stderr
    assert b"BrokenPipe" not in ran.stderr
