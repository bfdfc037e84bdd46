"""Outlines of notches, holes and keyways, each in the frame of its own middle line.

In that frame the shaft axis lies at 0 and the middle line along +x. Every outline is symmetric to
it, so only the upper half is written: a groove's from its bottom outward to the mouth, a hole's
from its far end round to its near end. Where the mouth's end does not mirror (a rim that is no
circle), the lower half is made with its own end.
Source of all formulas: derived, plane trigonometry.
"""

import math
from collections.abc import Sequence

from .corners import foot, intersections
from .curves import (
    Edge,
    Point,
    arc,
    chained,
    line,
    mirrored_edge,
    piece,
    reversed_edge,
    turned_edge,
)
from .design_details import HoleDesign, KeywayDesign, NotchDesign

MM = 1e-3  # m
QUARTER = math.tan(math.pi / 8.0)  # bulge of a quarter turn
SAME_TOL = 1e-9  # m, arcs whose centres differ less are one
MOST_SWEEP = 1.9 * math.pi  # of one arc
GONE = 1e-12  # m, an edge shorter than that is none


def notch_floor(notch: NotchDesign, top: float, end: Point) -> tuple[Edge, ...]:
    """Upper half of a notch's wall, from its bottom to `end` on the rim.

    Args:
        notch: of the design.
        top: x of the rim on the middle line, in m.
        end: where the wall reaches the rim, half the width above the middle line.
    """
    bottom, half = top - MM * notch.depth_mm, end.imag
    if notch.bottom == "flat":
        return _flat_floor(bottom, half, notch_corner(notch), end)
    height = end.real - bottom
    if height <= half:  # one arc about the middle line through the bottom and the end
        radius = 0.5 * (height**2 + half**2) / height
        return (arc(complex(bottom), end, complex(bottom + radius), ccw=False),)
    centre = complex(bottom + half)
    return (
        arc(complex(bottom), centre + 1j * half, centre, ccw=False),
        line(centre + 1j * half, end),
    )


def notch_corner(notch: NotchDesign) -> float:
    """Radius in m of a flat notch's corners; by default an eighth of the width."""
    stated = notch.corner_radius_mm
    return MM * (0.125 * notch.width_mm if stated is None else stated)


def _flat_floor(bottom: float, half: float, radius: float, end: Point) -> tuple[Edge, ...]:
    first, second = complex(bottom, half - radius), complex(bottom + radius, half)
    return _present(
        (line(complex(bottom), first), Edge(first, second, -QUARTER), line(second, end))
    )


def keyway_wall(keyway: KeywayDesign, bore: float) -> tuple[Edge, ...]:
    """Upper half of a keyway's wall, from its bottom to the bore, whose radius is `bore` in m."""
    half, bottom = 0.5 * MM * keyway.width_mm, bore + MM * keyway.depth_mm
    end = complex(math.sqrt(bore**2 - half**2), half)
    radius = MM * keyway.corner_radius_mm
    wide = 0.5 * MM * (keyway.head_width_mm or 0.0) if keyway.kind == "dog_bone" else half
    first, second = complex(bottom, wide - radius), complex(bottom - radius, wide)
    head = (line(complex(bottom), first), Edge(first, second, QUARTER))
    if keyway.kind == "keyway":
        return _present((*head, line(second, end)))
    shoulder = bottom - MM * (keyway.head_depth_mm or 0.0)
    third, fourth = complex(shoulder + radius, wide), complex(shoulder, wide - radius)
    lip, neck = complex(shoulder, half + radius), complex(shoulder - radius, half)
    back = (line(second, third), Edge(third, fourth, QUARTER), line(fourth, lip))
    return _present((*head, *back, Edge(lip, neck, -QUARTER), line(neck, end)))


def hole_rim(hole: HoleDesign) -> tuple[Edge, ...]:
    """Upper half of a hole's outline, counter-clockwise from its far to its near end."""
    place, radius = MM * hole.place_radius_mm, 0.5 * MM * hole.diameter_mm
    if hole.span_deg is None:
        return (arc(complex(place + radius), complex(place - radius), complex(place), ccw=True),)
    out = complex(
        math.cos(0.5 * math.radians(hole.span_deg)), math.sin(0.5 * math.radians(hole.span_deg))
    )
    far, near = place + radius, place - radius
    return (
        arc(complex(far), far * out, 0j, ccw=True),
        arc(far * out, near * out, place * out, ccw=True),
        arc(near * out, complex(near), 0j, ccw=False),
    )


def whole_outline(upper: Sequence[Edge]) -> tuple[Edge, ...]:
    """The closed outline of a hole, counter-clockwise, from its upper half."""
    return joined(upper, mirrored(upper))


def mirrored(edges: Sequence[Edge]) -> tuple[Edge, ...]:
    """A chain mirrored in the middle line and run the other way."""
    return tuple(mirrored_edge(reversed_edge(edge)) for edge in reversed(edges))


def joined(first: Sequence[Edge], second: Sequence[Edge]) -> tuple[Edge, ...]:
    """Two chains as one; where a line or an arc goes on over the joint it becomes one edge."""
    a, b = first[-1], second[0]
    if a.is_line and b.is_line:
        return chained((*first[:-1], Edge(a.start, b.end), *second[1:]))
    if a.is_line or b.is_line or abs(a.centre - b.centre) > SAME_TOL:
        return chained((*first, *second))
    sweep = a.sweep + b.sweep
    if abs(sweep) > MOST_SWEEP:  # a full circle stays two halves
        return chained((*first, *second))
    return chained((*first[:-1], Edge(a.start, b.end, math.tan(0.25 * sweep)), *second[1:]))


def across(edges: Sequence[Edge], height: float) -> tuple[int, Point] | None:
    """Where a chain crosses the line at `height` along +x: number of the edge and point.

    The crossing with the largest x, on the positive side; None where there is none.
    """
    reach = max(abs(edge.start) for edge in edges) + max(abs(edge.end) for edge in edges)
    ray = line(complex(0.0, height), complex(reach, height))
    found = [(k, point) for k, edge in enumerate(edges) for point in intersections(edge, ray)]
    return max(found, key=lambda one: one[1].real) if found else None


def split(edges: Sequence[Edge], number: int, point: Point) -> tuple[list[Edge], list[Edge]]:
    """A chain before and behind a point on its edge `number`."""
    edge = edges[number]
    at = foot(edge, point)
    before = [*edges[:number], piece(edge, edge.start, at)]
    behind = [piece(edge, at, edge.end), *edges[number + 1 :]]
    return _long(before), _long(behind)


def turned_edges(edges: Sequence[Edge], angle: float) -> tuple[Edge, ...]:
    """A chain turned about the shaft axis by `angle` rad."""
    return tuple(turned_edge(edge, angle) for edge in edges)


def _present(edges: Sequence[Edge]) -> tuple[Edge, ...]:
    return chained(_long(edges))


def _long(edges: Sequence[Edge]) -> list[Edge]:
    return [edge for edge in edges if abs(edge.end - edge.start) > GONE]
