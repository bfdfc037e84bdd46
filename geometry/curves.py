"""Lines and circular arcs, exact: the only curves of an outline.

A point is the complex number x + iy in metres. An edge runs from `start` to `end` with a
`bulge` = tan(sweep / 4), positive counter-clockwise, 0 for a line: the form in which DXF stores
arcs, so that what is analysed is what is punched, to the last bit.
"""

import cmath
import math
from collections.abc import Sequence
from dataclasses import dataclass

Point = complex


@dataclass(frozen=True, slots=True)
class Edge:
    """A line (bulge 0) or an arc of less than a full turn from `start` to `end`."""

    start: Point
    end: Point
    bulge: float = 0.0

    @property
    def is_line(self) -> bool:
        """Whether the edge is straight."""
        return self.bulge == 0.0

    @property
    def sweep(self) -> float:
        """Angle swept by the arc in rad, positive counter-clockwise, 0 for a line."""
        return 4.0 * math.atan(self.bulge)

    @property
    def radius(self) -> float:
        """Radius in m, infinite for a line."""
        if self.bulge == 0.0:
            return math.inf
        return abs(self.end - self.start) * (1.0 + self.bulge**2) / (4.0 * abs(self.bulge))

    @property
    def centre(self) -> Point:
        """Centre of the arc; a line has none.

        Raises:
            ValueError: for a line.
        """
        if self.bulge == 0.0:
            raise ValueError("a line has no centre")
        # Half chord over tan(sweep / 2), left of the chord for a positive sweep.
        offset = (1.0 - self.bulge**2) / (4.0 * self.bulge)
        return 0.5 * (self.start + self.end) + 1j * (self.end - self.start) * offset

    @property
    def length(self) -> float:
        """Length along the edge in m."""
        chord = abs(self.end - self.start)
        return chord if self.bulge == 0.0 else self.radius * abs(self.sweep)

    def point(self, share: float) -> Point:
        """The point at `share` (0 to 1) of the length."""
        if self.is_line:
            return self.start + share * (self.end - self.start)
        centre = self.centre
        return centre + (self.start - centre) * cmath.exp(1j * share * self.sweep)

    def direction(self, share: float) -> complex:
        """Unit tangent at `share` (0 to 1) of the length."""
        chord = self.end - self.start
        return chord / abs(chord) * cmath.exp(1j * (share - 0.5) * self.sweep)


@dataclass(frozen=True, slots=True)
class Path:
    """A closed chain of edges: each starts where the one before ends, the first after the last."""

    edges: tuple[Edge, ...]


def line(start: Point, end: Point) -> Edge:
    """A straight edge."""
    return Edge(start, end)


def arc(start: Point, end: Point, centre: Point, *, ccw: bool) -> Edge:
    """The arc from `start` to `end` about `centre`, counter-clockwise or clockwise."""
    sweep = cmath.phase((end - centre) / (start - centre)) % (2.0 * math.pi)
    if not ccw:
        sweep -= 2.0 * math.pi
    return Edge(start, end, math.tan(sweep / 4.0))


def circle(centre: Point, radius: float) -> Path:
    """A full circle, counter-clockwise, as two half circles."""
    left, right = centre - radius, centre + radius
    return Path((Edge(right, left, 1.0), Edge(left, right, 1.0)))


def reversed_edge(edge: Edge) -> Edge:
    """The same curve run the other way."""
    return Edge(edge.end, edge.start, -edge.bulge)


def reversed_path(path: Path) -> Path:
    """The same path run the other way."""
    return Path(tuple(reversed_edge(edge) for edge in reversed(path.edges)))


def turned(path: Path, angle: float) -> Path:
    """The path turned about the origin by `angle` rad."""
    return Path(tuple(turned_edge(edge, angle) for edge in path.edges))


def area(path: Path) -> float:
    """Enclosed area in m^2, positive counter-clockwise: shoelace plus arc segments (derived)."""
    total = 0.0
    for edge in path.edges:
        total += 0.5 * (edge.start.conjugate() * edge.end).imag
        if not edge.is_line:
            total += 0.5 * edge.radius**2 * (edge.sweep - math.sin(edge.sweep))
    return total


def perimeter(path: Path) -> float:
    """Length of the closed path in m."""
    return sum(edge.length for edge in path.edges)


def mirrored_edge(edge: Edge) -> Edge:
    """The edge mirrored in the real axis, still run from its start to its end."""
    return Edge(edge.start.conjugate(), edge.end.conjugate(), -edge.bulge)


def turned_edge(edge: Edge, angle: float) -> Edge:
    """The edge turned about the origin by `angle` rad."""
    turn = cmath.exp(1j * angle)
    return Edge(edge.start * turn, edge.end * turn, edge.bulge)


def offset_edge(edge: Edge, distance: float) -> Edge:
    """The parallel curve at `distance` m to the left of travel: same sweep, so same bulge.

    Raises:
        ValueError: if the distance reaches or passes the centre of the arc.
    """
    if edge.is_line:
        shift = 1j * edge.direction(0.5) * distance
        return Edge(edge.start + shift, edge.end + shift)
    centre, radius = edge.centre, edge.radius
    scale = 1.0 - math.copysign(1.0, edge.bulge) * distance / radius
    if scale <= 0.0:
        raise ValueError(f"an offset of {distance:g} m passes the centre, radius {radius:g} m")
    return Edge(
        centre + scale * (edge.start - centre), centre + scale * (edge.end - centre), edge.bulge
    )


def share_of(edge: Edge, point: Point) -> float:
    """Where along the edge `point` lies: 0 at the start, 1 at the end, beyond outside.

    The point is taken as its projection on the unbounded line or circle. On an arc the value is
    counted from the arc's middle to half a turn either way.
    """
    if edge.is_line:
        chord = edge.end - edge.start
        return ((point - edge.start) * chord.conjugate()).real / abs(chord) ** 2
    middle = edge.point(0.5)
    centre = edge.centre
    return 0.5 + cmath.phase((point - centre) / (middle - centre)) / edge.sweep


def piece(edge: Edge, start: Point, end: Point) -> Edge:
    """The part of the edge between two points on it, in the edge's sense of travel."""
    if edge.is_line:
        return Edge(start, end)
    share = share_of(edge, end) - share_of(edge, start)
    return Edge(start, end, math.tan(share * edge.sweep / 4.0))


def chained(edges: Sequence[Edge]) -> tuple[Edge, ...]:
    """The edges with each start set to the end before it, so that rounding leaves no gap."""
    result: list[Edge] = []
    for edge in edges:
        start = result[-1].end if result else edge.start
        result.append(Edge(start, edge.end, edge.bulge))
    return tuple(result)


def closed(edges: Sequence[Edge]) -> Path:
    """The chain as a path whose last edge ends exactly where the first starts."""
    chain = chained(edges)
    last = chain[-1]
    return Path((*chain[:-1], Edge(last.start, chain[0].start, last.bulge)))
