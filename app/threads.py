"""How BLAS works in every process: one thread, and kernels that suit small blocks.

The chains are what runs side by side. Threads of BLAS inside two processes on two cores doubled the
processor time (measured: 1.4 s alone, 3.1 s with two threads, for eight field solutions).

A sparse factorisation hands BLAS blocks of a few rows, for which OpenBLAS's AVX-512 kernels are too
wide: with those for AVX2 a Newton step takes 0.91 of the time (450 interleaved pairs, 14.7 k
unknowns), and results are the same on machines with and without AVX-512.
"""

import os
from pathlib import Path

SINGLE_THREADED = {
    "OPENBLAS_NUM_THREADS": "1",
    "OMP_NUM_THREADS": "1",
    "MKL_NUM_THREADS": "1",
    "VECLIB_MAXIMUM_THREADS": "1",
}
_PROCESSOR = Path("/proc/cpuinfo")  # Linux; elsewhere OpenBLAS chooses
_WIDE, _NEEDED = "avx512f", {"avx2", "fma"}


def hold_threads() -> None:
    """Ask for one thread and narrow kernels where the user has asked for no other.

    Works only before numpy is imported.
    """
    for name, value in SINGLE_THREADED.items():
        os.environ.setdefault(name, value)
    if has_wide_kernels():
        os.environ.setdefault("OPENBLAS_CORETYPE", "Haswell")  # OpenBLAS's name of AVX2 kernels


def has_wide_kernels() -> bool:
    """Whether this processor has AVX-512, and the instructions of the narrower kernels."""
    try:
        text = _PROCESSOR.read_text(encoding="utf-8", errors="replace")
    except OSError:
        return False
    line = next((line for line in text.splitlines() if line.startswith("flags")), "")
    flags = set(line.partition(":")[2].split())
    return _WIDE in flags and flags >= _NEEDED
