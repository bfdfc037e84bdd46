"""What an inspector would measure on a lamination, measured on its contours as cut.

Section and design only lend names and places: every length and angle here comes from the lines
and arcs of the contours. A pole is looked at upright, its q axis along +y, in m.
"""

import cmath
import math
from collections.abc import Sequence
from dataclasses import dataclass, replace

from lamwright.geometry.contours import Contour, compare_contours
from lamwright.geometry.curves import Edge, Path, Point, mirrored_edge, turned_edge
from lamwright.geometry.section import CrossSection, Rib, base_name, pole_of, rotor_cell

from .sheet_clip import heights_at, in_circle, nearest_edge, nearest_gap, shortest, turn_of
from .sheet_job import SheetJob

ALIKE = 1e-7  # m, poles and ribs that differ less are one kind
ABOUT_AXIS = 1e-6  # m, an arc whose centre is nearer lies about the shaft axis
SIDE_TOL = 1e-6  # rad
STEP = 0.5e-3  # m, places beside the q axis where a rib stands on it
MOST_STEPS = 40
SETTLED = 0.02  # of the thickness, change over a step beside a rib's fillet
# Of the rotor's radius: a wider one is no rib, but what a drawing's hole leaves to the rim.
MOST_RIB = 0.15
WINDOW = 3.0  # rib widths about a rib's ends in which its least width is looked for


@dataclass(frozen=True, slots=True)
class Cavity:
    """A cavity of a barrier, upright; barriers count from 1 at the rim."""

    barrier: int
    path: Path


@dataclass(frozen=True, slots=True)
class AxisCut:
    """A barrier's thickness along the q axis, at `beside` m from it; heights from the axis."""

    barrier: int
    beside: float
    outer: float
    inner: float

    @property
    def thickness(self) -> float:
        """In m."""
        return self.outer - self.inner


@dataclass(frozen=True, slots=True)
class RibMeasure:
    """A rib at its thinnest place, upright; `end_angle` in rad off the q axis, right positive."""

    kind: str
    barrier: int
    start: Point
    end: Point
    end_angle: float
    radii: tuple[float, ...]  # of its corners or its barrier's end, each once
    centre: Point  # half-way across and along its sides

    @property
    def width(self) -> float:
        """Least width in m."""
        return abs(self.end - self.start)

    @property
    def middle(self) -> Point:
        """Half-way across."""
        return 0.5 * (self.start + self.end)

    @property
    def tilt(self) -> float:
        """Angle in rad between a radial rib and the q axis, magnitude."""
        across = self.end - self.start
        return abs(math.atan2(across.imag, abs(across.real)))


@dataclass(frozen=True, slots=True)
class PoleMeasure:
    """One kind of pole, upright, and which poles (from 1) are of it."""

    numbers: tuple[int, ...]
    cavities: tuple[Cavity, ...]
    holes: tuple[Path, ...]
    cuts: tuple[AxisCut, ...]
    ribs: tuple[RibMeasure, ...]
    is_symmetric: bool


def pole_measures(job: SheetJob) -> tuple[PoleMeasure, ...]:
    """Every kind of pole, the first pole's first."""
    section = job.section
    outer = next(c for c in job.contours if c.layer == "OUTER_CONTOUR")
    found: list[tuple[list[Contour], list[int]]] = []
    for pole in range(section.poles):
        own = _own(job.contours, section, pole)
        for known, numbers in found:
            if compare_contours(known, own) < ALIKE:
                numbers.append(pole + 1)
                break
        else:
            found.append((own, [pole + 1]))
    return tuple(
        _measured(section, own, tuple(numbers), _turned(outer, section, numbers[0] - 1))
        for own, numbers in found
    )


def _own(contours: Sequence[Contour], section: CrossSection, pole: int) -> list[Contour]:
    """Cavities and holes of one pole, upright; holes on the pole's first side belong to it."""
    own = []
    for contour in contours:
        if contour.layer not in ("BARRIERS", "HOLES"):
            continue
        points = [edge.point(k / 4) for edge in contour.path.edges for k in range(4)]
        middle = sum(points) / len(points)
        angle = (cmath.phase(middle) + 1e-6) % (2.0 * math.pi)
        if int(angle / section.pole_angle) == pole:
            own.append(_turned(contour, section, pole))
    return own


def _turned(contour: Contour, section: CrossSection, pole: int) -> Contour:
    turn = cmath.phase(turn_of((pole + 0.5) * section.pole_angle))
    edges = tuple(turned_edge(edge, turn) for edge in contour.path.edges)
    return replace(contour, path=Path(edges))


def _measured(
    section: CrossSection, own: Sequence[Contour], numbers: tuple[int, ...], outer: Contour
) -> PoleMeasure:
    cell = rotor_cell(section)
    pole = (numbers[0] - 1) % cell.sector_poles + 1
    turn = turn_of((pole - 0.5) * section.pole_angle)
    cavities = _cavities(cell, pole, [c.path for c in own if c.layer == "BARRIERS"])
    ribs = [
        _rib(rib, turn, cavities, outer.path.edges)
        for rib in cell.ribs
        if pole_of(rib.name) == pole and rib.width < MOST_RIB * section.rotor_radius
    ]
    barriers = sorted({cavity.barrier for cavity in cavities})
    cuts = [_axis_cut(k, [c for c in cavities if c.barrier == k]) for k in barriers]
    inside = [c for c in own if not _is_on_side(c.path, section.pole_angle)]
    mirrored = [replace(c, path=_mirrored(c.path)) for c in inside]
    return PoleMeasure(
        numbers,
        cavities,
        tuple(c.path for c in own if c.layer == "HOLES"),
        tuple(cut for cut in cuts if cut is not None),
        tuple(ribs),
        compare_contours(inside, mirrored) < ALIKE,
    )


def _is_on_side(path: Path, pitch: float) -> bool:
    """Whether a hole's middle lies on one of the pole's sides, the d axes."""
    off = abs(cmath.phase(_mean(path.edges) / 1j))
    return abs(off - 0.5 * pitch) < SIDE_TOL


def _mirrored(path: Path) -> Path:
    """Mirrored in the upright axis."""
    return Path(
        tuple(
            turned_edge(mirrored_edge(turned_edge(e, -math.pi / 2)), math.pi / 2)
            for e in path.edges
        )
    )


def _cavities(cell: CrossSection, pole: int, paths: Sequence[Path]) -> tuple[Cavity, ...]:
    """The paths with the number of the barrier that each lies nearest to in the section."""
    turn = cmath.phase(turn_of((pole - 0.5) * cell.pole_angle))
    known = []
    for region in cell.rotor:
        name = base_name(region.name)
        if pole_of(region.name) == pole and name.startswith("barrier_"):
            edges = [turned_edge(edge, turn) for edge in region.outer.edges]
            known.append((int(name.split("_")[1]), _mean(edges)))
    return tuple(
        Cavity(min(known, key=lambda one: abs(one[1] - _mean(path.edges)))[0], path)
        for path in paths
    )


def _mean(edges: Sequence[Edge]) -> Point:
    """Middle of a closed outline by length, so that added vertices move it little."""
    length = sum(edge.length for edge in edges)
    return sum(edge.length * 0.5 * (edge.start + edge.end) for edge in edges) / length


def _rib(rib: Rib, turn: complex, cavities: Sequence[Cavity], rim: Sequence[Edge]) -> RibMeasure:
    ends = (rib.start * turn, rib.end * turn)
    reach = WINDOW * rib.width
    own = [c for c in cavities if c.barrier == rib.barrier]
    if rib.kind == "tangential":
        sides = [_nearest_path(own, ends[0]), rim]
    else:
        sides = [_nearest_path(own, end) for end in ends]
    near = [in_circle(side, end, reach) for side, end in zip(sides, ends, strict=True)]
    start, end = shortest(near[0], near[1])
    edge = _end_edge(sides[0], start)
    beside = [_side_at(side, point) for side, point in zip(sides, (start, end), strict=True)]
    is_straight = all(one.is_line for one in beside)
    return RibMeasure(
        rib.kind,
        rib.barrier,
        start,
        end,
        math.pi / 2.0 - cmath.phase(_end_place(edge, start)),
        _corner_radii(sides[0], edge),
        0.5 * sum(one.point(0.5) for one in beside) if is_straight else 0.5 * (start + end),
    )


def _end_edge(edges: Sequence[Edge], start: Point) -> Edge:
    """The edge at a rib's thinnest place; of several an arc about the shaft axis."""
    at_place = [edge for edge in edges if nearest_gap(edge, start) < ABOUT_AXIS]
    along = [edge for edge in at_place if not edge.is_line and abs(edge.centre) < ABOUT_AXIS]
    return along[0] if along else nearest_edge(edges, start)


def _side_at(edges: Sequence[Edge], point: Point) -> Edge:
    """The edge at one end of a rib's least width; of several a straight one."""
    at_place = [edge for edge in edges if nearest_gap(edge, point) < ABOUT_AXIS]
    lines = [edge for edge in at_place if edge.is_line]
    return lines[0] if lines else nearest_edge(edges, point)


def _nearest_path(cavities: Sequence[Cavity], point: Point) -> tuple[Edge, ...]:
    def gap(cavity: Cavity) -> float:
        return abs(nearest_point(cavity.path.edges, point) - point)

    return min(cavities, key=gap).path.edges


def nearest_point(edges: Sequence[Edge], point: Point) -> Point:
    """The point of a chain that lies nearest to `point`."""
    return shortest(edges, (Edge(point, point + 1e-15),))[0]


def _end_place(edge: Edge, start: Point) -> Point:
    """Where a barrier's end is measured: middle of an end along the rim, or an arc's centre."""
    if edge.is_line:
        return start
    return edge.point(0.5) if abs(edge.centre) < ABOUT_AXIS else edge.centre


def _corner_radii(edges: Sequence[Edge], edge: Edge) -> tuple[float, ...]:
    """Radii of the edge and of its neighbours, small ones only, each once."""
    number = list(edges).index(edge)
    beside = [edges[number - 1], edge, edges[(number + 1) % len(edges)]]
    least = min(one.radius for one in beside)
    radii = [one.radius for one in beside if one.radius < 3.0 * least and not one.is_line]
    kept: list[float] = []
    for radius in sorted(radii):
        if not kept or radius - kept[-1] > ALIKE:
            kept.append(radius)
    return tuple(kept)


def _axis_cut(barrier: int, cavities: Sequence[Cavity]) -> AxisCut | None:
    """The barrier's sides on the q axis, or beside it where a rib stands there."""
    edges = [edge for cavity in cavities for edge in cavity.path.edges]
    last: AxisCut | None = None
    for k in range(MOST_STEPS):
        cut = _cut_at(barrier, edges, -k * STEP)
        if cut is None:
            last = None
            continue
        if k == 0:
            return cut
        if last is not None and abs(cut.thickness - last.thickness) < SETTLED * cut.thickness:
            return last
        last = cut
    return last


def _cut_at(barrier: int, edges: Sequence[Edge], x: float) -> AxisCut | None:
    heights = [height for height in heights_at(edges, x) if height > 0.0]
    return AxisCut(barrier, abs(x), heights[1], heights[0]) if len(heights) == 2 else None
