"""What an inspector would measure on a stator's lamination, measured on its contours as cut.

A slot is looked at upright, its middle along +y, the shaft axis at 0, in m.
"""

import cmath
import math
from collections.abc import Sequence
from dataclasses import dataclass

from lamwright.geometry.contours import Contour
from lamwright.geometry.corners import is_within
from lamwright.geometry.curves import Edge, Path, Point, turned_edge
from lamwright.geometry.distances import nearest

from .sheet_clip import heights_at, nearest_gap, runs, shortest
from .sheet_ink import edge_extremes
from .sheet_rims import ON_CIRCLE, each_once

SAME = 1e-7  # m, sizes that differ less are one
UP = 0.5 * math.pi


@dataclass(frozen=True, slots=True)
class SlotMeasure:
    """One slot, upright."""

    wall: tuple[Edge, ...]
    mouth: tuple[Point, Point] | None  # its ends on the bore, left and right; None: closed
    bridge: tuple[Point, Point] | None  # least iron between bore and a closed slot
    lip: float | None  # depth of straight lips at the mouth
    bottom: Point  # on the middle
    farthest: Point  # from the axis
    widest: tuple[Point, Point]  # left and right
    radii: tuple[float, ...]  # of its arcs but those about the axis, each once

    @property
    def opening(self) -> float | None:
        """Width of the mouth at the bore."""
        return None if self.mouth is None else abs(self.mouth[1] - self.mouth[0])

    @property
    def width(self) -> float:
        """The greatest, across the middle."""
        return self.widest[1].real - self.widest[0].real

    @property
    def is_open(self) -> bool:
        """Whether it is nowhere wider than at the bore."""
        return self.opening is not None and self.width - self.opening < SAME


@dataclass(frozen=True, slots=True)
class StatorMeasure:
    """The whole lamination."""

    outer: float  # radius
    bore: float  # radius
    count: int  # of slots
    slot: SlotMeasure  # the first, as all are
    tooth: tuple[Point, Point]  # its least width, of the tooth right of the upright slot

    @property
    def pitch(self) -> float:
        """From slot to slot, rad."""
        return 2.0 * math.pi / self.count

    @property
    def depth(self) -> float:
        """Of a slot on its middle, from the bore."""
        return self.slot.bottom.imag - self.bore

    @property
    def yoke(self) -> float:
        """Least iron behind a slot."""
        return self.outer - abs(self.slot.farthest)

    @property
    def tooth_width(self) -> float:
        """The least."""
        return abs(self.tooth[1] - self.tooth[0])


def stator_measure(contours: Sequence[Contour]) -> StatorMeasure:
    """All that the drawing tells, of contours as `punch_layers.stator_lamination` gives them."""
    outer = next(c.path for c in contours if c.layer == "OUTER_CONTOUR")
    radius = max(abs(p) for edge in outer.edges for p in edge_extremes(edge))
    paths = [c.path for c in contours if c.layer == "SLOTS"]
    bores = [c.path for c in contours if c.layer == "BORE"]
    around = bores[0] if bores else paths[0]
    bore = min(abs(p) for edge in around.edges for p in (edge.start, edge.end))
    walls = [path.edges for path in paths] if bores else _open_walls(around, bore)
    upright = min((_upright(wall) for wall in walls), key=lambda pair: pair[0])[1]
    slot = _slot(upright, bore, is_closed=bool(bores))
    return StatorMeasure(radius, bore, len(walls), slot, _tooth(upright, 2 * math.pi / len(walls)))


def _open_walls(path: Path, bore: float) -> list[tuple[Edge, ...]]:
    off = [
        any(abs(abs(p) - bore) > ON_CIRCLE for p in (edge.start, edge.point(0.5), edge.end))
        for edge in path.edges
    ]
    return runs(path.edges, off)


def _upright(wall: Sequence[Edge]) -> tuple[float, tuple[Edge, ...]]:
    """Angle of a slot's middle from 0 to a whole turn, and the slot turned up."""
    first = cmath.phase(wall[0].start)
    offs = [cmath.phase(p * cmath.exp(-1j * first)) for e in wall for p in edge_extremes(e)]
    middle = first + 0.5 * (min(offs) + max(offs))
    turned = tuple(turned_edge(edge, UP - middle) for edge in wall)
    # To a nanoradian, so that rounding below 0 does not make the first slot the last.
    return round(middle, 9) % (2.0 * math.pi), turned


def _slot(wall: tuple[Edge, ...], bore: float, *, is_closed: bool) -> SlotMeasure:
    points = [p for edge in wall for p in edge_extremes(edge)]
    left, right = (side * max(side * p.real for p in points) for side in (-1.0, 1.0))
    # The outermost of the widest places: nearest to the bottom, where a gauge reaches it last.
    ends = [max((p for p in points if abs(p.real - x) < SAME), key=abs) for x in (left, right)]
    mouth = bridge = lip = None
    bottom = 1j * max(heights_at(wall, 0.0))
    if is_closed:
        bridge = _bridge(wall, bore)
    else:
        mouth = (wall[0].start, wall[-1].end)
        mouth = mouth if mouth[0].real < mouth[1].real else (mouth[1], mouth[0])
        is_narrow = right - left - abs(mouth[1] - mouth[0]) > SAME
        lip = _lip(wall) if is_narrow else None
    radii = [e.radius for e in wall if not e.is_line and abs(e.centre) > ON_CIRCLE]
    farthest = max(_outermost(wall), key=lambda p: (round(abs(p), 9), p.real))
    return SlotMeasure(
        wall, mouth, bridge, lip, bottom, farthest, (ends[0], ends[1]), each_once(radii)
    )


def _outermost(wall: Sequence[Edge]) -> list[Point]:
    """Ends of edges, and the places of arcs farthest from the axis."""
    points = [edge.start for edge in wall] + [wall[-1].end]
    for edge in wall:
        if not edge.is_line and abs(edge.centre) > ON_CIRCLE:
            point = edge.centre * (1.0 + edge.radius / abs(edge.centre))
            points += [point] if is_within(edge, point) else []
    return points


def _bridge(wall: Sequence[Edge], bore: float) -> tuple[Point, Point]:
    """The thinnest iron between a closed slot and the bore, on its middle where it is even."""
    near = min(wall, key=lambda edge: nearest_gap(edge, 0j))
    inner, _ = nearest(near, Edge(0j, 1e-9j))
    middle = 1j * min(heights_at(wall, 0.0))
    if abs(middle) - abs(inner) < SAME:
        inner = middle
    return inner * bore / abs(inner), inner


def _lip(wall: Sequence[Edge]) -> float | None:
    """Depth of the straight walls on both sides of the mouth, None where they are not alike."""
    depths = []
    for edge in (wall[0], wall[-1]):
        if not edge.is_line or abs(edge.end.real - edge.start.real) > SAME:
            return None
        depths.append(edge.length)
    return depths[0] if abs(depths[0] - depths[1]) < SAME else None


def _tooth(wall: Sequence[Edge], pitch: float) -> tuple[Point, Point]:
    """Where the tooth on the right is thinnest; of one with parallel sides half-way along."""
    other = [turned_edge(edge, -pitch) for edge in wall]
    right = [edge for edge in wall if edge.point(0.5).real > -SAME]
    left = [e for e in other if (e.point(0.5) * cmath.exp(1j * (pitch - UP))).imag > -SAME]
    least = shortest(right, left)
    flank = max(right, key=lambda edge: edge.length if edge.is_line else 0.0)
    at = flank.point(0.5)
    across = min((nearest(Edge(at, at + 1e-10), edge) for edge in left), key=_length)
    return across if _length(across) - _length(least) < SAME else least


def _length(pair: tuple[Point, Point]) -> float:
    return abs(pair[1] - pair[0])
