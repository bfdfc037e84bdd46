"""What the physics does: a cross-section in, magnetic field and stress field out.

In: `CrossSection`, winding table, steel cards. On the way: `SectorMesh`, one pole meshed once,
and `MagneticModel`. Out: `FieldSolution` at any current and rotor angle (`solve_point`,
`solve_chain`), `StressSolution` at any speed (`solve_stress`). Names load when they are first used.
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
    from .rotor_stress import rotor_stress as _rotor_stress
    from .steel import SteelLaw as SteelLaw
    from .steel import reluctivity_law as reluctivity_law
    from .types import FieldSolution as FieldSolution
    from .types import PlanarMesh as PlanarMesh
    from .types import SectorMesh as SectorMesh
    from .types import StressSolution as StressSolution

    solve_stress = _rotor_stress

# Module and name there by the name here, which is none of a module's: Python would put the module
# in its place once that is loaded.
_HOME_OF = {
    "FieldSettings": ("field", "FieldSettings"),
    "FieldSolution": ("types", "FieldSolution"),
    "MagneticModel": ("field", "MagneticModel"),
    "OperatingPoint": ("chains", "OperatingPoint"),
    "PlanarMesh": ("types", "PlanarMesh"),
    "SectorMesh": ("types", "SectorMesh"),
    "SteelLaw": ("steel", "SteelLaw"),
    "StressSettings": ("rotor_stress", "StressSettings"),
    "StressSolution": ("types", "StressSolution"),
    "magnetic_model": ("field", "magnetic_model"),
    "mesh_lamination": ("mesh", "mesh_lamination"),
    "mesh_regions": ("mesh", "mesh_regions"),
    "mesh_section": ("mesh", "mesh_section"),
    "reluctivity_law": ("steel", "reluctivity_law"),
    "solve_chain": ("chains", "solve_chain"),
    "solve_point": ("field", "solve_point"),
    "solve_stress": ("rotor_stress", "rotor_stress"),
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
