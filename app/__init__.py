"""The front door: all jobs of the command line, from Python.

A job takes a file and a folder, each as text or `Path`, writes into the folder what its command
writes, and returns what it found; it prints nothing and asks nothing. `progress` arguments are
called with a phase and a share.

| job | function |
|---|---|
| a first design for a stator | `start_design(StartChoices(...))` |
| the design and its cards (a notebook shows it); one field solution | `read_machine`, `solve` |
| geometry and DXF; the verdict of one design | `outline`, `assess` |
| the same of a rotor as supplied | `assess_outline(..., OutlineWishes(file))` |
| flux map, ribs, tolerances, slopes | `map_design`, `ribs_design`, `spread_design`, `slope_table` |
| studies: compute, search, look up, draw | `sweep_study`, `search_study`, `Ledger`, `draw_study` |
| the supplier's package | `release_design`, `verify_package`, `compare_designs` |

Errors are `lamwright.geometry.LamwrightError`, one line a fault. Names load when they are first
used. In a script `sweep_study` and `search_study` need `if __name__ == "__main__":` around all of
it, since their workers load the script anew; in a notebook they do not.
"""

from importlib import import_module
from typing import TYPE_CHECKING

from .threads import hold_threads

if TYPE_CHECKING:
    from .compare import compare as _compare
    from .lamination import outline as outline
    from .ledger import Ledger as Ledger
    from .map_grid import GridWishes as GridWishes
    from .map_run import map_design as map_design
    from .outline_run import OutlineWishes as OutlineWishes
    from .outline_run import assess_outline as assess_outline
    from .point import read_machine as read_machine
    from .point import solve as solve
    from .release import ReleaseWishes as ReleaseWishes
    from .release import release as _release
    from .rib_run import ribs_design as ribs_design
    from .run import assess as assess
    from .search_run import search as _search
    from .search_state import SearchSettings as SearchSettings
    from .slopes import slopes as _slopes
    from .spread import SpreadWishes as SpreadWishes
    from .spread import spread as _spread
    from .start import StartChoices as StartChoices
    from .start import start as _start
    from .study_hire import PoolWishes as PoolWishes
    from .study_pictures import write_pictures as _write_pictures
    from .sweep import sweep as _sweep
    from .verify import verify as _verify

    compare_designs = _compare
    draw_study = _write_pictures
    release_design = _release
    search_study = _search
    slope_table = _slopes
    spread_design = _spread
    start_design = _start
    sweep_study = _sweep
    verify_package = _verify

hold_threads()  # works only before numpy is imported, so it cannot wait for a name

# Module and name there by the name here, which is none of a module's: Python would put the module
# in its place once that is loaded.
_HOME_OF = {
    "GridWishes": ("map_grid", "GridWishes"),
    "Ledger": ("ledger", "Ledger"),
    "OutlineWishes": ("outline_run", "OutlineWishes"),
    "PoolWishes": ("study_hire", "PoolWishes"),
    "ReleaseWishes": ("release", "ReleaseWishes"),
    "SearchSettings": ("search_state", "SearchSettings"),
    "SpreadWishes": ("spread", "SpreadWishes"),
    "StartChoices": ("start", "StartChoices"),
    "assess": ("run", "assess"),
    "assess_outline": ("outline_run", "assess_outline"),
    "compare_designs": ("compare", "compare"),
    "draw_study": ("study_pictures", "write_pictures"),
    "map_design": ("map_run", "map_design"),
    "outline": ("lamination", "outline"),
    "read_machine": ("point", "read_machine"),
    "release_design": ("release", "release"),
    "ribs_design": ("rib_run", "ribs_design"),
    "search_study": ("search_run", "search"),
    "slope_table": ("slopes", "slopes"),
    "solve": ("point", "solve"),
    "spread_design": ("spread", "spread"),
    "start_design": ("start", "start"),
    "sweep_study": ("sweep", "sweep"),
    "verify_package": ("verify", "verify"),
}

__all__ = sorted(_HOME_OF)


def __getattr__(name: str) -> object:
    if name not in _HOME_OF:
        raise AttributeError(f"{__name__} has no {name}")
    module, own = _HOME_OF[name]
    return getattr(import_module(f".{module}", __name__), own)


def __dir__() -> list[str]:
    """The names that are to be used, so that a notebook completes them."""
    return __all__
