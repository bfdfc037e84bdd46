"""The stator of a first design from its main sizes: teeth, yoke and slots by their flux density.

Sources: the flux of a pole by integration of a sinusoidal gap field (derived); flux densities and
least sizes are common practice, no source.
"""

import math
from dataclasses import dataclass

from .errors import DesignError
from .first_text import DesignTable, Line

GAP_DENSITY = 0.80  # T, peak of the fundamental in the gap
TOOTH_DENSITY = 1.60  # T
YOKE_DENSITIES = (1.40, 1.55, 1.70)  # T, the first that leaves slots deep enough
LEAST_DEPTH = 0.7  # slot depth over slot pitch at the bore
MOST_OPEN = 0.7  # of the slot's width at the bore that the mouth takes
SHALLOWEST = 4e-3  # m


@dataclass(frozen=True, slots=True)
class MainSizes:
    """What has to be known of a stator, in m."""

    outer_diameter: float
    bore_diameter: float
    stack_length: float
    slots: int


def stator_table(sizes: MainSizes, poles: int, sheet: float, stacking: float) -> DesignTable:
    """The [stator] table with semi-closed slots between teeth of parallel sides.

    Args:
        sizes: of the stator.
        poles: of the rotor.
        sheet: thickness in m.
        stacking: iron's share of the stack.

    Raises:
        DesignError: there is no room for yoke and slots.
    """
    bore, pitch = sizes.bore_diameter, math.pi * sizes.bore_diameter / sizes.slots
    tooth = pitch * GAP_DENSITY / (stacking * TOOTH_DENSITY)
    ring = 0.5 * (sizes.outer_diameter - bore)
    least = max(LEAST_DEPTH * pitch, SHALLOWEST)
    for density in YOKE_DENSITIES:
        yoke = GAP_DENSITY * bore / (poles * stacking * density)
        if ring - yoke >= least:
            break
    else:
        wanted = 1e3 * (bore + 2.0 * (yoke + least))
        raise DesignError(
            f"outer diameter = {1e3 * sizes.outer_diameter:g}: no room for the yoke of {poles} "
            f"poles and slots; accepted {math.ceil(wanted):g} mm or more with this bore"
        )
    depth = _down(ring - yoke)
    opening = max(min(max(0.22 * pitch, 2.0 * sheet), 4e-3, MOST_OPEN * (pitch - tooth)), sheet)
    lip = max(0.08 * pitch, sheet)
    radius = min(1.5e-3, 0.1 * pitch)
    wedge = min(1e-3, 0.06 * depth)
    return DesignTable(
        "stator",
        (
            Line("outer_diameter_mm", mm(sizes.outer_diameter), "As asked for."),
            Line("bore_diameter_mm", mm(bore)),
            Line("stack_length_mm", mm(sizes.stack_length)),
            Line("slots", sizes.slots),
            Line(
                "tooth_width_mm",
                mm(tooth),
                f"Tooth: slot pitch {mm(pitch):g} mm x {GAP_DENSITY:g} T in the gap / "
                f"({stacking:g} stacking x {TOOTH_DENSITY:g} T); flux of one pitch goes through "
                "one tooth (derived), densities are common practice.",
            ),
            Line(
                "slot_depth_mm",
                mm(depth),
                f"The yoke takes half a pole's flux, B D / (poles x stacking x {density:g} T) = "
                f"{mm(yoke):g} mm (derived, sinusoidal gap field); the slots take the rest.",
            ),
            Line(
                "slot_opening_mm",
                mm(opening),
                "Mouth, lip and corners: common practice, no source; ask the supplier and winder.",
            ),
            Line("opening_depth_mm", mm(lip)),
            Line("wedge_angle_deg", 30.0),
            Line("wedge_depth_mm", mm(wedge)),
            Line("slot_corner_radius_mm", mm(radius)),
        ),
        about="Stator: slots by formula from its main sizes; put the drawing's dimensions in.",
    )


def mm(length: float) -> float:
    """A length in m as mm with two decimals, as a drawing has it."""
    return round(1e3 * length, 2)


def _down(length: float) -> float:
    return 1e-4 * math.floor(1e4 * length + 1e-6)  # to 0.1 mm
