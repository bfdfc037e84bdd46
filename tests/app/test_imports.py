"""Imports all at once: what is put off is still there, and the collector is as it was."""

import contextlib
import gc
import subprocess
import sys

import pytest

from lamwright.app.imports import quick_imports

PUT_OFF = """
import sys
from lamwright.app.imports import quick_imports
with quick_imports():
    import scipy.sparse
put_off = "numpy.f2py.crackfortran" not in sys.modules
import numpy as np
print(put_off, np.f2py.get_include() == __import__("numpy.f2py").f2py.get_include())
"""


def test_a_part_put_off_is_loaded_by_its_first_use():
    """A new process, since scipy is loaded here; what nobody calls is not imported, yet works."""
    run = [sys.executable, "-c", PUT_OFF]
    told = subprocess.run(run, capture_output=True, text=True, check=True).stdout
    assert told.split() == ["True", "True"]


@pytest.mark.parametrize("is_on", [True, False])
def test_the_collector_is_afterwards_as_before(is_on):
    """Also where an import fails; a caller who has switched it off finds it off."""
    was_on = gc.isenabled()
    try:
        (gc.enable if is_on else gc.disable)()
        with contextlib.suppress(ImportError), quick_imports():
            assert not gc.isenabled()
            raise ImportError("no such module")
        assert gc.isenabled() == is_on
    finally:
        (gc.enable if was_on else gc.disable)()
