"""What all tests share: one thread for linear algebra, and random examples that are the same in every run."""

import os

for name in ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS"):
    os.environ.setdefault(name, "1")

from hypothesis import settings  # noqa: E402 - the threads are bounded first

settings.register_profile("repeatable", derandomize=True, deadline=None, database=None, print_blob=False)
settings.load_profile("repeatable")
