"""Rotor laminations as suppliers and inspections send them, made by a general DXF library.

Each form draws the same outline (contours of exact lines and arcs, m) in another way, in mm.
"""

import cmath
import math
from collections.abc import Callable, Sequence
from pathlib import Path as FilePath

import ezdxf
import numpy as np
from draughting import INCH, add_edge, add_loop, mirrored, moved, new_drawing, scaled
from ezdxf.document import Drawing
from scipy.interpolate import make_interp_spline

from lamwright.geometry.contours import lamination_contours
from lamwright.geometry.curves import Edge, Path, piece
from lamwright.geometry.section import CrossSection, rotor_iron


def contours_mm(section: CrossSection) -> list[list[Edge]]:
    """Edges in mm of each contour."""
    return [[scaled(e) for e in c.path.edges] for c in lamination_contours(section)]


def edges_mm(section: CrossSection) -> list[Edge]:
    """All edges in mm."""
    return [edge for contour in contours_mm(section) for edge in contour]


def drawing_of(edges: Sequence[Edge], unit: int = 4, version: str = "R2010") -> Drawing:
    """Lines and arcs, each by itself."""
    drawing = new_drawing(unit, version)
    for edge in edges:
        add_edge(drawing.modelspace(), edge)
    return drawing


def loose(section: CrossSection) -> Drawing:
    """Lines and arcs in mixed order and direction; R12 without a unit."""
    edges = edges_mm(section)
    mixed = [edges[k] for k in np.random.default_rng(3).permutation(len(edges)).tolist()]
    return drawing_of(
        [Edge(e.end, e.start, -e.bulge) if k % 2 else e for k, e in enumerate(mixed)], 0, "R12"
    )


def polylines(section: CrossSection) -> Drawing:
    """A closed polyline with bulges for each contour."""
    drawing = new_drawing()
    for contour in contours_mm(section):
        add_loop(drawing.modelspace(), contour, close=True)
    return drawing


def blocks(section: CrossSection) -> Drawing:
    """All in a block, mirrored twice by scales, in a block, inserted turned."""
    drawing = new_drawing()
    inner, outer = drawing.blocks.new("sheet"), drawing.blocks.new("turned")
    for edge in edges_mm(section):
        add_edge(inner, mirrored(edge))
    outer.add_blockref("sheet", (0, 0), {"yscale": -1.0, "rotation": 11.0})
    drawing.modelspace().add_blockref("turned", (30.0, -4.0), {"rotation": 5.0})
    return drawing


def splines(section: CrossSection) -> Drawing:
    """Every arc as a cubic spline through nine of its points."""
    drawing = new_drawing()
    model = drawing.modelspace()
    for edge in edges_mm(section):
        if edge.is_line:
            add_edge(model, edge)
            continue
        parts = 1 if abs(edge.sweep) < 2.0 else 4
        for k in range(parts):
            low, high = k / parts, (k + 1) / parts
            points = [_xy(edge.point(low + (high - low) * s / 8)) for s in range(9)]
            ends = [_xy(edge.length / parts * edge.direction(t)) for t in (low, high)]
            spline = ezdxf.math.global_bspline_interpolation(points, degree=3, tangents=ends)
            model.add_spline().apply_construction_tool(spline)
    return drawing


def inches(section: CrossSection) -> Drawing:
    """Inches, as the file says."""
    return drawing_of([moved(e, 1.0 / INCH) for e in edges_mm(section)], 1)


def rotated(section: CrossSection) -> Drawing:
    """Turned by 17.3 degrees and moved far off the origin."""
    turn = cmath.exp(1j * math.radians(17.3))
    return drawing_of([moved(e, turn, 412.5 - 133.25j) for e in edges_mm(section)])


def mirrored_plane(section: CrossSection) -> Drawing:
    """Arcs on the mirrored plane (extrusion 0, 0, -1), as a mirror command leaves them."""
    drawing = new_drawing()
    for edge in edges_mm(section):
        if edge.is_line:
            add_edge(drawing.modelspace(), edge)
        else:  # x -> -x of the image is the edge itself
            image = moved(mirrored(edge), -1.0)
            add_edge(drawing.modelspace(), image, extrusion=(0, 0, -1))
    return drawing


def gaps(section: CrossSection) -> Drawing:
    """Ends up to 5 um apart: every edge shifted by up to 2.5 um, at random."""
    rng = np.random.default_rng(11)
    shifts = 0.0025 * rng.uniform(size=4000) * np.exp(2j * math.pi * rng.uniform(size=4000))
    edges = edges_mm(section)
    return drawing_of([moved(e, 1.0, complex(s)) for e, s in zip(edges, shifts, strict=False)])


def duplicates(section: CrossSection) -> Drawing:
    """A third of it drawn twice, notes, a centre line, a frozen frame."""
    edges = edges_mm(section)
    drawing = drawing_of([*edges, *edges[::3]])
    drawing.layers.add("frame").freeze()
    drawing.linetypes.add("CENTER", [1.0, 0.8, -0.1, 0.1, -0.1])
    model = drawing.modelspace()
    model.add_line((-90.0, 0.0), (90.0, 0.0), dxfattribs={"linetype": "CENTER"})
    model.add_line((-200.0, -200.0), (200.0, -200.0), dxfattribs={"layer": "frame"})
    model.add_text("rotor sheet, drawn twice", height=3.0)
    return drawing


def one_pole(section: CrossSection) -> Drawing:
    """One pole from d axis to d axis, its sides drawn, elsewhere and turned."""
    iron = rotor_iron(section)[0]
    edges = [scaled(e) for path in (iron.outer, *iron.holes) for e in path.edges]
    turn = cmath.exp(0.4j)
    return drawing_of([moved(e, turn, 20.0 + 5.0j) for e in edges])


FORMS: dict[str, Callable[[CrossSection], Drawing]] = {
    form.__name__: form
    for form in (
        loose,
        polylines,
        blocks,
        splines,
        inches,
        rotated,
        mirrored_plane,
        gaps,
        duplicates,
        one_pole,
    )
}


def with_relief(edges: Sequence[Edge], number: int, radius: float) -> list[Edge]:
    """The closed chain with a half-round notch into the steel in the middle of one edge."""
    edge = edges[number]
    share = radius / edge.length
    a, b = edge.point(0.5 - share), edge.point(0.5 + share)
    notched = [piece(edge, edge.start, a), Edge(a, b, -1.0), piece(edge, b, edge.end)]
    return [*edges[:number], *notched, *edges[number + 1 :]]


def with_chamfer(edges: Sequence[Edge], number: int) -> list[Edge]:
    """The closed chain with a straight line in place of one edge."""
    edge = edges[number]
    return [*edges[:number], Edge(edge.start, edge.end), *edges[number + 1 :]]


def traced(path: Path, count: int) -> np.ndarray:
    """Points (count,) in m evenly spaced along a closed path, none of them at a joint."""
    lengths = np.array([edge.length for edge in path.edges])
    stops = np.concatenate([[0.0], np.cumsum(lengths)])
    at = (np.arange(count) + 0.5) / count * stops[-1]
    number = np.searchsorted(stops, at, side="right") - 1
    return np.array(
        [
            path.edges[k].point((s - stops[k]) / lengths[k])
            for k, s in zip(number.tolist(), at.tolist(), strict=True)
        ]
    )


def write_traced(
    section: CrossSection,
    path: FilePath,
    kind: str,
    count: int = 2000,
    noise_um: float = 10.0,
    turn_deg: float = 8.0,
    seed: int = 1,
    change: Callable[[int, np.ndarray], np.ndarray] | None = None,
) -> None:
    """Each contour as a closed polyline or a spline through `count` points with noise.

    The noise is even between -`noise_um` and `noise_um`, along x and along y.
    """
    rng = np.random.default_rng(seed)
    drawing = new_drawing()
    model = drawing.modelspace()
    way = cmath.exp(1j * math.radians(turn_deg))
    for number, contour in enumerate(lamination_contours(section)):
        points = traced(contour.path, count)
        if change is not None:
            points = change(number, points)
        scatter = rng.uniform(-1, 1, count) + 1j * rng.uniform(-1, 1, count)
        points = 1e3 * (points * way + 1e-6 * noise_um * scatter) + (25.0 - 10.0j)
        if kind == "polyline":
            model.add_lwpolyline([_xy(p) for p in points.tolist()], "xy", close=True)
            continue
        loop = np.append(points, points[0])
        curve = make_interp_spline(np.arange(loop.size), np.column_stack([loop.real, loop.imag]))
        spline = ezdxf.math.BSpline(
            [(x, y, 0.0) for x, y in curve.c.tolist()], order=4, knots=curve.t.tolist()
        )
        model.add_spline().apply_construction_tool(spline)
    drawing.saveas(path)


def _xy(point: complex) -> tuple[float, float]:
    return point.real, point.imag
