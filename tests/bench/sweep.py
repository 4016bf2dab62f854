"""Points per second of a 1,000-point sweep of 20 levels: in this process, in one and two others, and on a local Dask scheduler.

Run: python tests/bench/sweep.py [--points 1000] [--levels 20]. Not collected by pytest; nothing is asserted: each line says how
many points came out and whether to the same bits, also with a worker killed in the middle. One thread each. Start-up of workers
is timed apart.
"""

from __future__ import annotations

import one_thread  # noqa: F401 - before numpy

# isort: split
import argparse
import os
import signal
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from importlib.util import find_spec
from pathlib import Path

import numpy as np

from specterm.analysis.sweep import Point, Sweep, SweepRequest, sweep
from specterm.analysis.sweep_crews import cluster, processes
from specterm.analysis.sweep_request import axis_of
from specterm.analysis.sweep_work import Crew

SHEET = "H = p^2/2 + x^2/2 + lam*x^4; lam = 0.1; x in (-inf, inf)"


def timed(request: SweepRequest, crew: Crew | None, on_point: Callable[[Point], None]) -> tuple[Sweep, float, float]:
    """Return the sweep, points per second from the first point on, and seconds until it."""
    first: list[float] = []
    start = time.perf_counter()

    def seen(point: Point) -> None:
        if not first:
            first.append(time.perf_counter())
        on_point(point)

    found = sweep(request, crew=crew, gaps=False, on_point=seen)
    end = time.perf_counter()
    return found, request.size / (end - start if crew is None else end - first[0]), first[0] - start


def report(
    name: str, request: SweepRequest, crew: Crew | None, reference: Sweep | None, kill: Callable[[], None] | None = None
) -> Sweep:
    """Print one line; a worker is killed at half of the points where `kill` is given."""
    done = [0]

    def count(_: Point) -> None:
        done[0] += 1
        if kill is not None and done[0] == request.size // 2:
            kill()

    found, rate, wait = timed(request, crew, count)
    same = "" if reference is None else "same bits" if np.array_equal(found.levels, reference.levels) else "DIFFERENT"
    print(f"{name:42s} {rate:7.1f} points/s   first after {wait:5.2f} s   {int(found.done.sum())} points  {same}", flush=True)
    return found


def killing(crew: Crew) -> tuple[Crew, Callable[[], None]]:
    """Return the crew, and what kills one of its first processes."""
    made: list = []

    def start():
        made.append(crew.start())
        return made[-1]

    return Crew(start, crew.size, crew.stop), lambda: os.kill(next(iter(made[0]._processes)), signal.SIGKILL)


@contextmanager
def scheduler(workers: int) -> Iterator[str]:
    """Start a Dask scheduler and workers of one thread as a batch job would; yield the file with its address."""
    with tempfile.TemporaryDirectory() as folder:
        file = str(Path(folder) / "scheduler.json")
        environment = os.environ | {"PYTHONPATH": str(Path(__file__).resolve().parent.parent.parent)}
        common = {"env": environment, "stdout": subprocess.DEVNULL, "stderr": subprocess.DEVNULL, "cwd": folder}
        started = [subprocess.Popen(
            [sys.executable, "-m", "distributed.cli.dask_scheduler", "--scheduler-file", file, "--port", "0", "--no-dashboard"],
            **common)]  # fmt: skip
        worker = [sys.executable, "-m", "distributed.cli.dask_worker", "--scheduler-file", file, "--nthreads", "1"]
        started += [subprocess.Popen([*worker, "--no-dashboard"], **common) for _ in range(workers)]
        try:
            yield file
        finally:
            for process in started:
                process.terminate()
            for process in started:
                process.wait(20)


def workers_of(file: str) -> list[int]:
    """Return the process numbers of a scheduler's workers, once there are two."""
    from distributed import Client  # noqa: PLC0415

    with Client(scheduler_file=file, set_as_default=False, timeout=30) as client:
        client.wait_for_workers(2, timeout=60)
        return list(client.run(os.getpid).values())


def main() -> None:
    """Print all lines."""
    parser = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    parser.add_argument("--points", type=int, default=1000)
    parser.add_argument("--levels", type=int, default=20)
    options = parser.parse_args()
    request = SweepRequest(SHEET, (axis_of(f"lam=0.1:1.1:{options.points}"),), count=options.levels)
    used = time.process_time()
    here = report("in this process", request, None, None)
    print(f"{'':42s} {options.points / (time.process_time() - used):7.1f} points per second of processor time")
    report("1 worker", request, processes(1), here)
    report("2 workers", request, processes(2), here)
    crew, kill = killing(processes(2))
    report("2 workers, one killed", request, crew, here, kill)
    if find_spec("distributed") is None:
        print("Dask: the package distributed is not installed: left out")
        return
    with scheduler(2) as file:
        pids = workers_of(file)
        report("Dask, 2 workers", request, cluster(file), here)
        report("Dask, 2 workers, one killed", request, cluster(file), here, lambda: os.kill(pids[0], signal.SIGKILL))


if __name__ == "__main__":
    main()
