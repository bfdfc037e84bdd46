"""The designed outline of a whole lamination in the form that a measured one is held against."""

import cmath
import math
from collections.abc import Sequence
from dataclasses import dataclass

from .contours import Contour, lamination_contours
from .curves import Edge, Path, Point, arc
from .section import CrossSection, Rib, rotor_cell

LEAST_ARCS = 8  # of a circle: one that has become oval is told by them
WELD_TOL = 1e-8  # m, joints of like poles after turning


@dataclass(frozen=True, slots=True)
class Ideal:
    """Contours of all poles, rim and bore cut at the d axes, and all ribs, in the rotor's frame."""

    contours: tuple[Contour, ...]
    ribs: tuple[tuple[int, Rib], ...]  # number of the pole, from 1, and the rib in its place
    poles: int
    period: int  # poles after which the rotor repeats
    rim: float  # m
    bore: float  # m, radius

    @property
    def pitch(self) -> float:
        """Angle of one pole in rad."""
        return 2.0 * math.pi / self.poles

    @property
    def edges(self) -> tuple[Edge, ...]:
        """All edges, contour by contour, the steel to their left."""
        return tuple(edge for contour in self.contours for edge in contour.path.edges)

    @property
    def owners(self) -> tuple[int, ...]:
        """Number of the contour of each edge."""
        return tuple(k for k, c in enumerate(self.contours) for _ in c.path.edges)

    def pole_of(self, point: Point) -> int:
        """Number, from 0, of the pole that a point lies in."""
        return int((cmath.phase(point) % (2.0 * math.pi)) / self.pitch + 1e-9) % self.poles

    def place(self, point: Point) -> str:
        """Where a point is, in words: pole, radius and angle from the pole's q axis."""
        pole = self.pole_of(point)
        middle = cmath.exp(-1j * (pole + 0.5) * self.pitch)
        angle = math.degrees(cmath.phase(point * middle))
        return f"pole {pole + 1}, radius {1e3 * abs(point):.3f} mm, {angle:+.2f} deg of its q axis"


def ideal_outline(section: CrossSection) -> Ideal:
    """What the design says of the whole lamination."""
    contours = tuple(
        Contour(c.layer, _cut(c.path, section.poles)) for c in lamination_contours(section)
    )
    cell = rotor_cell(section)
    ribs = []
    for turn in range(0, section.poles, section.rotor_period):
        way = cmath.exp(1j * turn * section.pole_angle)
        for rib in cell.ribs:
            start, end = rib.start * way, rib.end * way
            pole = int((cmath.phase(start) % (2.0 * math.pi)) / section.pole_angle) + 1
            ribs.append((pole, Rib(rib.name, rib.kind, rib.barrier, start, end)))
    return Ideal(
        contours,
        tuple(sorted(ribs, key=lambda rib: rib[0])),
        section.poles,
        section.rotor_period,
        section.rotor_radius,
        section.shaft_radius,
    )


def is_circle(edges: Sequence[Edge]) -> bool:
    """Whether the edges are arcs about the shaft axis alone."""
    radius = abs(edges[0].start)
    return all(
        not e.is_line and abs(e.centre) < WELD_TOL and abs(abs(e.start) - radius) < WELD_TOL
        for e in edges
    )


def _cut(path: Path, poles: int) -> Path:
    """A circle about the axis as arcs that meet on the d axes; any other path as it is."""
    if not is_circle(path.edges):
        return path
    radius, is_ccw = abs(path.edges[0].start), path.edges[0].bulge > 0.0
    count = poles * math.ceil(LEAST_ARCS / poles)
    sign = 1.0 if is_ccw else -1.0
    joints = [radius * cmath.exp(sign * 2j * math.pi * k / count) for k in range(count)]
    ends = [*joints[1:], joints[0]]
    return Path(tuple(arc(a, b, 0j, ccw=is_ccw) for a, b in zip(joints, ends, strict=True)))
