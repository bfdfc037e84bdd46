"""Rims that are no circle, and how barriers follow them.

Both kinds touch the circle of the rotor's radius on the d axis and lie inside it elsewhere, are
symmetric to the q axis and without a kink anywhere:
- eccentric: from the d axis one arc with its centre on that axis, then one with its centre on the
  q axis; they join tangentially, with tangents of equal length (the usual choice among biarcs;
  common practice, no source). The gap grows steadily to its value on the q axis.
- step: arcs about the shaft axis of the rotor's radius and of a radius smaller by the step; between
  them two arcs of one radius, tangent to both and to each other.

A barrier's end moves inward along its own rule, as with a wider tangential rib, until its least
distance to the rim is the width stated. Depths count from the circle of the rotor's radius.
Source of all formulas: derived, plane geometry.
"""

import cmath
import math
from collections.abc import Sequence
from dataclasses import replace
from functools import lru_cache

from .curves import Edge, Point, arc, line, mirrored_edge, reversed_edge, turned_edge
from .cut_outs import across, turned_edges
from .design import BarrierDesign, MachineDesign
from .design_details import ContourDesign
from .distances import nearest
from .half_barrier import half_barrier
from .section import Region, Rib
from .unlike_poles import clockwise_half

MM = 1e-3  # m
FOLLOW_TOL = 1e-13  # m, of a followed rib's width
MOST_STEPS = 40
END_EDGES = 1  # beside the edge that a rib starts on, that may be nearer to another rim


def contour(design: ContourDesign, rotor_radius: float, gap: float, pitch: float) -> list[Edge]:
    """The rim of one pole, from the d axis at angle 0 to the next one at `pitch`.

    Args:
        design: kind and sizes.
        rotor_radius: the largest radius, on the d axis, in m.
        gap: the least gap, in m.
        pitch: pole pitch in rad.

    Raises:
        ValueError: where the contour cannot be drawn; `contour_checks` says what would fit.
    """
    if design.kind == "eccentric":
        if design.q_axis_gap_mm is None:
            raise ValueError("an eccentric contour needs q_axis_gap_mm")
        q_radius = rotor_radius + gap - MM * design.q_axis_gap_mm
        half = eccentric_half(rotor_radius, q_radius, 0.5 * pitch)
    else:
        half = _step_half(design, rotor_radius, 0.5 * pitch)
    mirror = [turned_edge(mirrored_edge(reversed_edge(edge)), pitch) for edge in reversed(half)]
    last = half[-1]
    across_q = Edge(last.start, mirror[0].end, math.tan(0.5 * last.sweep))
    return [*half[:-1], across_q, *mirror[1:]]


def eccentric_half(d_radius: float, q_radius: float, half_pitch: float) -> list[Edge]:
    """Two arcs from (d_radius, 0) to the q axis at angle `half_pitch`, tangential throughout."""
    turn = cmath.exp(1j * half_pitch)
    first, last = complex(d_radius), q_radius * turn
    along, tangent = last - first, 1j + 1j * turn
    # |along|^2 = 2 d along . (t0 + t1) + ... with tangents of equal length d at both ends.
    product, open_ = (along.conjugate() * tangent).real, 1.0 - turn.real
    root = math.sqrt(product**2 + 2.0 * open_ * abs(along) ** 2)
    length = (root - product) / (2.0 * open_)
    joint = 0.5 * (first + last + length * (1j - 1j * turn))
    sweep_1 = 2.0 * cmath.phase((joint - first) / 1j)
    sweep_2 = 2.0 * cmath.phase(1j * turn / (last - joint))
    return [
        Edge(first, joint, math.tan(0.25 * sweep_1)),
        Edge(joint, last, math.tan(0.25 * sweep_2)),
    ]


def step_turn(outer: float, inner: float, radius: float) -> float:
    """Angle in rad about the shaft axis that the two arcs of a step take; radii in m.

    Their centres lie at outer - radius and inner + radius from the axis and 2 radius apart.
    """
    a, b = outer - radius, inner + radius
    return math.acos(min(1.0, max(-1.0, (a**2 + b**2 - 4.0 * radius**2) / (2.0 * a * b))))


def _step_half(design: ContourDesign, rotor_radius: float, half_pitch: float) -> list[Edge]:
    if None in (design.step_mm, design.end_angle_deg, design.step_radius_mm):
        raise ValueError("a step needs step_mm, end_angle_deg and step_radius_mm")
    assert design.step_mm
    assert design.end_angle_deg
    assert design.step_radius_mm
    radius, inner = MM * design.step_radius_mm, rotor_radius - MM * design.step_mm
    middle = half_pitch - math.radians(design.end_angle_deg)
    turn = step_turn(rotor_radius, inner, radius)
    first, second = (cmath.exp(1j * (middle + sign * 0.5 * turn)) for sign in (-1.0, 1.0))
    convex, hollow = (rotor_radius - radius) * first, (inner + radius) * second
    joint = 0.5 * (convex + hollow)
    return [
        arc(complex(rotor_radius), rotor_radius * first, 0j, ccw=True),
        arc(rotor_radius * first, joint, convex, ccw=True),
        arc(joint, inner * second, hollow, ccw=False),
        arc(inner * second, inner * cmath.exp(1j * half_pitch), 0j, ccw=True),
    ]


def radius_at(rim: Sequence[Edge], angle: float) -> float:
    """Distance in m from the shaft axis to the rim at `angle` rad of the rim's frame."""
    found = across(turned_edges(rim, -angle), 0.0)
    if found is None:
        raise ValueError("the rim does not reach that angle")
    return found[1].real


def followed(design: MachineDesign, rotor_radius: float, rim: Sequence[Edge]) -> MachineDesign:
    """The design with the tangential ribs that on a round rotor give the ends under this rim.

    Args:
        design: with the ribs as stated.
        rotor_radius: in m.
        rim: chain in the q axis's frame.

    Returns:
        The design; a barrier that has no outline, or cannot follow, is left as it is.
    """
    shape = tuple(rim)
    own, other = (
        tuple(_both_halves(barrier, rotor_radius, design.pole_pairs, shape) for barrier in barriers)
        for barriers in (design.rotor.barrier, design.rotor.alternate_barrier)
    )
    rotor = design.rotor.model_copy(update={"barrier": own, "alternate_barrier": other})
    return design.model_copy(update={"rotor": rotor})


@lru_cache(maxsize=64)  # while one key is tried, most barriers and the rim stay
def _both_halves(
    barrier: BarrierDesign, rotor_radius: float, pole_pairs: int, rim: tuple[Edge, ...]
) -> BarrierDesign:
    """The barrier with the ribs of both halves following; as it is where one cannot."""
    try:
        moved = _followed_barrier(barrier, rotor_radius, pole_pairs, rim)
        if barrier.other_half is None:
            return moved
        half = _followed_barrier(clockwise_half(barrier), rotor_radius, pole_pairs, rim)
    except ValueError:
        return barrier  # its own checks say why
    width = {"tangential_rib_mm": half.tangential_rib_mm}
    return moved.model_copy(update={"other_half": barrier.other_half.model_copy(update=width)})


def _followed_barrier(
    barrier: BarrierDesign, rotor_radius: float, pole_pairs: int, rim: Sequence[Edge]
) -> BarrierDesign:
    stated = MM * barrier.tangential_rib_mm
    width = stated + rotor_radius - radius_at(rim, math.radians(barrier.end_angle_deg))
    for _ in range(MOST_STEPS):
        moved = _with_rib(barrier, width / MM)
        half = half_barrier(moved, rotor_radius, pole_pairs)
        # Towards the rim the distance falls by hardly less than the way: slope 1 is enough.
        lack = stated - _length(_nearest(half.end, rim))
        if abs(lack) <= FOLLOW_TOL:
            return moved
        width += lack
    raise ValueError("the barrier's end does not settle below the rim")


def _with_rib(barrier: BarrierDesign, rib_mm: float) -> BarrierDesign:
    """The barrier with another tangential rib, both ends of its profile wider by as much."""
    inner = barrier.tangential_rib_inner_mm
    if inner is not None:
        inner += rib_mm - barrier.tangential_rib_mm
    return barrier.model_copy(
        update={"tangential_rib_mm": rib_mm, "tangential_rib_inner_mm": inner}
    )


def ribs_to_rim(
    ribs: Sequence[Rib], cavities: Sequence[Region], rim: Sequence[Edge] | None
) -> list[Rib]:
    """The ribs with tangential ones measured to the rim; as they are where it is None.

    Args:
        ribs: of one pole.
        cavities: of its barriers.
        rim: chain in the frame of both.
    """
    if rim is None:
        return list(ribs)
    return [rib if rib.kind == "radial" else _rib_to_rim(rib, cavities, rim) for rib in ribs]


def _rib_to_rim(rib: Rib, cavities: Sequence[Region], rim: Sequence[Edge]) -> Rib:
    """The rib from its barrier's end, where it starts on the round rotor, to the rim."""
    path, at = _edge_at(rib, cavities)
    edges = cavities[path].outer.edges
    end = [edges[(at + step) % len(edges)] for step in range(-END_EDGES, END_EDGES + 1)]
    start, foot = _nearest(end, rim)
    return replace(rib, start=start, end=foot)


def _edge_at(rib: Rib, cavities: Sequence[Region]) -> tuple[int, int]:
    """Which cavity's edge a rib starts on: the numbers of both."""
    spot = line(rib.start, rib.end)
    # No point of an edge lies further than half its length from its middle.
    bounds = sorted(
        (abs(edge.point(0.5) - rib.start) - 0.5 * edge.length, k, at)
        for k, region in enumerate(cavities)
        for at, edge in enumerate(region.outer.edges)
    )
    best = (math.inf, 0, 0)
    for bound, k, at in bounds:
        if bound > best[0]:
            break
        point, _ = nearest(cavities[k].outer.edges[at], spot)
        best = min(best, (abs(point - rib.start), k, at))
    return best[1:]


def _nearest(first: Sequence[Edge], second: Sequence[Edge]) -> tuple[Point, Point]:
    return min((nearest(a, b) for a in first for b in second), key=_length)


def _length(pair: tuple[Point, Point]) -> float:
    return abs(pair[0] - pair[1])
