"""What it means: fields in, figures, verdict, tables and pictures out.

In: `FieldSolution` at the positions of a waveform and `StressSolution` at overspeed. Out:
`TorqueWaveform`, `RibReport`, `Verdict`, the files of the output folder. Names load when they are
first used.
"""

from importlib import import_module
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from .figures import Pictured as Pictured
    from .figures import write_figures as write_figures
    from .ribs import RibReport as RibReport
    from .ribs import rib_report as rib_report
    from .torque import TorqueWaveform as TorqueWaveform
    from .verdict import Verdict as Verdict
    from .verdict import judged as judged

_HOME_OF = {
    "Pictured": "figures",
    "RibReport": "ribs",
    "TorqueWaveform": "torque",
    "Verdict": "verdict",
    "judged": "verdict",
    "rib_report": "ribs",
    "write_figures": "figures",
}

__all__ = sorted(_HOME_OF)


def __getattr__(name: str) -> object:
    if name not in _HOME_OF:
        raise AttributeError(f"{__name__} has no {name}")
    return getattr(import_module(f".{_HOME_OF[name]}", __name__), name)
