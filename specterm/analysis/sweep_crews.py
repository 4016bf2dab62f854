"""Workers for a sweep: processes on this machine, or a Dask cluster."""

from __future__ import annotations

import multiprocessing
import os
import signal
import threading
from concurrent.futures import Executor, ProcessPoolExecutor
from multiprocessing.connection import wait
from typing import Any

from specterm.analysis.sweep_work import Crew
from specterm.errors import SheetError, printable

THREADS = ("OPENBLAS_NUM_THREADS", "OMP_NUM_THREADS", "MKL_NUM_THREADS")
REACHED = 20
"""Seconds to reach a scheduler."""


def processes(workers: int) -> Crew:
    """Return a crew of processes, each with one thread for linear algebra."""

    def start() -> Executor:
        for name in THREADS:
            os.environ.setdefault(name, "1")
        return ProcessPoolExecutor(workers, mp_context=multiprocessing.get_context("spawn"), initializer=_bound)

    return Crew(start, workers)


def _bound() -> None:
    """Leave the interrupt key to the process that hands out the work, and end when it ends, however it does."""
    signal.signal(signal.SIGINT, signal.SIG_IGN)
    parent = multiprocessing.parent_process()
    if parent is not None:
        threading.Thread(target=_end_with, args=(parent.sentinel,), daemon=True).start()


def _end_with(sentinel: int) -> None:
    wait([sentinel])
    os._exit(1)


def cluster(address: str) -> Crew:
    """Return the workers of the Dask scheduler at an address, such as tcp://node7:8786, or named by a file it wrote.

    Raises SheetError where the package is missing or nobody answers.
    """
    client = _client(address)
    size = sum(client.nthreads().values())
    if size == 0:
        client.close()
        raise SheetError(f"the scheduler at {printable(address)} has no workers yet", mend="start workers and try again")
    return Crew(client.get_executor, size, lambda executor: _leave(executor, client))


def _client(address: str) -> Any:  # noqa: ANN401 - the package is optional and carries no types
    try:
        from distributed import Client  # noqa: PLC0415 - optional
    except ImportError:
        raise SheetError(
            "--cluster needs the package distributed", mend="install specterm with its extra: pip install 'specterm[cluster]'"
        ) from None
    start: Any = Client
    where = {"scheduler_file": address} if os.path.isfile(address) else {"address": address}
    try:
        return start(timeout=REACHED, set_as_default=False, **where)
    except (OSError, ValueError, TimeoutError) as error:
        raise SheetError(
            f"no scheduler answers at {printable(address)}: {printable(str(error))[:120]}",
            mend="give the address the scheduler printed, or the file it wrote",
        ) from None


def _leave(executor: Executor, client: Any) -> None:  # noqa: ANN401 - as above
    """End the work on the cluster and the connection to it; the cluster itself stays."""
    executor.shutdown(wait=False)
    client.close()
