"""How fine to mesh for a tolerance that is asked by name, and what each name promises.

Promised is the largest error in percent against meshes so fine that they count as exact. Measured,
worst of all machines; rib stress against 16 times the elements:

    name     mean torque   linkages   greatest rib stress   unknowns of the field
    coarse      0.53 %      0.16 %          0.64 %             6 500 to 11 600
    normal      0.38 %      0.19 %          0.38 %             6 300 to 16 800
    fine        0.015 %     0.009 %         0.05 %            39 000 to 73 000

`normal` on thirty random machines against 16 times the elements at four or five positions each; the
other two on three shipped and ten random machines against scale 0.25. Nothing is promised of the
ripple: `normal` misses the torque of single positions by up to 3 % of the mean, `coarse` by 6 %.
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
