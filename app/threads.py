"""One BLAS thread for every process: the chains are what runs side by side.

Threads of BLAS inside two processes on two cores doubled the processor time (measured: 1.4 s alone,
3.1 s with two threads, for eight field solutions).
"""

import os

SINGLE_THREADED = {
    "OPENBLAS_NUM_THREADS": "1",
    "OMP_NUM_THREADS": "1",
    "MKL_NUM_THREADS": "1",
    "VECLIB_MAXIMUM_THREADS": "1",
}


def hold_threads() -> None:
    """Ask for one thread where the user has not asked for another; before numpy is imported."""
    for name, value in SINGLE_THREADED.items():
        os.environ.setdefault(name, value)
