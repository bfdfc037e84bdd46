"""The machine with a rotor that is one round block of steel: what yardsticks are made of.

Stator, gap, shaft and stack are the design's. What belongs to its own rotor alone is left out:
barriers, ribs, magnets, notches, holes, keys, and a rim that is no circle (the circle through its
outermost points instead).
"""

import cmath
from dataclasses import replace

from .curves import Path, arc, line
from .design import MachineDesign
from .rotor_frame import RotorFrame, rotor_frame
from .section import CrossSection, Region
from .sectors import rotor_sector, smallest_sector
from .stator import stator_regions
from .winding import winding_table


def round_rotor_section(design: MachineDesign, section: CrossSection) -> CrossSection:
    """The smallest sector of the design's stator round a solid rotor.

    Args:
        design: the machine.
        section: any sector of it, for its radii.
    """
    poles = smallest_sector(winding_table(design))
    rotor, _ = rotor_sector(((_solid_pole(rotor_frame(design)), ()),), design.pole_pairs, poles)
    return replace(
        section,
        rotor=rotor,
        stator=stator_regions(design, poles),
        ribs=(),
        sector_poles=poles,
        rotor_period=1,
    )


def _solid_pole(frame: RotorFrame) -> tuple[Region, ...]:
    """Iron, shaft and the rotor's half of the gap, from d axis to d axis."""
    rim, ring, side = frame.rotor_radius, frame.ring_radius, cmath.exp(2j * frame.q_axis)
    shaft = complex(frame.shaft_radius)
    inside = Path((line(0j, shaft), arc(shaft, shaft * side, 0j, ccw=True), line(shaft * side, 0j)))
    air = [] if ring == rim else [Region("rim_air", "air", _between(rim, ring, side))]
    return (
        Region("rotor_iron", "rotor_steel", _between(frame.shaft_radius, rim, side)),
        Region("shaft", "shaft", inside),
        *air,
        Region("gap_rotor", "air", _between(ring, frame.circle_radius, side)),
    )


def _between(inner: float, outer: float, side: complex) -> Path:
    """The area between two circles from angle 0 to the direction `side`."""
    near, far = complex(inner), complex(outer)
    return Path(
        (
            line(near, far),
            arc(far, far * side, 0j, ccw=True),
            line(far * side, near * side),
            arc(near * side, near, 0j, ccw=False),
        )
    )
