"""What is asked of BLAS, and that a user's own wish goes first."""

import os
import subprocess
import sys

import pytest

from lamwright.app import threads
from lamwright.app.threads import has_wide_kernels, hold_threads

FLAGS = "processor : 0\nflags : fpu sse2 {} rdtscp\nbugs :\n"


@pytest.mark.parametrize(
    ("flags", "is_wide"),
    [("avx avx2 fma avx512f", True), ("avx avx2 fma", False), ("avx512f fma", False), ("", False)],
)
def test_wide_kernels_are_told_by_the_processor_s_flags(flags, is_wide, tmp_path, monkeypatch):
    """AVX-512 is not enough: a kernel whose instructions are missing would end the process."""
    file = tmp_path / "cpuinfo"
    file.write_text(FLAGS.format(flags))
    monkeypatch.setattr(threads, "_PROCESSOR", file)
    assert has_wide_kernels() is is_wide


def test_where_the_processor_is_not_told_blas_chooses(tmp_path, monkeypatch):
    """Elsewhere than on Linux there is no such file."""
    monkeypatch.setattr(threads, "_PROCESSOR", tmp_path / "none")
    monkeypatch.delenv("OPENBLAS_CORETYPE", raising=False)
    hold_threads()
    assert "OPENBLAS_CORETYPE" not in os.environ


def test_a_user_s_wish_goes_first(monkeypatch):
    """Variables that are set stay, and numpy runs with what is asked here."""
    monkeypatch.setattr(threads, "has_wide_kernels", lambda: True)
    monkeypatch.setenv("OPENBLAS_CORETYPE", "Prescott")
    monkeypatch.setenv("OMP_NUM_THREADS", "3")
    hold_threads()
    assert (os.environ["OPENBLAS_CORETYPE"], os.environ["OMP_NUM_THREADS"]) == ("Prescott", "3")


def test_numpy_loads_with_what_is_asked():
    """A library that did not know the kernels' name would say so on stderr."""
    code = "import lamwright.app, numpy; print(float((numpy.eye(9) @ numpy.ones(9)).sum()))"
    run = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert (run.stdout, run.stderr) == ("9.0\n", "")
