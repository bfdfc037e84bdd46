"""What is added to the analysed outline before it is punched or cut, as the order states it."""

import math
from dataclasses import dataclass
from typing import Literal, get_args

from .errors import DesignError

Corners = Literal["sharp", "round"]

MOST_OFFSET = 1.0  # mm; a beam or wire is 0.1 to 0.4 wide, so half of it is far below
MOST_ALLOWANCE = 5.0  # mm on the diameter
MOST_CLEARANCE = 1.0  # mm


@dataclass(frozen=True, slots=True)
class PunchOptions:
    """Allowances on the analysed outline, in mm; all zero gives the outline itself.

    `tool_offset_mm` moves every contour outward from the steel (inward if negative), as half the
    width of a beam or wire is compensated. `grinding_allowance_mm` is added to the outer diameter
    and taken off after stacking. `magnet_clearance_mm` widens every pocket that holds a magnet on
    all sides. Corners stay `sharp`, their sides extended until they meet, or are rolled `round`.
    """

    tool_offset_mm: float = 0.0
    grinding_allowance_mm: float = 0.0
    magnet_clearance_mm: float = 0.0
    corners: Corners = "sharp"

    def __post_init__(self) -> None:
        """Refuse what no shop would mean.

        Raises:
            DesignError: with one line for each option out of range.
        """
        ranges = (
            ("tool_offset_mm", self.tool_offset_mm, -MOST_OFFSET, MOST_OFFSET),
            ("grinding_allowance_mm", self.grinding_allowance_mm, 0.0, MOST_ALLOWANCE),
            ("magnet_clearance_mm", self.magnet_clearance_mm, 0.0, MOST_CLEARANCE),
        )
        faults = [
            f"{name} = {value:g}: outside its range; accepted {low:g} to {high:g}"
            for name, value, low, high in ranges
            if not (math.isfinite(value) and low <= value <= high)
        ]
        if self.corners not in get_args(Corners):
            names = " or ".join(get_args(Corners))
            faults.append(f"corners = {self.corners}: not known; accepted {names}")
        if faults:
            raise DesignError("\n".join(faults))

    @property
    def is_plain(self) -> bool:
        """Whether the outline is punched as it was analysed."""
        sizes = (self.tool_offset_mm, self.grinding_allowance_mm, self.magnet_clearance_mm)
        return not any(sizes)
