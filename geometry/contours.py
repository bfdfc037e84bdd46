"""Closed contours of the whole rotor lamination, from the poles of the rotor's own period.

Idea: the edges of one pole's rotor iron that lie on the pole's sides are not cut. Without them
its outline falls apart into chains that run from side to side, and closed holes. Copies of all
poles are joined, each chain's end to the start that lies there on the neighbouring pole. A contour
made of arcs about the shaft axis that close on themselves becomes a full circle of two halves.
A contour that bounds a region called hole is one, any other that is neither rim nor bore a barrier.
The sheet lies to the left of every contour: the outer one runs counter-clockwise, holes clockwise.
"""

import cmath
import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from typing import Literal, get_args

from .curves import Edge, Path, Point, area, circle, reversed_path, turned
from .section import CrossSection, base_name, pole_of, rotor_cell, rotor_iron

WELD_TOL = 1e-9  # m, ends closer than this are one point; far below a punch's 1e-5 m
SIDE_TOL = 1e-9  # rad, of a point's angle to a sector's side; turning errs by 1e-16

Layer = Literal["OUTER_CONTOUR", "BORE", "BARRIERS", "HOLES"]
LAYERS: tuple[Layer, ...] = get_args(Layer)  # in the order of the file


@dataclass(frozen=True, slots=True)
class Contour:
    """A closed contour to be cut, in m, and the layer it is drawn on."""

    layer: str
    path: Path


@dataclass(frozen=True, slots=True)
class _Chain:
    """Edges from one of the pole's sides (0 or 1) to one of them, with no edge on a side."""

    edges: tuple[Edge, ...]
    start_side: int
    end_side: int


def lamination_contours(section: CrossSection) -> tuple[Contour, ...]:
    """All contours of the lamination, all poles: outer, bore, barriers pole by pole, then holes.

    Args:
        section: a sector in SI units.

    Returns:
        Closed contours in m, layers OUTER_CONTOUR, BORE, BARRIERS and HOLES.
    """
    pitch, cell = section.pole_angle, rotor_cell(section)
    holes = [_hole_middles(cell, k) for k in range(cell.sector_poles)]
    # Each pole of the period in its own frame.
    period = [
        _chains(
            [turned(path, -k * pitch) if k else path for path in (iron.outer, *iron.holes)], pitch
        )
        for k, iron in enumerate(rotor_iron(cell))
    ]
    loops = [
        (pole, as_circle(loop))
        for pole, loop in _joined([c for c, _ in period], section.poles, pitch)
    ]
    for pole in range(section.poles):
        loops += [(pole, turned(path, pole * pitch)) for path in period[pole % len(period)][1]]
    contours = []
    for pole, loop in loops:
        middle = loop.edges[0].point(0.5) * cmath.exp(-1j * pole * pitch)
        is_hole = any(abs(middle - one) < WELD_TOL for one in holes[pole % len(period)])
        contours.append(Contour("HOLES" if is_hole else _layer(loop), loop))
    order: list[str] = list(LAYERS)
    return tuple(sorted(contours, key=lambda contour: order.index(contour.layer)))


def compare_contours(a: Sequence[Contour], b: Sequence[Contour]) -> float:
    """Largest distance in m between matching vertices or arc middles of two sets of contours.

    Contours are matched by layer and by the mean of their vertices; where a contour starts and
    which way it runs makes no difference. Infinite where the sets do not match one to one.
    """
    left = list(b)
    worst = 0.0
    for contour in a:
        rivals = [other for other in left if _is_alike(contour, other)]
        if not rivals:
            return math.inf
        mean = _mean(contour.path)
        match = min(rivals, key=lambda other: abs(_mean(other.path) - mean))
        left.remove(match)
        worst = max(worst, _deviation(contour.path, match.path))
    return math.inf if left else worst


def _hole_middles(cell: CrossSection, pole: int) -> list[Point]:
    """Middles of all edges of holes in pole number `pole`, from 0, in that pole's own frame."""
    turn = cmath.exp(-1j * pole * cell.pole_angle)
    return [
        edge.point(0.5) * turn
        for region in cell.rotor
        if pole_of(region.name) == pole + 1 and base_name(region.name).startswith("hole_")
        for edge in region.outer.edges
    ]


def _side_of(point: Point, pitch: float) -> int | None:
    angle = cmath.phase(point)
    if abs(angle) < SIDE_TOL:
        return 0
    # For one pole pair the far side is the negative x axis, where the phase may be -pi.
    return 1 if abs(abs(angle) - pitch) < SIDE_TOL else None


def _chains(paths: Iterable[Path], pitch: float) -> tuple[list[_Chain], list[Path]]:
    """Chains between the sides, and paths that touch no side, of the iron of one pole."""
    chains: list[_Chain] = []
    closed: list[Path] = []
    for path in paths:
        edges = path.edges
        on_side = [_lies_on_side(edge, pitch) for edge in edges]
        if not any(on_side):
            closed.append(path)
            continue
        first = on_side.index(True)
        run: list[Edge] = []
        for k in range(1, len(edges) + 1):
            index = (first + k) % len(edges)
            if not on_side[index]:
                run.append(edges[index])
            elif run:
                chains.append(_chain(run, pitch))
                run = []
    return chains, closed


def _lies_on_side(edge: Edge, pitch: float) -> bool:
    side = _side_of(edge.start, pitch)
    return edge.is_line and side is not None and side == _side_of(edge.end, pitch)


def _chain(run: Iterable[Edge], pitch: float) -> _Chain:
    edges = tuple(run)
    start, end = _side_of(edges[0].start, pitch), _side_of(edges[-1].end, pitch)
    if start is None or end is None:
        raise ValueError("an outline of rotor iron ends inside the sector")
    return _Chain(edges, start, end)


def _joined(period: Sequence[Sequence[_Chain]], poles: int, pitch: float) -> list[tuple[int, Path]]:
    """Closed paths over all poles of the chains of each pole of the period.

    Returns:
        Each path with the pole that its first edge lies in.
    """
    todo = [(k, pole) for pole in range(poles) for k in range(len(period[pole % len(period)]))]
    loops = []
    while todo:
        first = current = todo[0]
        edges: list[Edge] = []
        while True:
            todo.remove(current)
            k, pole = current
            chain = period[pole % len(period)][k]
            edges += turned(Path(chain.edges), pole * pitch).edges
            # Over side 1 into the next pole's side 0, over side 0 into the last one's side 1.
            onward = (pole + (1 if chain.end_side == 1 else -1)) % poles
            current = (_next_chain(period[onward % len(period)], chain), onward)
            if current == first:
                break
        loops.append((first[1], _closed(edges)))
    return loops


def _next_chain(chains: Sequence[_Chain], chain: _Chain) -> int:
    radius = abs(chain.edges[-1].end)
    for k, other in enumerate(chains):
        if other.start_side != chain.end_side and (
            abs(abs(other.edges[0].start) - radius) < WELD_TOL
        ):
            return k
    raise ValueError(f"outline of rotor iron open at radius {radius} m")


def _closed(edges: Sequence[Edge]) -> Path:
    # Neighbouring poles' ends differ by rounding: each edge ends where the next one starts.
    starts = [edge.start for edge in (*edges[1:], edges[0])]
    return Path(tuple(Edge(e.start, s, e.bulge) for e, s in zip(edges, starts, strict=True)))


def as_circle(path: Path) -> Path:
    """The full circle about the shaft axis that the path is, or the path itself."""
    radius = abs(path.edges[0].start)
    for edge in path.edges:
        if edge.is_line or max(abs(edge.centre), abs(abs(edge.start) - radius)) > WELD_TOL:
            return path
    whole = circle(0j, radius)
    return whole if path.edges[0].bulge > 0.0 else reversed_path(whole)


def _layer(path: Path) -> Layer:
    if area(path) > 0.0:
        return "OUTER_CONTOUR"
    # A hole that winds round the shaft axis: the turns of its edges add up to a full one.
    winding = sum(_turn_about_axis(edge) for edge in path.edges)
    return "BORE" if abs(winding) > math.pi else "BARRIERS"


def _turn_about_axis(edge: Edge) -> float:
    # Halves keep each turn below pi, so the phase is not ambiguous.
    middle = edge.point(0.5)
    return cmath.phase(middle / edge.start) + cmath.phase(edge.end / middle)


def _is_alike(a: Contour, b: Contour) -> bool:
    return a.layer == b.layer and len(a.path.edges) == len(b.path.edges)


def _mean(path: Path) -> Point:
    return sum(edge.start for edge in path.edges) / len(path.edges)


def _deviation(a: Path, b: Path) -> float:
    """Largest distance of vertices and middles over the best start and direction of `b`."""
    points = _points(a)
    count = len(points)
    best = math.inf
    for candidate in (_points(b), _points(reversed_path(b))):
        # Vertices and middles alternate, so starts are two apart.
        for shift in range(0, count, 2):
            gaps = (abs(points[k] - candidate[(k + shift) % count]) for k in range(count))
            best = min(best, max(gaps))
    return best


def _points(path: Path) -> list[Point]:
    return [point for edge in path.edges for point in (edge.start, edge.point(0.5))]
