"""`python -m specterm`, and the `specterm` command."""

from __future__ import annotations

import os
import sys


def main() -> int:
    """Bound the threads of the linear algebra before anything imports it, then run the command line."""
    for name in ("OPENBLAS_NUM_THREADS", "OMP_NUM_THREADS", "MKL_NUM_THREADS"):
        os.environ.setdefault(name, "1")
    from specterm.cli import main as run  # noqa: PLC0415 - the threads are bounded first

    return run(sys.argv[1:])


if __name__ == "__main__":
    sys.exit(main())
