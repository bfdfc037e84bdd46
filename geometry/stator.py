"""The stator of one pole: semi-closed slots between parallel teeth, as named regions.

A slot is drawn once in its own frame, shaft axis at 0 and centre line along +x, and turned to
its place. Only the upper side (y > 0) is written down; the lower one is its mirror image, so a
slot is symmetric to the last bit. From the bore outward a slot is a row of compartments (mouth,
wedge, copper), each with the piece of flank beside it. Any other slot symmetric about its centre
line can be given the same way, see `Slot`.

Source of all formulas here: derived, plane trigonometry of lines and circles.
"""

import cmath
import math
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

from .curves import Edge, Path, Point, arc, area, line, reversed_edge
from .design import MachineDesign
from .drawn_stator_regions import drawn_stator_regions
from .errors import Finding, GeometryError
from .rotor_frame import rotor_frame
from .section import Material, Region

MM = 1e-3  # m
WELD_TOL = 1e-9  # m, a compartment thinner than this is not drawn; far below a punch's 1e-5 m


@dataclass(frozen=True, slots=True)
class Compartment:
    """One area of a slot; `flank` is its upper side in the slot's frame, run outward."""

    name: str  # with {s} for the slot's number
    material: Material
    flank: tuple[Edge, ...]


@dataclass(frozen=True, slots=True)
class Slot:
    """A slot in its own frame: compartments from the bore outward, and the slot bottom.

    The first flank starts on the bore, each next one where the one before ends; `bottom` runs
    from the end of the last flank to its mirror image.
    """

    compartments: tuple[Compartment, ...]
    bottom: Edge


@dataclass(frozen=True, slots=True)
class StatorRing:
    """What the slots are cut into (m), and how many of them."""

    circle_radius: float  # turning circle, middle of the air gap
    bore_radius: float
    outer_radius: float
    slots: int
    pole_pairs: int


@dataclass(frozen=True, slots=True)
class SlotDimensions:
    """Derived dimensions of a slot in its own frame (m, rad); finite for any valid single values.

    Heights are distances from the shaft axis along the slot's centre line, half widths those of
    the slot there. A slot can be drawn when `opening_half_width < tip_half_width`,
    `mouth_height < taper_height <= copper_height < corner_height` and
    `corner_radius < corner_radius_limit`.
    """

    half_pitch: float  # angle from the slot's centre line to the middle of the tooth, rad
    mouth_height: float  # where the mouth ends
    opening_half_width: float
    tip_half_width: float  # to the tooth's prolonged flank at mouth_height
    taper_height: float  # where the underside of the tooth tip meets the flank
    taper_half_width: float
    copper_height: float  # where copper begins
    copper_half_width: float
    bottom_radius: float
    corner_radius: float
    corner_height: float  # where the flank ends and the corner's fillet begins
    corner_radius_limit: float  # largest fillet; the bottom is then one half circle
    yoke_depth: float  # slot bottom to outer diameter


def slot_dimensions(design: MachineDesign) -> SlotDimensions:
    """Closed-form dimensions of the design's slot, also for shapes that cannot be drawn.

    Where the wedge angle is so steep that the tip never meets the flank, `taper_height` is
    infinite; where the corner's fillet finds no place, `corner_height` is minus infinity.
    """
    stator = design.stator
    half_pitch = math.pi / stator.slots
    bore = 0.5 * MM * stator.bore_diameter_mm
    half_tooth = 0.5 * MM * stator.tooth_width_mm
    opening = 0.5 * MM * stator.slot_opening_mm
    slope = math.tan(half_pitch)

    def half_width(height: float) -> float:
        # The flank is parallel to the tooth's centre line at half the tooth's width from it.
        return height * slope - half_tooth / math.cos(half_pitch)

    mouth = bore + MM * stator.opening_depth_mm
    tip = half_width(mouth)
    rise = math.tan(math.radians(stator.wedge_angle_deg))  # height per half width
    closing = 1.0 - rise * slope
    run = (tip - opening) / closing if closing > 0.0 else math.inf
    taper = mouth + run * rise
    copper = taper + MM * stator.wedge_depth_mm

    bottom = bore + MM * stator.slot_depth_mm
    radius = MM * stator.slot_corner_radius_mm
    # The fillet's centre is `radius` off the flank and `bottom - radius` off the shaft axis.
    along = (bottom - radius) ** 2 - (half_tooth + radius) ** 2
    corner = -math.inf
    if along >= 0.0:
        corner = (cmath.exp(1j * half_pitch) * complex(math.sqrt(along), -half_tooth)).real
    sine = math.sin(half_pitch)
    return SlotDimensions(
        half_pitch=half_pitch,
        mouth_height=mouth,
        opening_half_width=opening,
        tip_half_width=tip,
        taper_height=taper,
        taper_half_width=opening + run,
        copper_height=copper,
        copper_half_width=half_width(copper),
        bottom_radius=bottom,
        corner_radius=radius,
        corner_height=corner,
        corner_radius_limit=(bottom * sine - half_tooth) / (1.0 + sine),
        yoke_depth=0.5 * MM * stator.outer_diameter_mm - bottom,
    )


def slot_outline(design: MachineDesign) -> Slot:
    """The design's slot in its own frame, with as many copper layers as the winding has.

    Raises:
        GeometryError: where two layers cannot be parted between the flanks.
    """
    dims = slot_dimensions(design)
    bore = 0.5 * MM * design.stator.bore_diameter_mm
    opening = dims.opening_half_width
    on_bore = complex(math.sqrt(bore**2 - opening**2), opening)
    mouth = complex(dims.mouth_height, opening)
    taper = complex(dims.taper_height, dims.taper_half_width)
    copper = complex(dims.copper_height, dims.copper_half_width)
    corner, fillet_end = _bottom_corner(design, dims)

    wedge = [line(mouth, taper)]
    if dims.copper_height - dims.taper_height > WELD_TOL:
        wedge.append(line(taper, copper))
    else:
        copper = taper
    compartments = [Compartment("opening_{s}", "air", (line(on_bore, mouth),))]
    start: tuple[Edge, ...] = ()
    if dims.copper_height - dims.mouth_height > WELD_TOL:
        compartments.append(Compartment("wedge_{s}", "air", tuple(wedge)))
    else:  # a flat tip with no wedge: copper reaches to the mouth
        start = tuple(wedge)

    bottom = arc(fillet_end, fillet_end.conjugate(), 0.0, ccw=False)
    fillet: tuple[Edge, ...] = ()
    if dims.corner_radius > 0.0:
        centre = fillet_end * (1.0 - dims.corner_radius / dims.bottom_radius)
        fillet = (arc(corner, fillet_end, centre, ccw=False),)
    whole = (*start, line(copper, corner), *fillet)
    if design.winding.layers == 1:
        compartments.append(Compartment("slot_{s}_layer_0", "copper", whole))
        return Slot(tuple(compartments), bottom)
    parting = _parting(dims, 0.5 * area(_ring(whole, bottom)))
    compartments.append(Compartment("slot_{s}_layer_1", "copper", (*start, line(copper, parting))))
    compartments.append(Compartment("slot_{s}_layer_0", "copper", (line(parting, corner), *fillet)))
    return Slot(tuple(compartments), bottom)


def stator_ring(design: MachineDesign) -> StatorRing:
    """The ring of the design's stator, in m."""
    bore = 0.5 * MM * design.stator.bore_diameter_mm
    return StatorRing(
        circle_radius=rotor_frame(design).circle_radius,
        bore_radius=bore,
        outer_radius=0.5 * MM * design.stator.outer_diameter_mm,
        slots=design.stator.slots,
        pole_pairs=design.pole_pairs,
    )


def stator_regions(design: MachineDesign, sector_poles: int = 1) -> tuple[Region, ...]:
    """The regions of the stator's sector, 0 to sector_poles * pi / pole_pairs, in m.

    The middle of a tooth lies at angle 0, the centre line of slot s at (s + 1/2) 2 pi / slots.
    """
    outline = design.stator.outline
    if outline is not None:
        ring, layers = stator_ring(design), design.winding.layers
        poles = 2 * ring.pole_pairs
        return drawn_stator_regions(
            outline.drawing, layers, ring.circle_radius, poles, sector_poles
        )
    return pole_regions(slot_outline(design), stator_ring(design), sector_poles)


def pole_regions(slot: Slot, ring: StatorRing, sector_poles: int = 1) -> tuple[Region, ...]:
    """The regions of a sector of a stator with any slot that is symmetric about its centre line.

    Args:
        slot: outline in its own frame, in m.
        ring: radii in m.
        sector_poles: poles of the sector; its slots must be a whole number. Of the whole circle,
            the first edge that starts at angle 0 is the last one, run back.

    Returns:
        `gap_stator`, the compartments of each slot, `stator_iron`; edges shared exactly.
    """
    count = sector_poles * ring.slots // (2 * ring.pole_pairs)
    turns = [cmath.exp(2j * math.pi * (s + 0.5) / ring.slots) for s in range(count)]
    side = cmath.exp(1j * math.pi * sector_poles / ring.pole_pairs)
    # Of several poles one arc a slot, so that none goes round the whole circle.
    inside = range(1, count) if sector_poles > 1 else ()
    sides = [1.0, *(cmath.exp(2j * math.pi * k / ring.slots) for k in inside), side]
    bore = _bore_edges(slot, ring, turns, side)
    first, last = bore[0].start, bore[-1].end
    inner, outer = complex(ring.circle_radius), complex(ring.outer_radius)

    circle = [arc(inner * b, inner * a, 0.0, ccw=False) for a, b in pairwise(sides)]
    gap = Path((line(inner, first), *bore, line(last, inner * side), *reversed(circle)))
    iron = [line(first, outer)]
    iron += [arc(outer * a, outer * b, 0.0, ccw=True) for a, b in pairwise(sides)]
    iron += [line(outer * side, last), reversed_edge(bore[-1])]
    walls = [edge for part in slot.compartments for edge in part.flank]
    contour = [*walls, slot.bottom, *_mirrored(walls)]
    slots = []
    for s, turn in enumerate(turns):
        slots += _slot_regions(slot, s, turn, reversed_edge(bore[2 * s + 1]))
    for s in reversed(range(count)):
        iron += [_turned(edge, turns[s]) for edge in contour]
        iron.append(reversed_edge(bore[2 * s]))
    return (
        Region("gap_stator", "air", gap),
        *slots,
        Region("stator_iron", "stator_steel", Path(tuple(iron))),
    )


def slot_copper_area(design: MachineDesign) -> float:
    """Area of one copper region (one layer of one slot) in m^2, insulation included."""
    slot = slot_outline(design)
    return area(_ring(slot.compartments[-1].flank, slot.bottom))


def _bore_edges(
    slot: Slot, ring: StatorRing, turns: Sequence[complex], side: complex
) -> list[Edge]:
    # Counter-clockwise along the bore: half a tooth, mouth, tooth, mouth, ..., half a tooth.
    mouth = slot.compartments[0].flank[0].start
    ends = [complex(ring.bore_radius)]
    for turn in turns:
        ends += [mouth.conjugate() * turn, mouth * turn]
    ends.append(ring.bore_radius * side)
    return [arc(start, end, 0.0, ccw=True) for start, end in pairwise(ends)]


def _bottom_corner(design: MachineDesign, dims: SlotDimensions) -> tuple[Point, Point]:
    # In the tooth's frame the flank is the line y = -half_tooth.
    half_tooth = 0.5 * MM * design.stator.tooth_width_mm
    radius, bottom = dims.corner_radius, dims.bottom_radius
    along = math.sqrt((bottom - radius) ** 2 - (half_tooth + radius) ** 2)
    turn = cmath.exp(1j * dims.half_pitch)
    centre = complex(along, -(half_tooth + radius))
    return complex(along, -half_tooth) * turn, centre * turn * bottom / (bottom - radius)


def _parting(dims: SlotDimensions, half_area: float) -> Point:
    # Between heights a and b the flanks enclose (w_b^2 - w_a^2) / tan(half pitch), w half widths.
    slope = math.tan(dims.half_pitch)
    width = math.sqrt(dims.copper_half_width**2 + half_area * slope)
    height = dims.copper_height + (width - dims.copper_half_width) / slope
    if height >= dims.corner_height - WELD_TOL:
        raise GeometryError(
            (
                Finding(
                    "slot_layers",
                    "stator.slot_corner_radius_mm",
                    dims.corner_radius / MM,
                    "the line between the two layers meets the rounded corners",
                    "take a smaller radius or a deeper slot",
                ),
            )
        )
    return complex(height, width)


def _mirrored(edges: Sequence[Edge]) -> list[Edge]:
    # Mirror image in the slot's centre line, run the other way: inward for an outward flank.
    return [Edge(e.end.conjugate(), e.start.conjugate(), e.bulge) for e in reversed(edges)]


def _turned(edge: Edge, turn: complex) -> Edge:
    return Edge(edge.start * turn, edge.end * turn, edge.bulge)


def _ring(flank: tuple[Edge, ...], bottom: Edge | None) -> Path:
    # A compartment counter-clockwise: lower side, far side, upper side, near side last.
    inner, outer = flank[0].start, flank[-1].end
    across = line(outer.conjugate(), outer) if bottom is None else reversed_edge(bottom)
    lower = [reversed_edge(edge) for edge in reversed(_mirrored(flank))]
    upper = [reversed_edge(edge) for edge in reversed(flank)]
    return Path((*lower, across, *upper, line(inner, inner.conjugate())))


def _slot_regions(slot: Slot, s: int, turn: complex, mouth: Edge) -> list[Region]:
    # `mouth` is the arc across the opening, clockwise as the opening's outline runs it.
    regions = []
    for k, part in enumerate(slot.compartments):
        is_last = k == len(slot.compartments) - 1
        edges = _ring(part.flank, slot.bottom if is_last else None).edges
        placed = [_turned(edge, turn) for edge in edges]
        if k == 0:
            placed[-1] = mouth
        regions.append(Region(part.name.format(s=s), part.material, Path(tuple(placed))))
    return regions
