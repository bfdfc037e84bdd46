"""What the machine is: a design file in, the exact cross-section and its punch outline out.

In: the path of a design file and its steel cards (`read_machine`). Out: `CrossSection`, named
regions of one pole bounded by lines and circular arcs, which every other room reads; the winding
table; the DXF of the whole lamination. Names load when they are first used.
"""

from importlib import import_module
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from .checks import check_design as check_design
    from .cross_section import cross_section as cross_section
    from .curves import Edge as Edge
    from .curves import Path as Path
    from .design import MachineDesign as MachineDesign
    from .design import SteelCard as SteelCard
    from .design_file import Machine as Machine
    from .design_file import design_hash as design_hash
    from .design_file import read_machine as read_machine
    from .dxf import read_contours as read_contours
    from .dxf import write_lamination as write_lamination
    from .errors import DesignError as DesignError
    from .errors import Finding as Finding
    from .errors import GeometryError as GeometryError
    from .errors import LamwrightError as LamwrightError
    from .errors import MeshError as MeshError
    from .errors import NotConverged as NotConverged
    from .section import CrossSection as CrossSection
    from .section import Region as Region
    from .section import Rib as Rib
    from .winding import WindingTable as WindingTable
    from .winding import winding_factor as winding_factor
    from .winding import winding_table as winding_table

_HOME_OF = {
    "CrossSection": "section",
    "DesignError": "errors",
    "Edge": "curves",
    "Finding": "errors",
    "GeometryError": "errors",
    "LamwrightError": "errors",
    "Machine": "design_file",
    "MachineDesign": "design",
    "MeshError": "errors",
    "NotConverged": "errors",
    "Path": "curves",
    "Region": "section",
    "Rib": "section",
    "SteelCard": "design",
    "WindingTable": "winding",
    "check_design": "checks",
    "cross_section": "cross_section",
    "design_hash": "design_file",
    "read_contours": "dxf",
    "read_machine": "design_file",
    "winding_factor": "winding",
    "winding_table": "winding",
    "write_lamination": "dxf",
}

__all__ = sorted(_HOME_OF)


def __getattr__(name: str) -> object:
    if name not in _HOME_OF:
        raise AttributeError(f"{__name__} has no {name}")
    return getattr(import_module(f".{_HOME_OF[name]}", __name__), name)
