"""Dimensions of a slot of any shape, in closed form, also where no slot can be drawn.

A slot is described in its own frame, shaft axis at 0 and centre line along +x, by its upper half.
The upper flank is a straight line: parallel to the middle of the tooth beside it (teeth with
parallel sides) or to the centre line (slots with parallel sides).

Source of all formulas here: derived, plane trigonometry of lines and circles.
"""

import cmath
import math
from dataclasses import dataclass

from .curves import Point
from .design import MachineDesign, StatorDesign

MM = 1e-3  # m
ROUND_SPLIT = 0.25 * math.pi  # rad, half the arc of a round bottom that is drawn as one piece


@dataclass(frozen=True, slots=True)
class Flank:
    """The straight side of a slot: points u (t + i level), u a unit vector, t any length."""

    angle: float  # of u to the slot's centre line, rad
    level: float  # m, negative where slots widen outward

    def half_width(self, height: float) -> float:
        """Distance of the flank from the centre line at a height, in m."""
        return height * math.tan(self.angle) + self.level / math.cos(self.angle)

    def at_radius(self, radius: float) -> Point:
        """Where the flank crosses a circle about the shaft axis; real if it does not reach it."""
        along = radius**2 - self.level**2
        if along <= 0.0:
            return complex(radius)
        return cmath.exp(1j * self.angle) * complex(math.sqrt(along), self.level)


@dataclass(frozen=True, slots=True)
class SlotDimensions:
    """Derived dimensions of a slot in its own frame (m, rad); finite for any valid single values.

    Heights are distances from the shaft axis along the slot's centre line, half widths those of
    the slot there. A slot can be drawn when `opening_half_width < tip_half_width` (semi-closed),
    `mouth_height < taper_height <= copper_height < corner_height`,
    `corner_radius < corner_radius_limit` and `entry.imag > 0`.
    """

    half_pitch: float  # angle from the slot's centre line to the middle of the tooth, rad
    flank: Flank
    entry: Point  # upper end of the slot's inner side: on the bore, or above the bridge
    mouth_height: float  # where the mouth ends; of open and closed slots the inner side's top
    opening_half_width: float
    tip_half_width: float  # to the prolonged flank at mouth_height
    taper_height: float  # where the underside of the tooth tip meets the flank
    taper_half_width: float
    copper_height: float  # where copper begins
    copper_half_width: float
    bottom_radius: float  # from the shaft axis to the bottom on the centre line
    corner_radius: float  # fillet; of a round bottom its radius
    corner_height: float  # where the flank ends and the fillet begins
    corner: Point  # the same as a point
    corner_centre: Point  # of the fillet
    bottom_end: Point  # upper end of the bottom
    corner_radius_limit: float  # largest fillet; the bottom is then one round
    tooth_width: float  # least width of the tooth's straight part
    yoke_depth: float  # slot bottom to outer diameter


def slot_flank(stator: StatorDesign) -> Flank:
    """The flank of the stator's slots."""
    if stator.slot_sides == "parallel_slot":
        return Flank(0.0, 0.5 * MM * _stated(stator.slot_width_mm))
    return Flank(math.pi / stator.slots, -0.5 * MM * _stated(stator.tooth_width_mm))


def slot_dimensions(design: MachineDesign) -> SlotDimensions:
    """Closed-form dimensions of the design's slot, also for shapes that cannot be drawn.

    Where the wedge angle is so steep that the tip never meets the flank, `taper_height` is
    infinite; where the corner's fillet finds no place, `corner_height` is minus infinity.
    """
    stator = design.stator
    half_pitch = math.pi / stator.slots
    bore = 0.5 * MM * stator.bore_diameter_mm
    flank = slot_flank(stator)
    mouth = _semi_closed(stator, flank, bore) if stator.slot_mouth == "semi_closed" else None
    if mouth is None:
        mouth = _without_tip(stator, flank, bore)
    bottom = bore + MM * stator.slot_depth_mm
    sine = math.sin(flank.angle)
    limit = (bottom * sine + flank.level) / (1.0 + sine)
    radius = limit if stator.slot_bottom == "round" else MM * stator.slot_corner_radius_mm
    corner, centre, end = _bottom(stator, flank, bottom, radius)
    # The slot's point furthest from the shaft axis lies on the fillet, in line with its centre.
    reach = bottom if stator.slot_bottom != "flat" else abs(centre) + radius
    neck = mouth.taper if stator.slot_sides == "parallel_slot" else None
    return SlotDimensions(
        half_pitch=half_pitch,
        flank=flank,
        entry=mouth.entry,
        mouth_height=mouth.height,
        opening_half_width=mouth.entry.imag,
        tip_half_width=flank.half_width(mouth.height),
        taper_height=mouth.taper.real,
        taper_half_width=mouth.taper.imag,
        copper_height=mouth.copper.real,
        copper_half_width=mouth.copper.imag,
        bottom_radius=bottom,
        corner_radius=radius,
        corner_height=corner.real,
        corner=corner,
        corner_centre=centre,
        bottom_end=end,
        corner_radius_limit=limit,
        tooth_width=(
            MM * _stated(stator.tooth_width_mm)
            if neck is None
            else 2.0 * (neck.conjugate() * cmath.exp(1j * half_pitch)).imag
        ),
        yoke_depth=0.5 * MM * stator.outer_diameter_mm - reach,
    )


@dataclass(frozen=True, slots=True)
class _Mouth:
    """The inner end of a slot: upper points where it begins, where copper begins."""

    entry: Point
    height: float
    taper: Point
    copper: Point


def _semi_closed(stator: StatorDesign, flank: Flank, bore: float) -> _Mouth:
    """Tooth tips with a straight mouth and an underside at the wedge angle."""
    opening = 0.5 * MM * _stated(stator.slot_opening_mm)
    slope = math.tan(flank.angle)
    height = bore + MM * _stated(stator.opening_depth_mm)
    rise = math.tan(math.radians(stator.wedge_angle_deg))  # height per half width
    closing = 1.0 - rise * slope
    run = (flank.half_width(height) - opening) / closing if closing > 0.0 else math.inf
    taper = height + run * rise
    copper = taper + MM * stator.wedge_depth_mm
    entry = complex(math.sqrt(max(bore**2 - opening**2, 0.0)), opening)
    return _Mouth(
        entry, height, complex(taper, opening + run), complex(copper, flank.half_width(copper))
    )


def _without_tip(stator: StatorDesign, flank: Flank, bore: float) -> _Mouth:
    """An open slot begins on the bore, a closed one on the circle above its bridge."""
    is_closed = stator.slot_mouth == "closed"
    radius = bore + (MM * _stated(stator.bridge_mm) if is_closed else 0.0)
    entry = flank.at_radius(radius)
    copper = entry
    if stator.wedge_depth_mm > 0.0:
        height = radius + MM * stator.wedge_depth_mm
        copper = complex(height, flank.half_width(height))
    return _Mouth(entry, radius, entry, copper)


def _bottom(
    stator: StatorDesign, flank: Flank, bottom: float, radius: float
) -> tuple[Point, Point, Point]:
    """Where the flank ends, the fillet's centre, and where the bottom begins (upper points)."""
    turn = cmath.exp(1j * flank.angle)
    level = flank.level - radius  # of the fillet's centre, `radius` off the flank
    if stator.slot_bottom == "concentric":
        # The centre is `bottom - radius` off the shaft axis.
        along = (bottom - radius) ** 2 - level**2
        if along < 0.0:
            return complex(-math.inf), complex(0.0), complex(bottom)
        corner = complex(math.sqrt(along), flank.level) * turn
        if radius == 0.0:
            return corner, corner, corner
        end = complex(math.sqrt(along), level) * turn * bottom / (bottom - radius)
        return corner, end * (1.0 - radius / bottom), end
    height = bottom - radius
    if stator.slot_bottom == "round":
        centre = complex(height)
        return centre + 1j * turn * radius, centre, centre + cmath.rect(radius, ROUND_SPLIT)
    centre = complex(height, (level + height * turn.imag) / turn.real)
    return centre + 1j * turn * radius, centre, centre + radius


def _stated(value: float | None) -> float:
    """A key that the shape needs, which the reader has made sure of."""
    if value is None:
        raise ValueError("the slot's shape needs a dimension that the design does not state")
    return value
