"""Single DXF entities as lines and arcs; the only reader of their group codes.

Arcs, circles and polylines with bulges stay exact; ellipses and splines are fitted by arcs
(`spline_arcs`). Coordinates are drawing units; an entity drawn on the mirrored plane (extrusion
0, 0, -1) is mirrored back. Inserted blocks are opened, nested ones too.
"""

import cmath
import math
from collections.abc import Iterable, Iterator
from itertools import count, pairwise
from typing import TYPE_CHECKING, cast

import numpy as np

from .curves import Edge, Point
from .spline_arcs import fitted_arcs, straightened

if TYPE_CHECKING:
    from ezdxf.entities import (
        Arc,
        Circle,
        DXFEntity,
        DXFGraphic,
        Ellipse,
        Insert,
        Line,
        LWPolyline,
        Polyline,
        Spline,
    )
    from ezdxf.math import BSpline

MOST_NESTED = 8  # blocks within blocks
MOST_INSERTED = 15_000  # entities and blocks out of blocks: 0.2 ms each
MOST_ENTITIES = 50_000  # after the blocks are opened: bounds the time
FARTHEST = 1e4  # m: beyond, a double tells no micrometre
TRACED = 100  # control points of a spline: more are a traced curve's
TILT_TOL = 1e-9  # of the extrusion's unit vector
# Carry no outline: notes, measures, fillings, views.
NOT_OUTLINE = frozenset(
    (
        *("TEXT", "MTEXT", "DIMENSION", "ARC_DIMENSION", "LEADER", "MULTILEADER", "MLEADER"),
        *("HATCH", "MPOLYGON", "POINT", "ATTDEF", "ATTRIB", "VIEWPORT", "IMAGE", "WIPEOUT"),
        *("ACAD_TABLE", "TOLERANCE", "XLINE", "RAY", "SHAPE", "OLE2FRAME", "OLEFRAME"),
    )
)


class EntityError(ValueError):
    """An entity that cannot be read; `point` in drawing units where there is one."""

    def __init__(self, text: str, point: Point | None = None) -> None:
        """Keep the place beside the text."""
        super().__init__(text)
        self.point = point


def opened(entities: "Iterable[DXFEntity]") -> "Iterator[DXFGraphic]":
    """The entities with every inserted block replaced by its content, placed.

    Raises:
        EntityError: blocks nested too deeply, or too much in them: a few lines of a file can ask
            for any number, and for any number of empty blocks.
    """
    return _opened(entities, 0, count(1))


def _opened(
    entities: "Iterable[DXFEntity]", depth: int, counter: Iterator[int]
) -> "Iterator[DXFGraphic]":
    for entity in entities:
        if depth and next(counter) > MOST_INSERTED:
            raise EntityError(f"more than {MOST_INSERTED} entities in inserted blocks")
        if entity.dxftype() != "INSERT":
            yield cast("DXFGraphic", entity)
            continue
        insert = cast("Insert", entity)
        if depth == MOST_NESTED:
            at = complex(insert.dxf.insert.x, insert.dxf.insert.y)
            raise EntityError(f"blocks nested more than {MOST_NESTED} deep", at)
        many = insert.multi_insert() if insert.mcount > 1 else (insert,)
        for one in many:
            if next(counter) > MOST_INSERTED:
                raise EntityError(f"more than {MOST_INSERTED} blocks inserted")
            yield from _opened(one.virtual_entities(), depth + 1, counter)


def edges_of(entity: "DXFGraphic", unit: float) -> list[Edge] | None:
    """The entity's edges in m; None for a kind that carries no outline.

    Args:
        entity: any entity but an insert.
        unit: m per drawing unit.

    Raises:
        EntityError: for a kind that may carry outline and cannot be read, for numbers that are
            not finite, or an entity out of the drawing's plane.
    """
    kind = entity.dxftype()
    if kind in NOT_OUTLINE:
        return None
    reader = _READERS.get(kind)
    if reader is None:
        raise EntityError(f"{kind} cannot be read, explode it into lines, arcs and polylines")
    edges = reader(entity, unit)
    for edge in edges:
        _raise_if_no_place(kind, edge)
    return [straightened(half) for edge in edges for half in halves(edge)]


def _raise_if_no_place(kind: str, edge: Edge) -> None:
    if not (cmath.isfinite(edge.start) and cmath.isfinite(edge.end) and math.isfinite(edge.bulge)):
        raise EntityError(f"{kind} with a coordinate that is no number")
    if max(abs(p) for e in (edge.start, edge.end) for p in (e.real, e.imag)) > FARTHEST:
        raise EntityError(f"{kind} more than {FARTHEST / 1e3:g} km from the drawing's origin")


def halves(edge: Edge) -> list[Edge]:
    """The edge, in two where it is more than half a circle."""
    if abs(edge.bulge) <= 1.0 + 1e-12:
        return [edge]
    middle, bulge = edge.point(0.5), math.tan(edge.sweep / 8.0)
    return [Edge(edge.start, middle, bulge), Edge(middle, edge.end, bulge)]


def _mirror(entity: "DXFGraphic") -> float:
    """1, or -1 for an entity on the mirrored plane."""
    x, y, z = entity.dxf.get("extrusion", (0.0, 0.0, 1.0))
    if max(abs(x), abs(y)) > TILT_TOL:
        raise EntityError(f"{entity.dxftype()} tilted out of the drawing's plane")
    return -1.0 if z < 0.0 else 1.0


def _line(entity: "DXFGraphic", unit: float) -> list[Edge]:
    dxf = cast("Line", entity).dxf
    return [Edge(unit * complex(dxf.start.x, dxf.start.y), unit * complex(dxf.end.x, dxf.end.y))]


def _arc(entity: "DXFGraphic", unit: float) -> list[Edge]:
    dxf, side = cast("Arc", entity).dxf, _mirror(entity)
    centre: Point = unit * complex(side * dxf.center.x, dxf.center.y)
    radius = unit * abs(float(dxf.radius))
    low, high = math.radians(dxf.start_angle), math.radians(dxf.end_angle)
    sweep = (high - low) % (2.0 * math.pi) or 2.0 * math.pi

    def at(angle: float) -> Point:
        return centre + radius * complex(side * math.cos(angle), math.sin(angle))

    if sweep > math.pi * (1.0 + 1e-12):
        bulge = side * math.tan(sweep / 8.0)
        middle = at(low + 0.5 * sweep)
        # A full circle's end is its start to the last bit.
        end = at(low) if sweep == 2.0 * math.pi else at(low + sweep)
        return [Edge(at(low), middle, bulge), Edge(middle, end, bulge)]
    return [Edge(at(low), at(low + sweep), side * math.tan(sweep / 4.0))]


def _circle(entity: "DXFGraphic", unit: float) -> list[Edge]:
    dxf, side = cast("Circle", entity).dxf, _mirror(entity)
    centre = unit * complex(side * dxf.center.x, dxf.center.y)
    radius = unit * abs(float(dxf.radius))
    return [
        Edge(centre + radius, centre - radius, 1.0),
        Edge(centre - radius, centre + radius, 1.0),
    ]


def _lwpolyline(entity: "DXFGraphic", unit: float) -> list[Edge]:
    polyline, side = cast("LWPolyline", entity), _mirror(entity)
    vertices = [
        (unit * complex(side * x, y), side * float(b)) for x, y, b in polyline.get_points("xyb")
    ]
    return _chain(vertices, polyline.closed)


def _polyline(entity: "DXFGraphic", unit: float) -> list[Edge]:
    polyline = cast("Polyline", entity)
    if polyline.get_mode() not in ("AcDb2dPolyline", "AcDb3dPolyline"):
        raise EntityError("POLYLINE that is a mesh, no outline")
    side = _mirror(entity) if polyline.is_2d_polyline else 1.0
    vertices = []
    for vertex in polyline.vertices:
        if vertex.dxf.flags & 16:  # control point of a smoothed polyline: not on the curve
            continue
        at = vertex.dxf.location
        bulge = side * float(vertex.dxf.get("bulge", 0.0))
        vertices.append((unit * complex(side * at.x, at.y), bulge))
    return _chain(vertices, polyline.is_closed)


def _chain(vertices: list[tuple[Point, float]], is_closed: bool) -> list[Edge]:
    ends = vertices[1:] + (vertices[:1] if is_closed else [])
    return [
        Edge(start, end, bulge)
        for (start, bulge), (end, _) in zip(vertices, ends, strict=False)
        if start != end
    ]


def _ellipse(entity: "DXFGraphic", unit: float) -> list[Edge]:
    ellipse = cast("Ellipse", entity)
    dxf, side = ellipse.dxf, _mirror(entity)
    centre = unit * complex(dxf.center.x, dxf.center.y)
    major = unit * complex(dxf.major_axis.x, dxf.major_axis.y)
    minor = 1j * side * float(dxf.ratio) * major
    if not (cmath.isfinite(centre) and cmath.isfinite(major) and cmath.isfinite(minor)):
        raise EntityError("ELLIPSE with a coordinate that is no number")
    if minor == 0.0 or major == 0.0:
        raise EntityError("ELLIPSE without a width")
    low = float(dxf.start_param)
    sweep = (float(dxf.end_param) - low) % (2.0 * math.pi) or 2.0 * math.pi

    def curve(t: float) -> tuple[Point, complex]:
        tangent = minor * math.cos(t) - major * math.sin(t)
        return centre + major * math.cos(t) + minor * math.sin(t), tangent / abs(tangent)

    return fitted_arcs(curve, [low, low + 0.5 * sweep, low + sweep])


def _spline(entity: "DXFGraphic", unit: float) -> list[Edge]:
    through = cast("Spline", entity).fit_points
    if not cast("Spline", entity).control_points and len(through) > TRACED:
        # The library would solve for a curve through all of them.
        spots = [unit * complex(p[0], p[1]) for p in through]
        return [Edge(a, b) for a, b in pairwise(spots) if a != b]
    spline = cast("Spline", entity).construction_tool()
    if spline.count > TRACED:
        return _traced(spline, unit)
    knots = [float(k) for k in spline.knots()]
    # Halving would go on to its end where nothing can be compared.
    places = [v for point in spline.control_points for v in (point.x, point.y)]
    if not all(math.isfinite(v) for v in (*knots, *places)):
        raise EntityError("SPLINE with a coordinate that is no number")
    degree = spline.order - 1
    low, high = knots[degree], knots[-degree - 1]
    # A knot as manifold as the degree lets the curve have a corner there.
    corners = {k for k in knots if low < k < high and knots.count(k) >= degree}

    def curve(t: float) -> tuple[Point, complex]:
        t = min(max(t, low), high)
        point, slope = spline.derivative(t, 1)
        tangent = complex(slope.x, slope.y)
        if tangent == 0.0:
            raise EntityError("SPLINE without direction", complex(point.x, point.y))
        return unit * complex(point.x, point.y), tangent / abs(tangent)

    return fitted_arcs(curve, [low, *sorted(corners), high])


def _traced(spline: "BSpline", unit: float) -> list[Edge]:
    """Chords of a curve through very many points, as a scanner or a tracing program makes it.

    What its points scatter by would take arcs without number; two chords a span keep them all.
    """
    # Imported here: it takes 0.2 s, and few drawings need it.
    from scipy.interpolate import BSpline as BSplineCurve

    degree = spline.order - 1
    knots = np.array(spline.knots())
    control = np.array([complex(p.x, p.y) for p in spline.control_points])
    weights = np.array(spline.weights() or np.ones(control.size))
    spans = np.unique(knots[degree : knots.size - degree])
    at = np.union1d(spans, 0.5 * (spans[1:] + spans[:-1]))
    curve = BSplineCurve(knots, np.column_stack([control * weights, weights]), degree)
    placed, divisor = curve(at).T
    points = [complex(p) for p in unit * placed / divisor]
    return [Edge(a, b) for a, b in pairwise(points) if a != b]


_READERS = {
    "LINE": _line,
    "ARC": _arc,
    "CIRCLE": _circle,
    "LWPOLYLINE": _lwpolyline,
    "POLYLINE": _polyline,
    "ELLIPSE": _ellipse,
    "SPLINE": _spline,
}
