"""Importing what a command needs all at once, in four fifths of the time.

Two things are put off. The collector of cyclic garbage runs the more often the more objects there
are, and modules are objects that stay: a tenth of the time of all imports (measured). And scipy
takes all that numpy has under a name, for which numpy imports its Fortran wrapper generator, that
nobody calls: 30 of 450 ms. It is still loaded by whoever first uses it.
"""

import contextlib
import gc
import importlib.util
import sys
from collections.abc import Iterator

_IDLE_PART = "f2py"  # of numpy


@contextlib.contextmanager
def quick_imports() -> Iterator[None]:
    """Import all that is needed, and as little else as possible, inside this block."""
    with collector_at_rest():
        _put_off(_IDLE_PART)
        yield


@contextlib.contextmanager
def collector_at_rest() -> Iterator[None]:
    """Make many objects inside this block, none of which is garbage to be looked for."""
    was_collecting = gc.isenabled()
    gc.disable()
    try:
        yield
    finally:
        if was_collecting:
            gc.enable()


def _put_off(part: str) -> None:
    """Have a part of numpy loaded at its first use only."""
    import numpy as np

    name = f"numpy.{part}"
    spec = None if name in sys.modules else importlib.util.find_spec(name)
    if spec is None or spec.loader is None:
        return
    spec.loader = importlib.util.LazyLoader(spec.loader)
    module = importlib.util.module_from_spec(spec)
    sys.modules[name] = module
    spec.loader.exec_module(module)
    setattr(np, part, module)
