"""What the machine is: a design file in, the exact cross-section and its punch outline out.

In: the path of a design file and its steel cards (`read_machine`). Out: `CrossSection`
(`draw_section`), named regions of one pole bounded by lines and circular arcs, which every other
room reads; `draw_pole`, its picture as SVG; the winding table; the DXF of the whole lamination.
`Machine` and `MachineDesign` show themselves in a notebook; every error is a `LamwrightError`.
Names load when they are first used.
"""

from importlib import import_module
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from .checks import check_design as check_design
    from .cross_section import cross_section as _cross_section
    from .curves import Edge as Edge
    from .curves import Path as Path
    from .design import MachineDesign as MachineDesign
    from .design import SteelCard as SteelCard
    from .design_file import Machine as Machine
    from .design_file import design_hash as design_hash
    from .design_file import read_design as read_design
    from .design_file import read_machine as read_machine
    from .dxf import read_contours as read_contours
    from .dxf import write_lamination as write_lamination
    from .errors import DesignError as DesignError
    from .errors import Finding as Finding
    from .errors import GeometryError as GeometryError
    from .errors import LamwrightError as LamwrightError
    from .errors import MeshError as MeshError
    from .errors import NotConverged as NotConverged
    from .pole_svg import pole_svg as _pole_svg
    from .section import CrossSection as CrossSection
    from .section import Region as Region
    from .section import Rib as Rib
    from .winding import WindingTable as WindingTable
    from .winding import winding_factor as winding_factor
    from .winding import winding_table as winding_table

    draw_pole = _pole_svg
    draw_section = _cross_section

# Module and name there by the name here, which is none of a module's: Python would put the module
# in its place once that is loaded.
_HOME_OF = {
    "CrossSection": ("section", "CrossSection"),
    "DesignError": ("errors", "DesignError"),
    "Edge": ("curves", "Edge"),
    "Finding": ("errors", "Finding"),
    "GeometryError": ("errors", "GeometryError"),
    "LamwrightError": ("errors", "LamwrightError"),
    "Machine": ("design_file", "Machine"),
    "MachineDesign": ("design", "MachineDesign"),
    "MeshError": ("errors", "MeshError"),
    "NotConverged": ("errors", "NotConverged"),
    "Path": ("curves", "Path"),
    "Region": ("section", "Region"),
    "Rib": ("section", "Rib"),
    "SteelCard": ("design", "SteelCard"),
    "WindingTable": ("winding", "WindingTable"),
    "check_design": ("checks", "check_design"),
    "design_hash": ("design_file", "design_hash"),
    "draw_pole": ("pole_svg", "pole_svg"),
    "draw_section": ("cross_section", "cross_section"),
    "read_contours": ("dxf", "read_contours"),
    "read_design": ("design_file", "read_design"),
    "read_machine": ("design_file", "read_machine"),
    "winding_factor": ("winding", "winding_factor"),
    "winding_table": ("winding", "winding_table"),
    "write_lamination": ("dxf", "write_lamination"),
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
