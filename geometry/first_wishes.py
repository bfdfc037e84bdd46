"""What a first design is made from."""

import math
from dataclasses import dataclass

from .design import StatorDesign, SteelCard
from .first_text import DesignTable

RPM = 30.0 / math.pi  # 1/min per rad/s
AIMED_MARGIN = 1.2  # yield over the greatest stress at overspeed; common practice, no source


@dataclass(frozen=True, slots=True)
class Wishes:
    """What a first design is made from; lengths in m, speeds in rad/s."""

    name: str
    stator: StatorDesign
    stator_table: DesignTable  # as it will be written
    winding_table: DesignTable | None  # likewise; None to make one
    poles: int
    maximum_speed: float
    rated_speed: float
    supply_voltage: float  # rms between lines
    barriers: int | None
    gap: float
    shaft_diameter: float
    sheet: float
    rib_factor: float  # least rib over the sheet's thickness
    steel: SteelCard
    steel_file: str  # as written in the design file
    rib_margin: float = AIMED_MARGIN  # yield over the stress by the rib law


def usual_gap(bore: float) -> float:
    """A radial air gap in m for a bore in m: common practice, no source."""
    return 5e-5 * round(max(2.5e-4, 2.0e-4 + 2.7e-3 * bore) / 5e-5)


def usual_shaft(bore: float, poles: int) -> float:
    """A shaft diameter in m for a bore in m: common practice, no source."""
    share = 0.22 if poles == 2 else 0.32
    return 5e-4 * round(share * bore / 5e-4)
