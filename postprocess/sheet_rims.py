"""Bore with its keyways, rim with its notches, and holes: measured on the contours, in m."""

import cmath
import math
from collections.abc import Sequence
from dataclasses import dataclass

from lamwright.geometry.contours import Contour
from lamwright.geometry.curves import Edge, Path, turned_edge

from .sheet_clip import heights_at, runs
from .sheet_ink import edge_extremes
from .sheet_measures import PoleMeasure

ON_CIRCLE = 1e-7  # m, of an arc about the axis
SAME = 1e-6  # m, sizes that differ less are one
MOSTLY = 0.5  # of the rim lies on the circumscribed circle where the rim is round


@dataclass(frozen=True, slots=True)
class Groove:
    """A keyway or notch; `angle` of its middle in rad, its edges turned to lie along +x."""

    angle: float
    edges: tuple[Edge, ...]
    mouth: float  # width at the bore or rim
    width: float  # greatest
    depth: float  # on its middle, from the circle
    radii: tuple[float, ...]  # of its arcs, each once

    def is_like(self, other: "Groove") -> bool:
        """Whether all sizes agree."""
        sizes = [(g.mouth, g.width, g.depth, *g.radii) for g in (self, other)]
        return len(sizes[0]) == len(sizes[1]) and all(
            abs(a - b) < SAME for a, b in zip(*sizes, strict=True)
        )


@dataclass(frozen=True, slots=True)
class BoreMeasure:
    """The bore's circle and its keyways."""

    radius: float
    keyways: tuple[Groove, ...]
    opposite: float | None  # from a keyway's bottom to the bore's wall or keyway across


@dataclass(frozen=True, slots=True)
class RimMeasure:
    """The circumscribed circle and what leaves it."""

    radius: float
    is_round: bool
    notches: tuple[Groove, ...]  # all around, where the rim is round
    on_q: float  # radius on the first q axis
    radii: tuple[float, ...]  # of the rim's arcs where it is not round, each once


@dataclass(frozen=True, slots=True)
class HoleGroup:
    """Holes all alike: round, or slots along the circumference."""

    diameter: float
    place: float  # radius of their middles
    span: float  # rad between a slot's end centres, 0 of a round hole
    off_axis: float  # rad from the q axis, magnitude
    count: int
    first: Path  # upright, of the first pole that has one


@dataclass(frozen=True, slots=True)
class NotchGroup:
    """Notches all alike at one angle off their q axes, magnitude in rad."""

    groove: Groove
    off_axis: float
    count: int


def bore_measure(contours: Sequence[Contour]) -> BoreMeasure:
    """Bore and keyways; a lamination has one contour on layer BORE."""
    path = next(c.path for c in contours if c.layer == "BORE")
    radius = min(abs(p) for edge in path.edges for p in (edge.start, edge.end))
    grooves = _grooves(path, radius)
    opposite = None
    if grooves:
        first = grooves[0]
        bottom = radius + first.depth
        across = [g for g in grooves if abs(_apart(g.angle, first.angle) - math.pi) < 1e-6]
        opposite = bottom + (radius + across[0].depth if across else radius)
    return BoreMeasure(radius, grooves, opposite)


def rim_measure(contours: Sequence[Contour], pole_angle: float) -> RimMeasure:
    """The outer contour."""
    path = next(c.path for c in contours if c.layer == "OUTER_CONTOUR")
    radius = max(abs(p) for edge in path.edges for p in edge_extremes(edge))
    radius = max(radius, max(abs(edge.point(0.5)) for edge in path.edges))
    on_circle = sum(edge.length for edge in path.edges if _is_on(edge, radius))
    is_round = on_circle > MOSTLY * 2.0 * math.pi * radius
    way = cmath.rect(1.0, 0.5 * pole_angle)
    on_q = _reach(path, way)
    if is_round:
        return RimMeasure(radius, True, _grooves(path, radius), on_q, ())
    arcs = [edge.radius for edge in path.edges if not edge.is_line]
    return RimMeasure(radius, False, (), on_q, each_once(arcs))


def notch_groups(rim: RimMeasure, pole_angle: float) -> tuple[NotchGroup, ...]:
    """Notches all around, those alike together."""
    found: list[NotchGroup] = []
    for groove in rim.notches:
        off = abs((groove.angle % pole_angle) - 0.5 * pole_angle)
        for k, known in enumerate(found):
            if known.groove.is_like(groove) and abs(known.off_axis - off) * rim.radius < SAME:
                found[k] = NotchGroup(known.groove, known.off_axis, known.count + 1)
                break
        else:
            found.append(NotchGroup(groove, off, 1))
    return tuple(found)


def hole_groups(poles: Sequence[PoleMeasure]) -> tuple[HoleGroup, ...]:
    """Holes of all poles, those alike together."""
    found: list[HoleGroup] = []
    for pole in poles:
        for path in pole.holes:
            one = _hole(path, len(pole.numbers))
            if one is None:
                continue
            for k, known in enumerate(found):
                if _is_alike(known, one):
                    count = known.count + one.count
                    found[k] = HoleGroup(
                        known.diameter, known.place, known.span, known.off_axis, count, known.first
                    )
                    break
            else:
                found.append(one)
    return tuple(found)


def _hole(path: Path, count: int) -> HoleGroup | None:
    """Sizes of a round hole or slot; None of any other outline."""
    arcs = [edge for edge in path.edges if not edge.is_line and abs(edge.centre) > ON_CIRCLE]
    others = [edge for edge in path.edges if edge.is_line or abs(edge.centre) <= ON_CIRCLE]
    if not arcs or any(edge.is_line for edge in others):
        return None
    if max(edge.radius for edge in arcs) - min(edge.radius for edge in arcs) > SAME:
        return None
    centres = [edge.centre for edge in arcs]
    middle = sum(centres) / len(centres)
    if not others and max(abs(c - middle) for c in centres) > SAME:
        return None
    angles = [cmath.phase(c / 1j) for c in centres]
    span = max(angles) - min(angles) if others else 0.0
    off = abs(0.5 * (max(angles) + min(angles)))
    return HoleGroup(2.0 * arcs[0].radius, abs(centres[0]), span, off, count, path)


def _is_alike(one: HoleGroup, other: HoleGroup) -> bool:
    gaps = (one.diameter - other.diameter, one.place - other.place)
    turns = (one.span - other.span, one.off_axis - other.off_axis)
    return all(abs(gap) < SAME for gap in (*gaps, *(turn * one.place for turn in turns)))


def _grooves(path: Path, radius: float) -> tuple[Groove, ...]:
    off = [not _is_on(edge, radius) for edge in path.edges]
    return tuple(_groove(run, radius) for run in runs(path.edges, off)) if any(off) else ()


def _groove(run: Sequence[Edge], radius: float) -> Groove:
    angle = cmath.phase(run[0].start + run[-1].end)
    edges = tuple(turned_edge(edge, -angle) for edge in run)
    points = [p for edge in edges for p in edge_extremes(edge)]
    # On its middle: beside it a wide and shallow one has the circle's own height to it.
    on_middle = heights_at([turned_edge(edge, 0.5 * math.pi) for edge in edges], 0.0)
    far = max(on_middle, key=lambda height: abs(height - radius))
    return Groove(
        angle,
        edges,
        abs(edges[0].start.imag - edges[-1].end.imag),
        max(p.imag for p in points) - min(p.imag for p in points),
        abs(far - radius),
        each_once([edge.radius for edge in edges if not edge.is_line]),
    )


def _is_on(edge: Edge, radius: float) -> bool:
    """Whether an edge is an arc of the circle of `radius` about the axis."""
    ends = (edge.start, edge.end, edge.point(0.5))
    return all(abs(abs(p) - radius) < ON_CIRCLE for p in ends)


def _reach(path: Path, way: complex) -> float:
    """Distance from the axis to an outline in a direction."""
    upright = [turned_edge(edge, cmath.phase(1j / way)) for edge in path.edges]
    return max(heights_at(upright, 0.0))


def each_once(values: Sequence[float]) -> tuple[float, ...]:
    """Rising, those that differ by no more than `SAME` once."""
    kept: list[float] = []
    for value in sorted(values):
        if not kept or value - kept[-1] > SAME:
            kept.append(value)
    return tuple(kept)


def _apart(first: float, second: float) -> float:
    return (first - second) % (2.0 * math.pi)
