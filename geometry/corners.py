"""Where lines and arcs meet, and how their corners are rounded.

A fillet of radius r between two edges has its centre on both curves' parallels at distance r, on
the side towards which the corner turns; it touches a line at the foot of the perpendicular and an
arc on the ray through both centres (elementary geometry, derived). Exact for every pair of lines
and arcs.
"""

import cmath
import math

from .curves import Edge, Path, Point, closed, offset_edge, piece, share_of

# Relative to an edge's length or a radius: far above rounding (1e-16), far below any drawing.
SHARE_TOL = 1e-9


def crossings(first: Edge, second: Edge) -> tuple[Point, ...]:
    """Points where the unbounded line or circle of one edge crosses that of the other.

    Two circles or a line and a circle that touch within rounding give the point of contact;
    curves that coincide or never meet give none.
    """
    if first.is_line and second.is_line:
        return _line_line(first, second)
    if first.is_line:
        return _line_circle(first, second.centre, second.radius)
    if second.is_line:
        return _line_circle(second, first.centre, first.radius)
    return _circle_circle(first, second)


def intersections(first: Edge, second: Edge) -> tuple[Point, ...]:
    """Points that lie on both edges, ends included."""
    return tuple(
        point
        for point in crossings(first, second)
        if is_within(first, point) and is_within(second, point)
    )


def is_within(edge: Edge, point: Point) -> bool:
    """Whether a point of the unbounded curve lies on the edge itself, ends included."""
    if edge.is_line:
        return -SHARE_TOL <= share_of(edge, point) <= 1.0 + SHARE_TOL
    # Seen from the centre the middle of the arc lies across the chord: half the cost of a share.
    middle = math.copysign(1.0, edge.bulge) * -1j * (edge.end - edge.start)
    off = abs(cmath.phase((point - edge.centre) * middle.conjugate()))
    return off <= (0.5 + SHARE_TOL) * abs(edge.sweep)


def foot(edge: Edge, point: Point) -> Point:
    """The point of the unbounded line or circle nearest to `point`."""
    if edge.is_line:
        return edge.point(share_of(edge, point))
    ray = point - edge.centre
    if ray == 0.0:
        return edge.start  # all are as near
    return edge.centre + edge.radius * ray / abs(ray)


def fillet(path: Path, corner_index: int, radius: float) -> Path:
    """The path with one corner rounded; an edge that the fillet uses up is dropped.

    Args:
        path: closed path.
        corner_index: the corner at the start of `path.edges[corner_index]`.
        radius: fillet radius in m.

    Returns:
        The path, its edges in the same order, with the fillet between the two.

    Raises:
        ValueError: if the edges meet without a corner or the fillet does not fit on them.
    """
    edges = list(path.edges)
    index = corner_index % len(edges)
    before, after = edges[index - 1], edges[index]
    touch_before, touch_after, sweep = _fillet_touch(before, after, radius)
    rounded = Edge(touch_before, touch_after, math.tan(sweep / 4.0))
    edges[index - 1] = piece(before, before.start, touch_before)
    edges[index] = piece(after, touch_after, after.end)
    edges.insert(index, rounded)
    least = SHARE_TOL * radius
    return closed([edge for edge in edges if abs(edge.end - edge.start) > least])


def _fillet_touch(before: Edge, after: Edge, radius: float) -> tuple[Point, Point, float]:
    """Points of contact on both edges, and the signed sweep of the fillet."""
    turn = cmath.phase(after.direction(0.0) / before.direction(1.0))
    if abs(turn) < SHARE_TOL or math.pi - abs(turn) < SHARE_TOL:
        raise ValueError("a fillet needs a corner: the edges meet tangentially")
    side = math.copysign(radius, turn)
    corner = after.start
    candidates = []
    for centre in crossings(offset_edge(before, side), offset_edge(after, side)):
        touch_before, touch_after = foot(before, centre), foot(after, centre)
        if is_within(before, touch_before) and is_within(after, touch_after):
            sweep = cmath.phase((touch_after - centre) / (touch_before - centre))
            candidates.append((abs(centre - corner), touch_before, touch_after, sweep))
    if not candidates:
        raise ValueError(f"a fillet of radius {radius:g} m does not fit on its edges")
    _, touch_before, touch_after, sweep = min(candidates, key=lambda candidate: candidate[0])
    return touch_before, touch_after, sweep


def _line_line(first: Edge, second: Edge) -> tuple[Point, ...]:
    d_1, d_2 = first.end - first.start, second.end - second.start
    cross = (d_1.conjugate() * d_2).imag
    if abs(cross) <= SHARE_TOL * abs(d_1) * abs(d_2):
        return ()
    share = ((second.start - first.start).conjugate() * d_2).imag / cross
    return (first.start + share * d_1,)


def _line_circle(edge: Edge, centre: Point, radius: float) -> tuple[Point, ...]:
    direction = edge.direction(0.5)
    foot = edge.point(share_of(edge, centre))
    return tuple(foot + half * direction for half in _half_chords(radius, abs(centre - foot)))


def _circle_circle(first: Edge, second: Edge) -> tuple[Point, ...]:
    between = second.centre - first.centre
    distance = abs(between)
    if distance <= SHARE_TOL * max(first.radius, second.radius):
        return ()
    along = 0.5 * (
        distance + (first.radius - second.radius) * (first.radius + second.radius) / distance
    )
    unit = between / distance
    return tuple(
        first.centre + (along + 1j * half) * unit for half in _half_chords(first.radius, abs(along))
    )


def _half_chords(radius: float, distance: float) -> tuple[float, ...]:
    """Signed half chords of a circle cut at `distance` from its centre; one 0 where it touches."""
    square = (radius - distance) * (radius + distance)
    if abs(square) <= SHARE_TOL * radius**2 * SHARE_TOL:
        return (0.0,)
    if square < 0.0:
        return ()
    return (math.sqrt(square), -math.sqrt(square))
