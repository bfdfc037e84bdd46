"""The front door: commands, and the same from Python.

In: a design file. Out: a folder with verdict, tables, pictures and punch outline (`assess`,
`outline`), or one field solution (`read_machine`, `solve`). Names load when they are first used.
"""

from importlib import import_module
from typing import TYPE_CHECKING

from .threads import hold_threads

if TYPE_CHECKING:
    from .lamination import outline as outline
    from .point import read_machine as read_machine
    from .point import solve as solve
    from .run import assess as assess

hold_threads()  # works only before numpy is imported, so it cannot wait for a name

_HOME_OF = {
    "assess": "run",
    "outline": "lamination",
    "read_machine": "point",
    "solve": "point",
}

__all__ = sorted(_HOME_OF)


def __getattr__(name: str) -> object:
    if name not in _HOME_OF:
        raise AttributeError(f"{__name__} has no {name}")
    return getattr(import_module(f".{_HOME_OF[name]}", __name__), name)
