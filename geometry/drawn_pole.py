"""The poles of a drawn rotor in their own frames: cut at the d axes, named, their ribs measured.

Frame: shaft axis at 0, q axis along +x. Every pole is cut out by its two d axes; where it is its
own mirror image within the tolerance it is made so to the last bit, and points on the d axes of
neighbouring poles are made to lie on each other.
Barriers are told by u + iv = ((x + iy) / rim)^p: a barrier is one band of u (from the q axis to
the rim), its cavities follow each other in v. Holes, no barriers, are full circles, what lies
across a d axis, a notch of the rim on the q axis, and what is farther from the rim than it is long:
a barrier runs from rib to rib.
"""

import cmath
import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

from .arrangement import arrangement
from .blunting import blunted
from .corners import is_within
from .curves import Edge, Path, Point, arc, reversed_edge
from .distances import nearest
from .errors import OutlineError
from .outline_edges import joined_parts, made_symmetric, turned_edges
from .section import Rib

WELD_TOL = 1e-7  # m, within one pole: far below a drawing's digits, far above rounding
# Of the narrower band: cavities of one barrier share more of u and less of v; ribs that lean make
# them share some of v, up to 0.08 in the gallery.
OVERLAP = 0.5
LETTERS = "abcdefghij"
MOUTHS = 3  # pieces of the rim's circle at one mouth, with those cut at the q axis


@dataclass(frozen=True, slots=True)
class PolePart:
    """An area of a pole: an outer path, counter-clockwise, and clockwise holes, in m."""

    name: str
    outer: Path
    holes: tuple[Path, ...] = ()


@dataclass(frozen=True, slots=True)
class PoleDrawing:
    """One pole in the frame of its q axis, in m."""

    iron: PolePart
    air: tuple[PolePart, ...]  # barrier_<k>, barrier_<k>_<letter>, hole_<k>
    shaft: PolePart
    rim: tuple[Edge, ...]  # the rim circle from side to side, counter-clockwise
    ribs: tuple[Rib, ...]


@dataclass(frozen=True, slots=True)
class _Pole:
    """What all poles share."""

    rim: float
    order: int  # pole pairs
    tolerance: float  # m, of healed drawings
    alike: float  # m, by which poles that are meant alike may differ

    @property
    def half(self) -> float:
        """Half the pole pitch in rad."""
        return 0.5 * math.pi / self.order


def drawn_poles(
    edges: Sequence[Edge], rim: float, poles: int, period: int, tolerances: tuple[float, float]
) -> tuple[tuple[PoleDrawing, ...], bool]:
    """The poles of one period, and whether each is symmetric about its q axis.

    Args:
        edges: between iron, air, shaft and gap, of the whole rotor, a d axis at angle 0, m.
        rim: radius in m.
        poles: of the machine.
        period: poles to draw, from that d axis on.
        tolerances: m, of points in a healed drawing, and of poles that are meant alike.

    Raises:
        OutlineError: its place is in the frame of the edges.
    """
    frame = _Pole(rim, poles // 2, *tolerances)
    cut = [_cut_pole(turned_edges(edges, -(2 * k + 1) * frame.half), frame) for k in range(period)]
    mirrored = [made_symmetric(pole, frame.alike) for pole in cut]
    is_symmetric = all(pole is not None for pole in mirrored)
    kept = [m if m is not None and is_symmetric else c for m, c in zip(mirrored, cut, strict=True)]
    settled = [blunted(pole, rim) for pole in _settled(kept, frame)]
    return tuple(_named(pole, frame) for pole in settled), is_symmetric


def _cut_pole(edges: Sequence[Edge], frame: _Pole) -> list[Edge]:
    """Edges of the pole about the positive x axis, and pieces of its two sides."""
    sides = [cmath.exp(1j * sign * frame.half) for sign in (1.0, -1.0)]
    near = [_on_sides(e, sides, frame) for e in edges if _may_reach(e, frame)]
    rays = [Edge(0j, frame.rim * side) for side in sides]
    whole = arrangement([*near, *rays], WELD_TOL)
    kept: set[int] = set()
    for face in whole.faces:
        edge = whole.edge(face.loops[0][0])
        inside = edge.point(0.5) + 1j * edge.direction(0.5) * 10.0 * WELD_TOL
        if abs(inside) < frame.rim and abs(cmath.phase(inside)) < frame.half:
            kept |= face.numbers
    return joined_parts([whole.edges[n - 1] for n in sorted(kept)])


def _may_reach(edge: Edge, frame: _Pole) -> bool:
    """Whether the edge may lie in the pole: not wholly beyond its sides."""
    if frame.order == 1:
        return True
    limit = frame.half + 2.0 * frame.tolerance / max(abs(edge.start), 1e-3)
    points = [edge.point(k / 8) for k in range(9)]
    return any(abs(cmath.phase(p)) < limit for p in points if p != 0.0)


def _on_sides(edge: Edge, sides: Sequence[complex], frame: _Pole) -> Edge:
    """The edge with ends near a side or the rim moved onto it."""

    def moved(point: Point) -> Point:
        if abs(abs(point) - frame.rim) < 2.0 * frame.tolerance:
            point *= frame.rim / abs(point)
        for side in sides:
            if abs((point / side).imag) < 2.0 * frame.tolerance and (point / side).real > 0.0:
                return abs(point) * side
        return point

    result = Edge(moved(edge.start), moved(edge.end), edge.bulge)
    return _on_rim(result, frame)


def _on_rim(edge: Edge, frame: _Pole) -> Edge:
    points = (edge.start, edge.point(0.5), edge.end)
    if any(abs(abs(p) - frame.rim) > 4.0 * frame.tolerance for p in points):
        return edge
    # Towards its middle: of two poles an edge may take half a turn, with no side of its chord.
    is_ccw = (edge.start.conjugate() * points[1]).imag > 0.0
    return arc(edge.start, edge.end, 0j, ccw=is_ccw)


def _settled(poles: Sequence[Sequence[Edge]], frame: _Pole) -> list[list[Edge]]:
    """The poles with the points on their sides at the same radii, each side's as the others'."""
    radii = sorted(
        {abs(p) for pole in poles for e in pole for p in (e.start, e.end) if _side(p, frame)}
    )
    clusters: list[list[float]] = []
    for radius in radii:
        if clusters and radius - clusters[-1][-1] < frame.alike:
            clusters[-1].append(radius)
        else:
            clusters.append([radius])
    means = {r: sum(c) / len(c) if len(c) > 1 else r for c in clusters for r in c}
    means = {r: frame.rim if abs(m - frame.rim) < frame.tolerance else m for r, m in means.items()}

    def moved(point: Point) -> Point:
        side = _side(point, frame)
        return means[abs(point)] * cmath.exp(1j * side * frame.half) if side else point

    result = []
    for pole in poles:
        edges = [Edge(moved(e.start), moved(e.end), e.bulge) for e in pole]
        result.append([_on_rim(e, frame) for e in edges])
    return result


def _side(point: Point, frame: _Pole) -> int:
    """1 on the upper d axis, -1 on the lower one, 0 elsewhere and on the shaft axis."""
    if abs(point) < WELD_TOL:
        return 0
    for side in (1, -1):
        turned = point * cmath.exp(-1j * side * frame.half)
        # Of two poles, both sides are on one line, and each on its own end of it.
        if abs(turned.imag) < WELD_TOL and turned.real > 0.0:
            return side
    return 0


def _named(edges: Sequence[Edge], frame: _Pole) -> PoleDrawing:
    whole = arrangement(edges, WELD_TOL)
    parts = [
        PolePart("", whole.path(f.loops[0]), tuple(whole.path(h) for h in f.loops[1:]))
        for f in whole.faces
    ]
    shaft = [p for p in parts if any(e.start == 0.0 or e.end == 0.0 for e in p.outer.edges)]
    # Of two poles, each is half a turn: the shaft's side is one line through the axis.
    shaft = shaft or [p for p in parts if _passes_axis(p)]
    rest = [p for p in parts if p not in shaft]
    iron = [p for p in rest if _is_iron(p, frame)]
    if len(shaft) != 1 or len(iron) != 1:
        text = f"the iron of one pole is in {len(iron)} pieces between its d axes"
        raise OutlineError(text, iron[-1].outer.edges[0].start if iron else None)
    air = [p for p in rest if p not in iron]
    rim = _rim(parts, frame)
    named, ribs = _barriers(air, frame)
    return PoleDrawing(
        PolePart("rotor_iron", iron[0].outer, iron[0].holes),
        tuple(named),
        PolePart("shaft", shaft[0].outer),
        rim,
        tuple(ribs),
    )


def _passes_axis(part: PolePart) -> bool:
    return any(
        e.is_line
        and abs((e.start.conjugate() * e.end).imag) < WELD_TOL * abs(e.end)
        and (e.start.conjugate() * e.end).real < 0.0
        for e in part.outer.edges
    )


def _is_iron(part: PolePart, frame: _Pole) -> bool:
    """Iron holds the middle of the side next to the rim: told by touching a side and the rim."""
    lines = [
        e
        for e in part.outer.edges
        if _side(e.start, frame) and _side(e.start, frame) == _side(e.end, frame)
    ]
    touches = {_side(e.start, frame) for e in lines}
    return touches == {1, -1}


def _rim(parts: Sequence[PolePart], frame: _Pole) -> tuple[Edge, ...]:
    edges = [
        e
        for part in parts
        for e in part.outer.edges
        if not e.is_line
        and all(abs(abs(p) - frame.rim) < WELD_TOL for p in (e.start, e.point(0.5), e.end))
    ]
    forward = [e if e.bulge > 0.0 else reversed_edge(e) for e in edges]
    return tuple(sorted(forward, key=lambda e: cmath.phase(e.start)))


def _barriers(air: Sequence[PolePart], frame: _Pole) -> tuple[list[PolePart], list[Rib]]:
    """Cavities named from the rim inward, holes after them, and the ribs of the barriers."""
    holes = [p for p in air if _is_hole(p, frame)]
    cavities = [p for p in air if p not in holes]
    groups = _grouped(cavities, frame)
    holes += [part for group in groups if _is_off_rim(group, frame) for part in group]
    groups = [group for group in groups if not _is_off_rim(group, frame)]
    named: list[PolePart] = []
    ribs: list[Rib] = []
    for number, group in enumerate(groups, start=1):
        many = len(group) > 1
        for letter, part in zip(LETTERS, group, strict=False):
            name = f"barrier_{number}_{letter}" if many else f"barrier_{number}"
            named.append(PolePart(name, part.outer, part.holes))
        ribs += _ribs(number, group, frame)
    holes.sort(key=lambda part: (-abs(_middle(part)), cmath.phase(_middle(part))))
    named += [PolePart(f"hole_{k}", p.outer, p.holes) for k, p in enumerate(holes, start=1)]
    return named, ribs


def _is_hole(part: PolePart, frame: _Pole) -> bool:
    edges = part.outer.edges
    if any(_side(p, frame) for e in edges for p in (e.start,)) or _is_notch(part, frame):
        return True
    centre = edges[0].centre if not edges[0].is_line else None
    return centre is not None and all(
        not e.is_line and abs(e.centre - centre) < 10.0 * frame.tolerance for e in edges
    )


def _is_notch(part: PolePart, frame: _Pole) -> bool:
    """Whether it is open to the gap across the q axis: a barrier ends at the rim on either side."""
    mouths = [
        e
        for e in part.outer.edges
        if all(abs(abs(p) - frame.rim) < WELD_TOL for p in (e.start, e.point(0.5), e.end))
    ]
    ends = [p.imag for e in mouths for p in (e.start, e.end)]
    return bool(ends) and min(ends) < -WELD_TOL and max(ends) > WELD_TOL and len(mouths) < MOUTHS


def _is_off_rim(group: Sequence[PolePart], frame: _Pole) -> bool:
    """Whether the cavities are farther from the rim than they are long together."""
    points = [e.point(k / 4) for part in group for e in part.outer.edges for k in range(4)]
    length = max(abs(p - q) for p in points for q in points)
    return frame.rim - max(map(abs, points)) > length


def _middle(part: PolePart) -> Point:
    total = sum(edge.length for edge in part.outer.edges)
    return sum(edge.length * edge.point(0.5) for edge in part.outer.edges) / total


def _grouped(cavities: Sequence[PolePart], frame: _Pole) -> list[list[PolePart]]:
    """Cavities of each barrier, counter-clockwise; barriers from the rim inward."""
    spans = {id(p): _span(p, frame) for p in cavities}
    left = sorted(cavities, key=lambda p: -sum(spans[id(p)][0]))

    def follow(one: PolePart, other: PolePart) -> bool:
        (u, v), (other_u, other_v) = spans[id(one)], spans[id(other)]
        is_like = _shared(u, other_u) > OVERLAP and _shared(v, other_v) < OVERLAP
        return is_like and _is_along(*_shortest(one, other), frame)

    groups: list[list[PolePart]] = []
    for part in left:
        for group in groups:
            if all(follow(part, other) for other in group):
                group.append(part)
                break
        else:
            groups.append([part])
    for group in groups:
        group.sort(key=lambda p: spans[id(p)][1][0])
    return groups


def _shortest(one: PolePart, other: PolePart) -> tuple[Point, Point]:
    """Where two cavities are nearest to each other."""
    pairs = [nearest(a, b) for a in one.outer.edges for b in other.outer.edges]
    return min(pairs, key=lambda pair: abs(pair[0] - pair[1]))


def _is_along(start: Point, end: Point, frame: _Pole) -> bool:
    """Whether a way runs along v, as across a rib, and not along u, as from barrier to barrier."""
    # dw = p z^(p - 1) dz; of it the direction counts.
    step = (end - start) * (0.5 * (start + end) / frame.rim) ** (frame.order - 1)
    return abs(step.imag) > abs(step.real)


def _shared(first: tuple[float, float], second: tuple[float, float]) -> float:
    """What two bands share, of the narrower one; negative where they lie apart."""
    common = min(first[1], second[1]) - max(first[0], second[0])
    return common / min(first[1] - first[0], second[1] - second[0])


def _span(part: PolePart, frame: _Pole) -> tuple[tuple[float, float], tuple[float, float]]:
    w = [(e.point(k / 8) / frame.rim) ** frame.order for e in part.outer.edges for k in range(8)]
    return (min(p.real for p in w), max(p.real for p in w)), (
        min(p.imag for p in w),
        max(p.imag for p in w),
    )


def _ribs(number: int, group: Sequence[PolePart], frame: _Pole) -> list[Rib]:
    ribs: list[Rib] = []
    sides: tuple[tuple[Literal["right", "left"], PolePart, float], ...] = (
        ("right", group[0], -1.0),
        ("left", group[-1], 1.0),
    )
    for word, part, sign in sides:
        out = [p for p in _outermost(part) if p.imag * sign > 0.0]
        if not out:
            continue
        point = max(out, key=abs)
        if frame.rim - abs(point) > frame.tolerance:
            end = frame.rim * point / abs(point)
            ribs.append(Rib(f"tangential_{number}_{word}", "tangential", number, point, end))
    for letter, before, after in zip(LETTERS, group[:-1], group[1:], strict=False):
        start, end = _shortest(before, after)
        ribs.append(Rib(f"radial_{number}_{letter}", "radial", number, start, end))
    return ribs


def _outermost(part: PolePart) -> list[Point]:
    """Ends of edges, and the places of arcs farthest from the axis."""
    points = [edge.start for edge in part.outer.edges]
    for edge in part.outer.edges:
        if edge.is_line or edge.centre == 0.0:
            continue
        point = edge.centre * (1.0 + edge.radius / abs(edge.centre))
        if is_within(edge, point):
            points.append(point)
    return points
