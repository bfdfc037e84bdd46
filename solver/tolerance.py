"""How fine to mesh for a tolerance that is asked by name, and what each name promises.

Promised is the largest error in percent against meshes so fine that they count as exact. Measured
on the three shipped machines and ten random ones (field: scale 0.25, 7 to 11 times the unknowns
of `normal`; stress: 16 times the elements), worst of all:

    name     mean torque   linkages   greatest rib stress   unknowns of the field
    coarse      0.53 %      0.16 %          0.64 %             6 500 to 11 600
    normal      0.11 %      0.065 %         0.38 %             9 000 to 28 000
    fine        0.015 %     0.009 %         0.05 %            39 000 to 73 000

Twenty more random machines at `normal`, with 15 positions: mean torque 0.53 % (aliases of the slots
at so few positions) and 0.29 %, all others under 0.2 %; linkages 0.14 %. Nothing is promised of
the ripple: `coarse` misses the torque of single positions by up to 6 % of the mean.
"""

from dataclasses import dataclass
from typing import Literal, get_args

from lamwright.geometry.errors import LamwrightError

from .mesh_plan import MeshSettings
from .rotor_stress import StressSettings

ToleranceName = Literal["coarse", "normal", "fine"]
NAMES: tuple[ToleranceName, ...] = get_args(ToleranceName)


@dataclass(frozen=True, slots=True)
class Promises:
    """Largest errors in percent."""

    torque: float  # of the mean
    linkage: float
    rib_stress: float  # of the greatest


def tolerance_settings(name: str) -> tuple[MeshSettings, StressSettings, Promises]:
    """Settings of field and stress for a tolerance, and what it promises.

    Args:
        name: `coarse`, `normal` or `fine`.

    Raises:
        LamwrightError: there is no such tolerance.
    """
    if name == "coarse":
        return MeshSettings(scale=2.0), StressSettings(tolerance=0.05), Promises(2.0, 1.0, 5.0)
    if name == "normal":
        return MeshSettings(scale=1.5), StressSettings(), Promises(0.5, 0.3, 2.0)
    if name == "fine":
        return MeshSettings(scale=0.5), StressSettings(tolerance=0.005), Promises(0.1, 0.1, 0.5)
    raise LamwrightError(f"tolerance = {name}: unknown; accepted {', '.join(NAMES)}")
