"""The cross-section with a measured outline in place of the designed one.

Every joint of the designed outline is moved to where it was measured, and every arc takes its
measured sweep; names, magnets, stator and whatever else lies beside stay. One period of the rotor
is analysed: its closed contours (barriers, holes) are those of one measured period, and what goes
round (rim, bore, contours across d axes) the mean of all.
"""

import cmath
import math
from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from .curves import Edge, Path, Point, arc
from .distances import distance
from .errors import OutlineError
from .section import CrossSection, Region, Rib, base_name, pole_of, rotor_iron
from .supplier_fit import FittedContour
from .supplier_ideal import WELD_TOL, Ideal
from .supplier_ribs import MeasuredRib

CLEAR = 1e-6  # m, least clearance of a magnet in a measured cavity


@dataclass(frozen=True, slots=True)
class _Joint:
    """Where a joint and the edge after it are designed and measured, in the period's frame."""

    start: Point
    end: Point  # of the edge that begins here
    moved: complex
    swept: float  # rad, change of the edge's sweep


def measured_section(
    section: CrossSection,
    ideal: Ideal,
    fitted: Sequence[FittedContour],
    ribs: Sequence[MeasuredRib],
    group: int,
) -> CrossSection:
    """The section with the outline as measured.

    Args:
        section: as designed.
        ideal: its outline.
        fitted: each of the outline's contours as measured.
        ribs: of all poles, as measured.
        group: number, from 0, of the period whose closed contours are taken.

    Raises:
        OutlineError: a magnet that has no room.
    """
    joints = _joints(ideal, fitted, group)
    is_round = section.ring_radius is None
    rim = _mean_radius(ideal, fitted, ideal.rim) if is_round else ideal.rim
    bore = _mean_radius(ideal, fitted, ideal.bore)
    moved = replace(section, rotor_radius=rim, shaft_radius=bore)
    circles = {section.circle_radius: moved.circle_radius}
    rings = {ideal.bore: bore, **({ideal.rim: rim} if is_round else {})}
    rotor = _Mover(ideal, joints, circles | rings)
    stator = _Mover(ideal, (), circles)
    result = replace(
        moved,
        rotor=tuple(rotor.region(region) for region in section.rotor),
        stator=tuple(stator.region(region) for region in section.stator),
        ribs=tuple(_rib(rib, section, ideal, ribs, group) for rib in section.ribs),
    )
    _raise_if_jammed(result)
    return result


def owner(contour: Path, ideal: Ideal) -> int | None:
    """Number of the period that a contour lies in, None for one that lies in several."""
    whole = ideal.period * ideal.pitch
    if ideal.poles == ideal.period:
        return 0
    angles = [cmath.phase(e.point(s)) % (2.0 * math.pi) for e in contour.edges for s in (0.0, 0.5)]
    found = {int(angle / whole) for angle in angles}
    return found.pop() if len(found) == 1 else None


def _joints(ideal: Ideal, fitted: Sequence[FittedContour], group: int) -> tuple[_Joint, ...]:
    """Joints of the group's own contours, and the means of those that go round."""
    whole = ideal.period * ideal.pitch
    single: list[_Joint] = []
    round_: list[_Joint] = []
    for contour, fit in zip(ideal.contours, fitted, strict=True):
        own = owner(contour.path, ideal)
        if own is not None and own != group:
            continue
        for was, now in zip(contour.path.edges, fit.edges, strict=True):
            back = cmath.exp(-1j * _periods(was.start, whole) * whole)
            one = _Joint(
                was.start * back,
                was.end * back,
                (now.start - was.start) * back,
                now.sweep - was.sweep,
            )
            (single if own is not None else round_).append(one)
    means = []
    while round_:
        first = round_[0]
        alike = [j for j in round_ if _same(j.start, first.start) and _same(j.end, first.end)]
        round_ = [j for j in round_ if j not in alike]
        moved = sum(j.moved for j in alike) / len(alike)
        means.append(replace(first, moved=moved, swept=sum(j.swept for j in alike) / len(alike)))
    return (*single, *means)


def _periods(point: Point, whole: float) -> int:
    return math.floor((cmath.phase(point) % (2.0 * math.pi)) / whole + 1e-9)


def _same(a: Point, b: Point) -> bool:
    return abs(a - b) < WELD_TOL


def _mean_radius(ideal: Ideal, fitted: Sequence[FittedContour], radius: float) -> float:
    """Mean radius in m of the measured arcs that are designed about the axis with this radius."""
    total = length = 0.0
    for contour, fit in zip(ideal.contours, fitted, strict=True):
        for was, now in zip(contour.path.edges, fit.edges, strict=True):
            if was.is_line or abs(was.centre) > WELD_TOL or abs(was.radius - radius) > WELD_TOL:
                continue
            shares = (np.arange(8) + 0.5) / 8
            total += was.length * float(np.mean([abs(now.point(float(s))) for s in shares]))
            length += was.length
    return total / length if length else radius


class _Mover:
    """Moves points and edges of regions from the designed to the measured outline."""

    def __init__(self, ideal: Ideal, joints: Sequence[_Joint], circles: dict[float, float]) -> None:
        self.whole = ideal.period * ideal.pitch
        self.pitch = ideal.pitch
        self.circles = circles  # radius in m about the axis as designed and as measured
        self.joints = joints
        self.starts = np.array([joint.start for joint in joints], dtype=complex)

    def region(self, region: Region) -> Region:
        """The region with its outline moved."""
        return replace(
            region,
            outer=self.path(region.outer),
            holes=tuple(self.path(hole) for hole in region.holes),
        )

    def path(self, path: Path) -> Path:
        """The path moved."""
        return Path(tuple(self.edge(edge) for edge in path.edges))

    def edge(self, edge: Edge) -> Edge:
        """The edge moved: arcs about the axis stay such, others take the measured sweep."""
        start, end = self.point(edge.start), self.point(edge.end)
        if not edge.is_line and abs(edge.centre) < WELD_TOL and self._circle(edge.start):
            return arc(start, end, 0j, ccw=edge.bulge > 0.0)
        swept = self._swept(edge.start, edge.end) - self._swept(edge.end, edge.start)
        return Edge(start, end, math.tan(0.25 * (edge.sweep + swept)) if swept else edge.bulge)

    def point(self, point: Point) -> Point:
        """The point moved; points on d axes stay on them."""
        turn = cmath.exp(1j * _periods(point, self.whole) * self.whole)
        base = point / turn
        near = self._at(base)
        circle = self._circle(point)
        if near is None:
            return point if circle is None else point * (circle / abs(point))
        moved = base + self.joints[near].moved
        side = round(cmath.phase(base) / self.pitch) * self.pitch
        if abs((base * cmath.exp(-1j * side)).imag) < WELD_TOL:
            moved = (moved * cmath.exp(-1j * side)).real * cmath.exp(1j * side)
        if circle is not None:
            moved *= circle / abs(moved)
        return moved * turn

    def _at(self, base: Point) -> int | None:
        if not self.starts.size:
            return None
        gaps = np.abs(self.starts - base)
        near = int(np.argmin(gaps))
        return near if gaps[near] < WELD_TOL else None

    def _circle(self, point: Point) -> float | None:
        for radius, measured in self.circles.items():
            if abs(abs(point) - radius) < WELD_TOL:
                return measured
        return None

    def _swept(self, start: Point, end: Point) -> float:
        """Change of sweep of the contour's edge from one point to the other; 0 without one."""
        back = cmath.exp(-1j * _periods(start, self.whole) * self.whole)
        for joint in self.joints:
            if _same(joint.start, start * back) and _same(joint.end, end * back):
                return joint.swept
        return 0.0


def _rib(
    rib: Rib, section: CrossSection, ideal: Ideal, ribs: Sequence[MeasuredRib], group: int
) -> Rib:
    """The rib as measured in the group's pole of the same kind."""
    pole = pole_of(rib.name) - 1
    wanted = group * ideal.period + pole % ideal.period + 1
    name = base_name(rib.name)
    for one in ribs:
        if one.pole == wanted and base_name(one.name) == name:
            turn = cmath.exp(1j * (pole + 1 - wanted) * section.pole_angle)
            return replace(rib, start=one.start * turn, end=one.end * turn)
    raise ValueError(f"rib {rib.name} was not measured")


def _raise_if_jammed(section: CrossSection) -> None:
    walls = [e for iron in rotor_iron(section) for hole in iron.holes for e in hole.edges]
    for region in section.rotor:
        if region.material == "magnet":
            gap = distance(region.outer.edges, walls, enough=1e-3)
            if gap < CLEAR:
                raise OutlineError(
                    f"{region.name} has no room in its cavity as measured; accepted a cavity"
                    " that holds the magnet of the design"
                )
