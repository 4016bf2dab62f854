"""Journals that were cut off or are not ours, and workers that die."""

import json
import os
import select
import signal
import subprocess
import sys
from concurrent.futures import ProcessPoolExecutor
from dataclasses import replace

import numpy as np
import pytest
from sweep_making import ANHARMONIC, request, squared

from specterm.analysis import sweep as whole
from specterm.analysis.sweep import sweep
from specterm.analysis.sweep_crews import cluster, processes
from specterm.analysis.sweep_work import Crew, WorkerLost, done_by
from specterm.errors import SheetError, WorkStopped

ASKED = request(ANHARMONIC, "lam=0.1:1:40", count=3)


@pytest.fixture(scope="module")
def uncut():
    """Return the whole sweep, never interrupted."""
    return sweep(ASKED, gaps=False)


def assert_same(found, expected):
    """Assert that two sweeps are the same to the last bit."""
    for name in ("levels", "errors", "branches"):
        assert np.array_equal(getattr(found, name), getattr(expected, name))


def cut_off(path, after):
    """Write a journal that is cut off after so many points."""
    points = []
    with pytest.raises(WorkStopped):
        sweep(ASKED, journal=path, on_point=points.append, should_stop=lambda: len(points) >= after)


def test_going_on_from_a_journal(tmp_path, uncut, monkeypatch):
    """Points in the journal are not computed again, and the result is that of a sweep never interrupted."""
    path = tmp_path / "sweep.journal"
    cut_off(path, 23)
    assert len(path.read_text().splitlines()) == 24
    computed = []
    points_of = whole.points_of
    monkeypatch.setattr(whole, "points_of", lambda *given: (computed.append(p) or p for p in points_of(*given)))
    assert_same(sweep(ASKED, journal=path, gaps=False), uncut)
    assert len(computed) == 40 - 23
    computed.clear()
    assert_same(sweep(ASKED, journal=path, gaps=False), uncut)
    assert computed == []


@pytest.mark.parametrize("lost", [1, 30, 200])
def test_a_line_cut_short_is_dropped(tmp_path, uncut, lost):
    """A last line cut by a kill is dropped and its point computed again."""
    path = tmp_path / "sweep.journal"
    cut_off(path, 11)
    path.write_bytes(path.read_bytes()[:-lost])
    assert_same(sweep(ASKED, journal=path, gaps=False), uncut)
    assert len(path.read_text().splitlines()) == 41


def test_a_header_cut_short_begins_anew(tmp_path, uncut):
    """A journal that was killed in its first line is begun again."""
    path = tmp_path / "sweep.journal"
    cut_off(path, 4)
    path.write_bytes(path.read_bytes()[:20])
    assert_same(sweep(ASKED, journal=path, gaps=False), uncut)


@pytest.mark.parametrize("content", [
    b"lam,level\n1,2\n", b"\x00\xff\xfe" * 100, b"{}\n", b"[1, 2]\n", b"null\n", b"[" * 100_000 + b"\n", b"not a journal",
])  # fmt: skip
def test_files_that_are_no_journal_are_left_alone(tmp_path, content):
    """A file that is something else is refused and not changed."""
    path = tmp_path / "data.csv"
    path.write_bytes(content)
    with pytest.raises(SheetError, match="no journal"):
        sweep(ASKED, journal=path)
    assert path.read_bytes() == content


@pytest.mark.parametrize("other", [
    replace(ASKED, text=ANHARMONIC.replace("0.1", "0.2")), replace(ASKED, count=4), replace(ASKED, tolerance=1e-9),
    request(ANHARMONIC, "lam=0.1:1:41", count=3),
])  # fmt: skip
def test_a_journal_of_another_request(tmp_path, other):
    """A journal goes with one sheet and one request."""
    path = tmp_path / "sweep.journal"
    cut_off(path, 4)
    before = path.read_bytes()
    with pytest.raises(SheetError, match="another sheet"):
        sweep(other, journal=path)
    assert path.read_bytes() == before


@pytest.mark.parametrize("change", [
    {"levels": [1e400, 1, 2]}, {"levels": ["1", 1.0, 2.0]}, {"levels": 3}, {"index": -1}, {"index": 4000}, {"index": True},
    {"errors": [0.1]}, {"kinds": ["\x1b[2J", "bound", "bound"]}, {"links": [[0, 99, 1.0, 0.0]]}, {"links": [[0]]},
    {"problem": 3}, {"more": 1}, {"quantity": [1.0, 2.0, 3.0]}, {"numbers": [10**400, 1]}, {"complete": "yes"},
])  # fmt: skip
def test_damaged_lines_are_named(tmp_path, change):
    """A line that was not written so is refused with its number, whatever is wrong with it."""
    path = tmp_path / "sweep.journal"
    cut_off(path, 4)
    lines = path.read_text().splitlines()
    lines[2] = json.dumps(json.loads(lines[2]) | change)
    path.write_text("\n".join(lines) + "\n")
    with pytest.raises(SheetError, match="line 3"):
        sweep(ASKED, journal=path)


def test_places_that_cannot_hold_a_journal(tmp_path):
    """Folders and places that do not exist are refused."""
    with pytest.raises(SheetError, match="journal"):
        sweep(ASKED, journal=tmp_path)
    with pytest.raises(SheetError, match="journal"):
        sweep(ASKED, journal=tmp_path / "absent" / "sweep.journal")


def test_a_killed_worker_loses_no_point(uncut):
    """A worker killed in the middle is replaced, and every point comes out as if nothing had happened."""
    made = []
    crew = processes(2)

    def start():
        made.append(crew.start())
        return made[-1]

    def kill(point):
        if len(made) == 1 and point.index > 5:
            os.kill(next(iter(made[0]._processes)), signal.SIGKILL)

    found = sweep(ASKED, crew=Crew(start, 2), gaps=False, on_point=kill)
    assert len(made) == 2
    assert_same(found, uncut)


def test_a_task_that_kills_its_workers_is_named():
    """A task that kills every worker it is given is named after three tries; others are done or still to do, none wrong."""
    done = []
    work = done_by(Crew(lambda: ProcessPoolExecutor(1), 1), squared, range(10, 17))
    with pytest.raises(WorkerLost, match="13"):
        done.extend(work)
    assert all(result == task**2 for task, result in done)
    assert 10 in dict(done)


def test_workers_that_never_start():
    """Workers that die at once are given up on."""

    def start():
        pool = ProcessPoolExecutor(1)
        pool.shutdown()
        return pool

    with pytest.raises(WorkerLost, match="as soon as they start"):
        list(done_by(Crew(start, 1), squared, [1]))


def test_a_cluster_that_is_not_there():
    """Without the package, or with nobody at the address, the way out is told."""
    with pytest.raises(SheetError, match=r"distributed|answers"):
        cluster("no-such-scheme://here")


def test_workers_end_with_the_process_that_started_them(tmp_path):
    """When the process that hands out the work is killed, its workers end too."""
    script = tmp_path / "parent.py"
    script.write_text(
        "import os, time\n"
        "from specterm.analysis.sweep_crews import processes\n"
        "if __name__ == '__main__':\n"
        "    pool = processes(1).start()\n"
        "    print(pool.submit(os.getpid).result(), flush=True)\n"
        "    time.sleep(600)\n"
    )
    environment = os.environ | {"PYTHONPATH": os.pathsep.join(sys.path)}
    with subprocess.Popen([sys.executable, script], stdout=subprocess.PIPE, env=environment) as parent:
        worker = int(parent.stdout.readline())
        watched = os.pidfd_open(worker)
        parent.kill()
    ended, _, _ = select.select([watched], [], [], 60)
    os.close(watched)
    assert ended


def test_a_dask_cluster(uncut):
    """Any Dask scheduler does: the result is the same to the last bit, and the cluster is left running."""
    distributed = pytest.importorskip("distributed")
    with distributed.LocalCluster(
        n_workers=1, threads_per_worker=2, processes=False, dashboard_address=None, protocol="tcp", host="127.0.0.1"
    ) as local:
        for _ in range(2):
            assert_same(sweep(ASKED, crew=cluster(local.scheduler_address), gaps=False), uncut)
