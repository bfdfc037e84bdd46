"""Radii that rotor, gap and stator share.

The turned half of the gap begins at the rotor's radius. Where the rim is no circle it begins a
fixed share of the least gap outside, so that it stays a ring of even thickness, and what lies
between rim and ring is air that is meshed with the rotor.
"""

import math
from dataclasses import dataclass

from .design import MachineDesign

MM = 1e-3  # m
RING_SHARE = 0.2  # of the least gap, from the rotor's radius to the ring that is turned


@dataclass(frozen=True, slots=True)
class RotorFrame:
    """Radii (m) and angles that the whole rotor shares."""

    rotor_radius: float
    shaft_radius: float
    ring_radius: float  # inner circle of the gap's turned half; the rotor's if that is round
    circle_radius: float
    pole_pairs: int

    @property
    def q_axis(self) -> float:
        """Angle of the q axis, half a pole pitch, in rad."""
        return 0.5 * math.pi / self.pole_pairs


def rotor_frame(design: MachineDesign) -> RotorFrame:
    """Radii of the design's rotor in m; the turning circle lies in the middle of the gap."""
    bore = 0.5 * MM * design.stator.bore_diameter_mm
    rotor = bore - MM * design.rotor.gap_mm
    ring = rotor if design.rotor.contour is None else rotor + RING_SHARE * (bore - rotor)
    return RotorFrame(
        rotor_radius=rotor,
        shaft_radius=0.5 * MM * design.rotor.shaft_diameter_mm,
        ring_radius=ring,
        # The same expression as CrossSection.circle_radius.
        circle_radius=0.5 * (bore + ring),
        pole_pairs=design.pole_pairs,
    )
