"""What it means: fields in, figures, verdict, tables and pictures out.

In: `FieldSolution` at the positions of a waveform and `StressSolution` at overspeed. Out:
`TorqueWaveform`, `RibReport`, `Verdict` (`all_figures` gives every figure with its unit), the files
of the output folder. `read_flux_map` gives back the `FluxMap` of a `map.nc`, `surface_of_map`
what lies between its nodes. `Verdict` and `FluxMap` show themselves in a notebook. Names load when
they are first used.
"""

from importlib import import_module
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from .coenergy_surface import CoenergySurface as CoenergySurface
    from .coenergy_surface import coenergy_surface as _coenergy_surface
    from .figures import Pictured as Pictured
    from .figures import write_figures as write_figures
    from .flux_map import FluxMap as FluxMap
    from .flux_map import apparent_inductances as apparent_inductances
    from .flux_map import mean_linkages as mean_linkages
    from .flux_map import mean_torque as mean_torque
    from .map_files import read_flux_map as read_flux_map
    from .quantities import Figure as Figure
    from .report import Report as Report
    from .report_html import report_html as _report_html
    from .report_pdf import report_pdf as _report_pdf
    from .ribs import RibReport as RibReport
    from .ribs import rib_report as rib_report
    from .torque import TorqueWaveform as TorqueWaveform
    from .verdict import Verdict as Verdict
    from .verdict import all_figures as all_figures
    from .verdict import judged as judged

    html_of_report = _report_html
    pdf_of_report = _report_pdf
    surface_of_map = _coenergy_surface

# Module and name there by the name here, which is none of a module's: Python would put the module
# in its place once that is loaded.
_HOME_OF = {
    "CoenergySurface": ("coenergy_surface", "CoenergySurface"),
    "Figure": ("quantities", "Figure"),
    "FluxMap": ("flux_map", "FluxMap"),
    "Pictured": ("figures", "Pictured"),
    "Report": ("report", "Report"),
    "RibReport": ("ribs", "RibReport"),
    "TorqueWaveform": ("torque", "TorqueWaveform"),
    "Verdict": ("verdict", "Verdict"),
    "all_figures": ("verdict", "all_figures"),
    "apparent_inductances": ("flux_map", "apparent_inductances"),
    "html_of_report": ("report_html", "report_html"),
    "judged": ("verdict", "judged"),
    "mean_linkages": ("flux_map", "mean_linkages"),
    "mean_torque": ("flux_map", "mean_torque"),
    "pdf_of_report": ("report_pdf", "report_pdf"),
    "read_flux_map": ("map_files", "read_flux_map"),
    "rib_report": ("ribs", "rib_report"),
    "surface_of_map": ("coenergy_surface", "coenergy_surface"),
    "write_figures": ("figures", "write_figures"),
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
