"""Sets of drawn edges: parts of one curve joined, sets compared, made symmetric."""

import cmath
import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from .corners import foot, is_within
from .curves import Edge, Path, Point, reversed_edge

FloatArray = npt.NDArray[np.float64]
ComplexArray = npt.NDArray[np.complex128]

SAME_CURVE = 2e-7  # m, parts that lie no further from one line or arc are one
SAMPLES = 5  # of an edge, ends included, in a comparison


def joined_parts(edges: Sequence[Edge]) -> list[Edge]:
    """The edges with two joined to one wherever just two meet and lie on one line or arc."""
    result = list(edges)
    while True:
        at: dict[Point, list[int]] = {}
        for k, edge in enumerate(result):
            at.setdefault(edge.start, []).append(k)
            at.setdefault(edge.end, []).append(k)
        for point, beside in at.items():
            if len(beside) != 2 or beside[0] == beside[1]:
                continue
            whole = _one_curve(result[beside[0]], result[beside[1]], point)
            if whole is not None:
                result = [e for k, e in enumerate(result) if k not in beside] + [whole]
                break
        else:
            return result


def _one_curve(first: Edge, second: Edge, point: Point) -> Edge | None:
    before = first if first.end == point else reversed_edge(first)
    after = second if second.start == point else reversed_edge(second)
    if before.start == after.end or abs(before.sweep + after.sweep) > math.pi:
        return None
    whole = Edge(before.start, after.end, math.tan((before.sweep + after.sweep) / 4.0))
    if whole.is_line and not (before.is_line and after.is_line):
        return None
    for edge in (before, after):
        for share in (0.5, 1.0 if edge is before else 0.0):
            if distance_to(whole, edge.point(share)) > SAME_CURVE:
                return None
    return whole


def distance_to(edge: Edge, point: Point) -> float:
    """Distance in m from a point to an edge."""
    near = foot(edge, point)
    if is_within(edge, near):
        return abs(near - point)
    return min(abs(edge.start - point), abs(edge.end - point))


def difference(first: Sequence[Edge], second: Sequence[Edge]) -> tuple[float, Point]:
    """How far the first set of edges is from the second at most, in m, and where."""
    shares = np.linspace(0.0, 1.0, SAMPLES)
    points = np.array([edge.point(float(s)) for edge in first for s in shares])
    gaps = np.full(points.size, np.inf)
    for edge in second:
        gaps = np.minimum(gaps, distances_to(edge, points))
    worst = int(np.argmax(gaps))
    return float(gaps[worst]), complex(points[worst])


def distances_to(edge: Edge, points: ComplexArray) -> FloatArray:
    """Distance in m of each point from the edge; twin of `distance_to` for many points."""
    ends = np.minimum(np.abs(points - edge.start), np.abs(points - edge.end))
    if edge.is_line:
        chord = edge.end - edge.start
        along = ((points - edge.start) * chord.conjugate()).real / abs(chord) ** 2
        gap = np.abs(((points - edge.start) * chord.conjugate()).imag) / abs(chord)
    else:
        middle, centre = edge.point(0.5), edge.centre
        along = 0.5 + np.angle((points - centre) / (middle - centre)) / edge.sweep
        gap = np.abs(np.abs(points - centre) - edge.radius)
    return np.asarray(np.where((along >= 0.0) & (along <= 1.0), gap, ends))


def turned_edges(edges: Sequence[Edge], angle: float) -> list[Edge]:
    """The edges turned about the origin by `angle` rad."""
    turn = cmath.exp(1j * angle)
    return [Edge(e.start * turn, e.end * turn, e.bulge) for e in edges]


def mirrored_edges(edges: Sequence[Edge]) -> list[Edge]:
    """The edges mirrored in the real axis, each still from its start to its end."""
    return [Edge(e.start.conjugate(), e.end.conjugate(), -e.bulge) for e in edges]


@dataclass(frozen=True, slots=True)
class _Partner:
    """The edge whose mirror image another one is."""

    number: int
    image: Edge  # mirrored, and run as the other is
    is_reversed: bool  # to be run so


def made_symmetric(edges: Sequence[Edge], tolerance: float) -> list[Edge] | None:
    """The edges as the mean of themselves and their mirror image in the real axis.

    Returns:
        Edges symmetric to the last bit, or None where an edge has no partner within `tolerance` m.
    """
    mirror = mirrored_edges(edges)
    partners: list[_Partner] = []
    for edge in edges:
        found = [
            _Partner(number, m, m is not twin)
            for number, twin in enumerate(mirror)
            for m in (twin, reversed_edge(twin))
            if _are_near(edge, m, tolerance)
        ]
        if not found:
            return None
        partners.append(min(found, key=lambda one: abs(one.image.start - edge.start)))
    mean: dict[Point, Point] = {}
    for edge, partner in zip(edges, partners, strict=True):
        twin = partner.image
        for point, other in ((edge.start, twin.start), (edge.end, twin.end)):
            mean[point] = 0.5 * (point + other)
    # Each pair of points exactly each other's image: the mean of means differs by a bit.
    exact: dict[Point, Point] = {}
    for point, value in mean.items():
        if point not in exact:
            exact[point] = value
            twin_point = _nearest(mean, point.conjugate())
            exact[twin_point] = value.conjugate()
            if twin_point == point:
                exact[point] = complex(value.real, 0.0)
    return _rebuilt(edges, partners, exact)


def _nearest(points: Iterable[Point], to: Point) -> Point:
    return min(points, key=lambda point: abs(point - to))


def _rebuilt(
    edges: Sequence[Edge], partners: Sequence["_Partner"], exact: dict[Point, Point]
) -> list[Edge]:
    # By number, not by ends: a chord and its arc share these.
    bulges: dict[int, float] = {}
    result = []
    for number, (edge, partner) in enumerate(zip(edges, partners, strict=True)):
        known = bulges.get(partner.number)
        if known is None:
            bulge = 0.5 * (edge.bulge + partner.image.bulge)
        else:
            bulge = known if partner.is_reversed else -known
        bulges[number] = bulge
        result.append(Edge(exact[edge.start], exact[edge.end], bulge))
    return result


def _are_near(first: Edge, second: Edge, tolerance: float) -> bool:
    return all(
        abs(a - b) <= tolerance
        for a, b in (
            (first.start, second.start),
            (first.end, second.end),
            (first.point(0.5), second.point(0.5)),
        )
    )


def chained_loop(edges: Sequence[Edge]) -> Path:
    """Directed edges, each starting where another ends, as one closed path from the first.

    Raises:
        ValueError: where they do not chain to one loop.
    """
    leaving = {edge.start: edge for edge in edges}
    first = edges[0]
    loop = [first]
    while loop[-1].end != first.start:
        following = leaving.get(loop[-1].end)
        if following is None or len(loop) > len(edges):
            raise ValueError("edges do not chain to a loop")
        loop.append(following)
    if len(loop) != len(edges):
        raise ValueError("edges make more than one loop")
    return Path(tuple(loop))
