"""The contours of a whole lamination as they are sent out: by layer, in order, from fixed starts.

The steel lies to the left of every contour: the outer one runs counter-clockwise, all others
clockwise. What lies inside is cut first and the outer contour last, so that the sheet holds the
part until then. Each contour starts where its longest edge does, of several as long where the most
clockwise one does as seen from the contour's own middle: the same place on every pole, and far from
the thin ribs at the ends of barriers.
"""

import cmath
import math
from collections.abc import Sequence
from typing import Literal, get_args

from .contours import Contour, as_circle, lamination_contours
from .curves import Edge, Path, Point, closed, turned
from .outline_places import place_text
from .section import CrossSection, base_name, rotor_cell

CutLayer = Literal[
    "HOLES", "MAGNET_POCKETS", "BARRIERS", "KEYWAY", "BORE", "SLOTS", "OUTER_CONTOUR"
]
CUT_LAYERS: tuple[CutLayer, ...] = get_args(CutLayer)  # in the order of cutting
WELD_TOL = 1e-9  # m, as of `contours`
ALIKE = 1e-7  # m and rad: edges as long as each other, ends at the same angle


def rotor_lamination(section: CrossSection) -> tuple[Contour, ...]:
    """All contours of the rotor's lamination, all poles.

    Returns:
        Closed contours in m on layers HOLES, MAGNET_POCKETS (barriers that hold a magnet),
        BARRIERS, BORE or, where grooves are cut into it, KEYWAY (the bore with its grooves as one
        contour), OUTER_CONTOUR.
    """
    pockets = _pocket_middles(section)
    found = []
    for contour in lamination_contours(section):
        layer = contour.layer
        if layer == "BARRIERS" and any(_is_near(pockets, e.point(0.5)) for e in contour.path.edges):
            layer = "MAGNET_POCKETS"
        elif layer == "BORE" and len(contour.path.edges) > 2:
            layer = "KEYWAY"
        found.append(Contour(layer, contour.path))
    return in_order(found)


def stator_lamination(section: CrossSection) -> tuple[Contour, ...]:
    """All contours of the stator's lamination, the middle of a tooth at angle 0.

    Returns:
        Closed contours in m on layers SLOTS (the bore with all open slots as one contour, or each
        closed slot), BORE (only where slots are closed), OUTER_CONTOUR.
    """
    (iron,) = (r for r in section.stator if base_name(r.name) == "stator_iron")
    pitch = section.sector_angle
    edges: list[Edge] = []
    holes: list[Path] = []
    for k in range(section.sectors):
        own = [e for e in iron.outer.edges if not _is_side(e, pitch)]
        edges += turned(Path(tuple(own)), k * pitch).edges
        holes += [turned(path, k * pitch) for path in iron.holes]
    loops = sorted(_linked(edges), key=lambda path: -abs(path.edges[0].start))
    if len(loops) != 2:
        raise ValueError(f"a stator sheet of {len(loops)} contours about the axis")
    outer, bore = (as_circle(path) for path in loops)
    inner = Contour("BORE" if len(bore.edges) == 2 else "SLOTS", bore)
    found = [Contour("SLOTS", path) for path in holes]
    return in_order([*found, inner, Contour("OUTER_CONTOUR", outer)])


def in_order(contours: Sequence[Contour]) -> tuple[Contour, ...]:
    """The contours in the order of cutting, counter-clockwise by their middles, started alike."""
    order: list[str] = list(CUT_LAYERS)
    started = [Contour(c.layer, _started(c.path)) for c in contours]

    def place(contour: Contour) -> tuple[int, float, float]:
        middle = _mean(contour.path)
        # To a micrometre and a microradian, so that rounding does not sort.
        angle = round(cmath.phase(middle) % (2.0 * math.pi), 6) % round(2.0 * math.pi, 6)
        rank = order.index(contour.layer) if contour.layer in order else -1
        return rank, round(abs(middle), 6), angle if abs(middle) > 1e-6 else 0.0

    return tuple(sorted(started, key=place))


def _started(path: Path) -> Path:
    edges = path.edges
    longest = max(edge.length for edge in edges)
    middle = _mean(path)
    about = middle if abs(middle) > ALIKE else 1.0 + 0j

    def turn(k: int) -> float:
        angle = cmath.phase(edges[k].start / about)
        # A contour about the axis has no clockwise end: from its first edge after angle 0.
        return angle if about is middle else (angle + ALIKE) % (2.0 * math.pi)

    rivals = [k for k, edge in enumerate(edges) if longest - edge.length < ALIKE]
    first = min(rivals, key=lambda k: (round(turn(k), 6), abs(edges[k].start)))
    return Path((*edges[first:], *edges[:first]))


def _mean(path: Path) -> Point:
    """The middle of the contour's line, which does not depend on where it starts."""
    total = sum(edge.length for edge in path.edges)
    return sum(e.length * 0.5 * (e.start + e.end) for e in path.edges) / total


def _pocket_middles(section: CrossSection) -> list[Point]:
    """Middles of the edges of all barriers that hold a magnet, all poles."""
    cell = rotor_cell(section)
    own = [
        edge.point(0.5)
        for region in cell.rotor
        if region.holes and base_name(region.name).startswith("barrier_")
        for edge in region.outer.edges
    ]
    turns = [cmath.exp(1j * k * cell.sector_angle) for k in range(cell.poles // cell.sector_poles)]
    return [point * turn for turn in turns for point in own]


def _is_near(points: Sequence[Point], point: Point) -> bool:
    return any(abs(point - other) < WELD_TOL for other in points)


def _is_side(edge: Edge, pitch: float) -> bool:
    """Whether a line of the sector's outline is one of its radial sides."""
    if not edge.is_line:
        return False
    ends = [cmath.phase(p) % (2.0 * math.pi) for p in (edge.start, edge.end)]
    sides = (0.0, pitch % (2.0 * math.pi))
    return any(all(_turn_apart(end, side) < WELD_TOL for end in ends) for side in sides)


def _turn_apart(a: float, b: float) -> float:
    return abs((a - b + math.pi) % (2.0 * math.pi) - math.pi)


def _linked(edges: Sequence[Edge]) -> list[Path]:
    """Directed edges as closed paths, arcs of one circle that follow each other made one."""
    left = list(edges)
    loops = []
    while left:
        run = [left.pop()]
        while abs(run[-1].end - run[0].start) > WELD_TOL:
            near = min(left, key=lambda edge: abs(edge.start - run[-1].end))
            if abs(near.start - run[-1].end) > WELD_TOL:
                raise ValueError(f"outline of stator iron open at {place_text(run[-1].end)}")
            left.remove(near)
            run.append(near)
        loops.append(closed(_whole_arcs(run)))
    return loops


def _whole_arcs(run: Sequence[Edge]) -> list[Edge]:
    first = next((k for k in range(len(run)) if not _go_on(run[k - 1], run[k])), None)
    if first is None:
        return list(run)  # a circle
    merged: list[Edge] = []
    for edge in (*run[first:], *run[:first]):
        if merged and _go_on(merged[-1], edge):
            sweep = merged[-1].sweep + edge.sweep
            merged[-1] = Edge(merged[-1].start, edge.end, math.tan(sweep / 4.0))
        else:
            merged.append(edge)
    return merged


def _go_on(first: Edge, second: Edge) -> bool:
    """Whether two arcs that follow each other are one about the shaft axis."""
    return not (first.is_line or second.is_line) and all(
        abs(edge.centre) < WELD_TOL and first.bulge * edge.bulge > 0.0 for edge in (first, second)
    )
