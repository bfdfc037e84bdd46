"""The stator of one pole: slots of one shape, as named regions.

A slot is drawn once in its own frame, shaft axis at 0 and centre line along +x (`slot_outline`),
and turned to its place. Any slot symmetric about its centre line can be given.
"""

import cmath
import math
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

from .curves import Edge, Path, arc, line, reversed_edge
from .design import MachineDesign
from .rotor_frame import rotor_frame
from .section import Region
from .slot_outline import Slot, slot_outline

MM = 1e-3  # m


@dataclass(frozen=True, slots=True)
class StatorRing:
    """What the slots are cut into (m), and how many of them."""

    circle_radius: float  # turning circle, middle of the air gap
    bore_radius: float
    outer_radius: float
    slots: int
    pole_pairs: int


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
        from .drawn_stator_regions import drawn_stator_regions

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
    bore = _closed_bore(ring, count, side) if slot.is_closed else _bore(slot, ring, turns, side)
    faces = [edge for k, teeth in enumerate(bore.teeth) for edge in (teeth, *bore.mouth(k))]
    first, last = faces[0].start, faces[-1].end
    inner, outer = complex(ring.circle_radius), complex(ring.outer_radius)

    circle = [arc(inner * b, inner * a, 0.0, ccw=False) for a, b in pairwise(sides)]
    gap = Path((line(inner, first), *faces, line(last, inner * side), *reversed(circle)))
    iron = [line(first, outer)]
    iron += [arc(outer * a, outer * b, 0.0, ccw=True) for a, b in pairwise(sides)]
    iron += [line(outer * side, last), reversed_edge(bore.teeth[-1])]
    slots: list[Region] = []
    holes: list[Path] = []
    for s, turn in enumerate(turns):
        slots += _slot_regions(slot, s, turn, bore.mouth(s))
        if slot.is_closed:
            wall = (*slot.contour(), *(reversed_edge(edge) for edge in reversed(slot.near(0))))
            holes.append(Path(tuple(_turned(edge, turn) for edge in wall)))
    for k in reversed(range(len(bore.teeth) - 1)):
        if not slot.is_closed:
            iron += [_turned(edge, turns[k]) for edge in slot.contour()]
        iron.append(reversed_edge(bore.teeth[k]))
    return (
        Region("gap_stator", "air", gap),
        *slots,
        Region("stator_iron", "stator_steel", Path(tuple(iron)), tuple(holes)),
    )


@dataclass(frozen=True, slots=True)
class _Bore:
    """Arcs of the bore, counter-clockwise: faces of teeth, and the mouths between them."""

    teeth: tuple[Edge, ...]
    mouths: tuple[tuple[Edge, ...], ...] = ()

    def mouth(self, k: int) -> tuple[Edge, ...]:
        """The mouth after tooth face k; one piece or two, none of a closed slot."""
        return self.mouths[k] if k < len(self.mouths) else ()


def _bore(slot: Slot, ring: StatorRing, turns: Sequence[complex], side: complex) -> _Bore:
    """Half a tooth, mouth, tooth, mouth, ..., half a tooth."""
    across = [slot.entry.conjugate()]
    across += [edge.start for edge in reversed(slot.near(0))]
    teeth, mouths, start = [], [], complex(ring.bore_radius)
    for turn in turns:
        points = [point * turn for point in across]
        teeth.append(arc(start, points[0], 0.0, ccw=True))
        mouths.append(tuple(arc(a, b, 0.0, ccw=True) for a, b in pairwise(points)))
        start = points[-1]
    teeth.append(arc(start, ring.bore_radius * side, 0.0, ccw=True))
    return _Bore(tuple(teeth), tuple(mouths))


def _closed_bore(ring: StatorRing, count: int, side: complex) -> _Bore:
    """One arc for each slot, from the middle of a tooth to the next."""
    ends = [ring.bore_radius * cmath.exp(2j * math.pi * s / ring.slots) for s in range(1, count)]
    points = [complex(ring.bore_radius), *ends, ring.bore_radius * side]
    return _Bore(tuple(arc(a, b, 0.0, ccw=True) for a, b in pairwise(points)))


def _turned(edge: Edge, turn: complex) -> Edge:
    return Edge(edge.start * turn, edge.end * turn, edge.bulge)


def _slot_regions(slot: Slot, s: int, turn: complex, mouth: Sequence[Edge]) -> list[Region]:
    regions = []
    for k, part in enumerate(slot.compartments):
        pieces = slot.paths(k)
        for j, (name, path) in enumerate(pieces):
            placed = [_turned(edge, turn) for edge in path.edges]
            if k == 0 and mouth:
                # The inner side is the last edge; the bore's arcs run the other way round.
                placed[-1] = reversed_edge(mouth[len(pieces) - 1 - j])
            regions.append(Region(name.format(s=s), part.material, Path(tuple(placed))))
    return regions
