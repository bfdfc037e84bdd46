"""What the physics does: a cross-section in, magnetic field and stress field out.

In: `CrossSection`, winding table, steel cards. On the way: `SectorMesh`, one pole meshed once,
and `MagneticModel`. Out: `FieldSolution` at any current and rotor angle, `StressSolution` at any
speed. Names load when they are first used.
"""

from importlib import import_module
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from .chains import OperatingPoint as OperatingPoint
    from .chains import solve_chain as solve_chain
    from .field import FieldSettings as FieldSettings
    from .field import MagneticModel as MagneticModel
    from .field import magnetic_model as magnetic_model
    from .field import solve_point as solve_point
    from .mesh import mesh_lamination as mesh_lamination
    from .mesh import mesh_regions as mesh_regions
    from .mesh import mesh_section as mesh_section
    from .rotor_stress import StressSettings as StressSettings
    from .rotor_stress import rotor_stress as rotor_stress
    from .steel import SteelLaw as SteelLaw
    from .steel import reluctivity_law as reluctivity_law
    from .types import FieldSolution as FieldSolution
    from .types import PlanarMesh as PlanarMesh
    from .types import SectorMesh as SectorMesh
    from .types import StressSolution as StressSolution

_HOME_OF = {
    "FieldSettings": "field",
    "FieldSolution": "types",
    "MagneticModel": "field",
    "OperatingPoint": "chains",
    "PlanarMesh": "types",
    "SectorMesh": "types",
    "SteelLaw": "steel",
    "StressSettings": "rotor_stress",
    "StressSolution": "types",
    "magnetic_model": "field",
    "mesh_lamination": "mesh",
    "mesh_regions": "mesh",
    "mesh_section": "mesh",
    "reluctivity_law": "steel",
    "rotor_stress": "rotor_stress",
    "solve_chain": "chains",
    "solve_point": "field",
}

__all__ = sorted(_HOME_OF)


def __getattr__(name: str) -> object:
    if name not in _HOME_OF:
        raise AttributeError(f"{__name__} has no {name}")
    return getattr(import_module(f".{_HOME_OF[name]}", __name__), name)
