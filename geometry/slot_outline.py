"""A slot as compartments: from its dimensions to edges, in its own frame.

Only the upper side (y > 0) is written down; the lower one is its mirror image, so a slot is
symmetric to the last bit. From the bore outward a slot is a row of compartments (mouth, wedge,
copper), each with the piece of flank beside it.
"""

import math
from collections.abc import Sequence
from dataclasses import dataclass

from .curves import Edge, Path, Point, arc, area, line, reversed_edge
from .design import MachineDesign
from .errors import Finding, GeometryError
from .section import Material
from .slot_dimensions import SlotDimensions, slot_dimensions
from .slot_layers import WELD_TOL, parted_flank

Edges = tuple[Edge, ...]


@dataclass(frozen=True, slots=True)
class Compartment:
    """One area of a slot; `flank` is its upper side in the slot's frame, run outward.

    Where `lower` is given the centre line parts the area, and this names the lower half. `bow` is
    the bulge of its inner side, run downward, if that is not the first of the slot.
    """

    name: str  # with {s} for the slot's number
    material: Material
    flank: Edges
    lower: str = ""
    bow: float = 0.0


@dataclass(frozen=True, slots=True)
class Slot:
    """A slot in its own frame: compartments from the bore outward, and the slot bottom.

    The first flank starts on the bore, each next one where the one before ends; `bottom` runs
    from the end of the last flank to its mirror image. A closed slot starts above the bore, on
    the circle of its inner side. Only the last compartment may be parted by the centre line.
    """

    compartments: tuple[Compartment, ...]
    bottom: Edge
    is_closed: bool = False

    @property
    def entry(self) -> Point:
        """Upper end of the slot's inner side."""
        return self.compartments[0].flank[0].start

    @property
    def walls(self) -> Edges:
        """The whole upper flank, run outward."""
        return tuple(edge for part in self.compartments for edge in part.flank)

    def near(self, k: int) -> Edges:
        """Inner side of compartment k, run downward; in two pieces where the centre line parts."""
        start = self.compartments[k].flank[0].start
        if k == 0:
            across = arc(start, start.conjugate(), 0.0, ccw=False)
        else:
            across = Edge(start, start.conjugate(), self.compartments[k].bow)
        return _halves(across) if self.compartments[k].lower else (across,)

    def far(self, k: int) -> Edges:
        """Outer side of compartment k, run downward, as `near`."""
        if k + 1 < len(self.compartments):
            return self.near(k + 1)
        return _halves(self.bottom) if self.compartments[k].lower else (self.bottom,)

    def contour(self) -> Edges:
        """The slot's wall from the inner side's upper end round to its lower end, clockwise."""
        bottom = self.far(len(self.compartments) - 1)
        return (*self.walls, *bottom, *mirrored(self.walls))

    def paths(self, k: int) -> tuple[tuple[str, Path], ...]:
        """Name and counter-clockwise path of each area of compartment k, inner side last."""
        part = self.compartments[k]
        near, far = self.near(k), _backwards(self.far(k))
        lower, upper = _backwards(mirrored(part.flank)), _backwards(part.flank)
        if not part.lower:
            return ((part.name, Path((*lower, *far, *upper, *near))),)
        middle = line(near[0].end, far[0].end)
        return (
            (part.name, Path((middle, far[1], *upper, near[0]))),
            (part.lower, Path((*lower, far[0], reversed_edge(middle), near[1]))),
        )


def slot_outline(design: MachineDesign) -> Slot:
    """The design's slot in its own frame, with as many copper areas as the winding has layers.

    Two layers have the same area. They are parted across the slot, or along its centre line for
    tooth coils, whose sides lie next to their teeth.

    Raises:
        GeometryError: where two layers cannot be parted between the flanks.
    """
    dims = slot_dimensions(design)
    parts, start, copper = _inner_parts(design, dims)
    is_closed = design.stator.slot_mouth == "closed"
    bottom = _bottom(design, dims)
    fillet: Edges = ()
    if dims.corner_radius > 0.0:
        fillet = (arc(dims.corner, dims.bottom_end, dims.corner_centre, ccw=False),)
    straight = line(copper, dims.corner)
    whole = Compartment("slot_{s}_layer_0", "copper", (*start, straight, *fillet))
    if design.winding.layers == 1:
        return Slot((*parts, whole), bottom, is_closed)
    if design.winding.coil_span_slots == 1:
        # A tooth coil starts (layer 1) beside the tooth that follows its slot, in the upper half.
        halved = Compartment("slot_{s}_layer_1", "copper", whole.flank, whole.name)
        return Slot((*parts, halved), bottom, is_closed)
    single = Slot((*parts, whole), bottom, is_closed)
    inner = _inner_area(single, copper)
    try:
        nearer, further, bow = parted_flank(dims, straight, fillet, inner)
    except ValueError as error:
        raise GeometryError((_layers_finding(design, str(error)),)) from None
    layers = (
        Compartment("slot_{s}_layer_1", "copper", (*start, *nearer)),
        Compartment("slot_{s}_layer_0", "copper", further, bow=bow),
    )
    return Slot((*parts, *layers), bottom, is_closed)


def slot_copper_area(design: MachineDesign) -> float:
    """Area of one copper region (one layer of one slot) in m^2, insulation included."""
    slot = slot_outline(design)
    return area(slot.paths(len(slot.compartments) - 1)[0][1])


def mirrored(edges: Sequence[Edge]) -> Edges:
    """Mirror image in the slot's centre line, run the other way: inward for an outward flank."""
    return tuple(Edge(e.end.conjugate(), e.start.conjugate(), e.bulge) for e in reversed(edges))


def _backwards(edges: Sequence[Edge]) -> Edges:
    return tuple(reversed_edge(edge) for edge in reversed(edges))


def _halves(edge: Edge) -> Edges:
    """An edge across the slot cut where it crosses the centre line."""
    middle = complex(edge.point(0.5).real)
    bulge = math.tan(0.125 * edge.sweep)
    return Edge(edge.start, middle, bulge), Edge(middle, edge.end, bulge)


def _inner_parts(
    design: MachineDesign, dims: SlotDimensions
) -> tuple[list[Compartment], Edges, Point]:
    """Compartments without copper, the tooth tip's underside that copper reaches, its end."""
    copper = complex(dims.copper_height, dims.copper_half_width)
    mouth = design.stator.slot_mouth
    if mouth != "semi_closed":
        if copper == dims.entry:
            return [], (), copper
        name = "opening_{s}" if mouth == "open" else "wedge_{s}"
        return [Compartment(name, "air", (line(dims.entry, copper),))], (), copper
    inner = complex(dims.mouth_height, dims.opening_half_width)
    taper = complex(dims.taper_height, dims.taper_half_width)
    wedge = [line(inner, taper)]
    if dims.copper_height - dims.taper_height > WELD_TOL:
        wedge.append(line(taper, copper))
    else:
        copper = taper
    parts = [Compartment("opening_{s}", "air", (line(dims.entry, inner),))]
    if dims.copper_height - dims.mouth_height > WELD_TOL:
        parts.append(Compartment("wedge_{s}", "air", tuple(wedge)))
        return parts, (), copper
    return parts, tuple(wedge), copper  # a flat tip with no wedge: copper reaches to the mouth


def _bottom(design: MachineDesign, dims: SlotDimensions) -> Edge:
    end = dims.bottom_end
    if design.stator.slot_bottom == "flat":
        return line(end, end.conjugate())
    centre = dims.corner_centre if design.stator.slot_bottom == "round" else 0j
    return arc(end, end.conjugate(), centre, ccw=False)


def _inner_area(slot: Slot, copper: Point) -> float:
    """Area in m^2 of the inner layer beyond the straight line across from `copper`."""
    ((_, path),) = slot.paths(len(slot.compartments) - 1)
    whole = area(path)
    if len(slot.compartments) > 1:
        return whole - 0.5 * whole
    straight = Path((*path.edges[:-1], line(copper, copper.conjugate())))
    return area(straight) - 0.5 * whole


def _layers_finding(design: MachineDesign, fault: str) -> Finding:
    depth = design.stator.slot_depth_mm
    remedy = "take a deeper slot or a smaller radius"
    return Finding("slot_layers", "stator.slot_depth_mm", depth, fault, remedy)
