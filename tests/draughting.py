"""Stator drawings as draughtsmen send them, made by a general DXF library from a design's slot.

The slot is that of the parametric stator; each form draws the same sheet in another way. Numbers
are written in full precision unless a form says otherwise.
"""

import cmath
import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from pathlib import Path

import ezdxf
import numpy as np

from lamwright.geometry.curves import Edge, arc
from lamwright.geometry.design import MachineDesign
from lamwright.geometry.slot_outline import slot_outline
from lamwright.geometry.stator import MM

INCH = 25.4  # mm


@dataclass(frozen=True, slots=True)
class Sheet:
    """The edges of a stator sheet in mm: what stands at each slot, and the outer radius."""

    slots: int
    outer: float
    wall: tuple[Edge, ...]  # of the slot on the x axis, from one corner of the mouth to the other
    tooth: Edge  # bore arc from this slot's mouth to the next one, counter-clockwise
    sides: tuple[Edge, ...]  # lines across the slot: where copper begins, between the layers

    def at(self, slot: int) -> complex:
        """The turn to a slot."""
        return cmath.exp(2j * math.pi * (slot + 0.5) / self.slots)

    def edges(self) -> list[Edge]:
        """All edges but the outer circle."""
        own = [*self.wall, self.tooth, *self.sides]
        return [moved(e, self.at(s)) for s in range(self.slots) for e in own]


def sheet(design: MachineDesign) -> Sheet:
    """The sheet of a design's stator."""
    slot = slot_outline(design)
    flank = [scaled(e) for part in slot.compartments for e in part.flank]
    lower = [Edge(e.end.conjugate(), e.start.conjugate(), e.bulge) for e in reversed(flank)]
    wall = (*flank, scaled(slot.bottom), *lower)
    pitch = cmath.exp(2j * math.pi / design.stator.slots)
    tooth = arc(wall[0].start, wall[-1].end * pitch, 0j, ccw=True)
    copper = [p for p in slot.compartments if p.material == "copper"]
    starts = [part.flank[0].start / MM for part in copper]
    sides = tuple(Edge(p.conjugate(), p) for p in starts)
    outer = 0.5 * design.stator.outer_diameter_mm
    return Sheet(design.stator.slots, outer, wall, tooth, sides)


def scaled(edge: Edge) -> Edge:
    """An edge of the design in mm."""
    return Edge(edge.start / MM, edge.end / MM, edge.bulge)


def moved(edge: Edge, turn: complex, shift: complex = 0j) -> Edge:
    """The edge turned, enlarged and shifted."""
    return Edge(edge.start * turn + shift, edge.end * turn + shift, edge.bulge)


def mirrored(edge: Edge) -> Edge:
    """The edge in a mirror along the x axis."""
    return Edge(edge.start.conjugate(), edge.end.conjugate(), -edge.bulge)


def new_drawing(unit: int = 4, version: str = "R2010") -> ezdxf.document.Drawing:
    """An empty drawing; unit 4 is mm, 1 inch, 0 none stated."""
    drawing = ezdxf.new(version)
    drawing.header["$INSUNITS"] = unit
    return drawing


def add_edge(model: ezdxf.layouts.BaseLayout, edge: Edge, **attributes: object) -> None:
    """Add a LINE or an ARC."""
    if edge.is_line:
        model.add_line(_xy(edge.start), _xy(edge.end), dxfattribs=attributes)
        return
    first, last = (edge.start, edge.end) if edge.bulge > 0.0 else (edge.end, edge.start)
    low, high = (math.degrees(cmath.phase(p - edge.centre)) for p in (first, last))
    model.add_arc(_xy(edge.centre), edge.radius, low, high, dxfattribs=attributes)


def add_loop(model: ezdxf.layouts.BaseLayout, edges: Sequence[Edge], close: bool) -> None:
    """Add a LWPOLYLINE with bulges."""
    vertices = [(e.start.real, e.start.imag, e.bulge) for e in edges]
    if not close:
        vertices.append((edges[-1].end.real, edges[-1].end.imag, 0.0))
    model.add_lwpolyline(vertices, "xyb", close=close)


def _xy(point: complex) -> tuple[float, float]:
    return point.real, point.imag


def loose(drawn: Sheet) -> ezdxf.document.Drawing:
    """Lines and arcs, each by itself, in mixed order and direction; R12 without a unit."""
    drawing = new_drawing(0, "R12")
    model = drawing.modelspace()
    edges = drawn.edges()
    for k in np.random.default_rng(3).permutation(len(edges)).tolist():
        edge = edges[k]
        add_edge(model, Edge(edge.end, edge.start, -edge.bulge) if k % 2 else edge)
    model.add_circle((0.0, 0.0), drawn.outer)
    return drawing


def polylines(drawn: Sheet) -> ezdxf.document.Drawing:
    """One polyline round bore and slots, another round the outside, lines for the copper."""
    drawing = new_drawing()
    model = drawing.modelspace()
    loop = []
    for s in range(drawn.slots):
        wall = [Edge(e.end, e.start, -e.bulge) for e in reversed(drawn.wall)]
        loop += [moved(e, drawn.at(s)) for e in (*wall, drawn.tooth)]
    add_loop(model, loop, close=True)
    for s in range(drawn.slots):
        for side in drawn.sides:
            add_loop(model, [moved(side, drawn.at(s))], close=False)
    add_loop(
        model,
        [Edge(drawn.outer, -drawn.outer, 1.0), Edge(-drawn.outer, drawn.outer, 1.0)],
        close=True,
    )
    return drawing


def blocks(drawn: Sheet) -> ezdxf.document.Drawing:
    """A block of a slot, inserted in a block of four, inserted round; mirrored by its scale."""
    drawing = new_drawing()
    slot = drawing.blocks.new("slot")
    for edge in (*drawn.wall, *drawn.sides):
        add_edge(slot, mirrored(edge))
    add_edge(slot, mirrored(drawn.tooth))
    pitch = 360.0 / drawn.slots
    four = drawing.blocks.new("four")
    for k in range(4):
        four.add_blockref("slot", (0, 0), {"yscale": -1.0, "rotation": k * pitch})
    model = drawing.modelspace()
    for k in range(drawn.slots // 4):
        model.add_blockref("four", (0, 0), {"rotation": 4 * k * pitch + 0.5 * pitch})
    model.add_circle((0.0, 0.0), drawn.outer)
    return drawing


def splines(drawn: Sheet) -> ezdxf.document.Drawing:
    """Every arc as a cubic spline through nine of its points, the outer circle exact."""
    drawing = new_drawing()
    model = drawing.modelspace()
    for edge in drawn.edges():
        if edge.is_line:
            add_edge(model, edge)
            continue
        points = [_xy(edge.point(k / 8)) for k in range(9)]
        ends = [_xy(edge.length * edge.direction(t)) for t in (0.0, 1.0)]
        spline = ezdxf.math.global_bspline_interpolation(points, degree=3, tangents=ends)
        model.add_spline().apply_construction_tool(spline)
    model.add_ellipse((0.0, 0.0), major_axis=(drawn.outer, 0.0), ratio=1.0)
    return drawing


def inches(drawn: Sheet) -> ezdxf.document.Drawing:
    """Inches, as the file says."""
    drawing = new_drawing(1)
    model = drawing.modelspace()
    for edge in drawn.edges():
        add_edge(model, moved(edge, 1.0 / INCH))
    model.add_circle((0.0, 0.0), drawn.outer / INCH)
    return drawing


def rotated(drawn: Sheet) -> ezdxf.document.Drawing:
    """Turned by 17.3 degrees and moved far off the origin."""
    turn, shift = cmath.exp(1j * math.radians(17.3)), 412.5 - 133.25j
    drawing = new_drawing()
    model = drawing.modelspace()
    for edge in drawn.edges():
        add_edge(model, moved(edge, turn, shift))
    model.add_circle(_xy(shift), drawn.outer)
    return drawing


def mirror_image(drawn: Sheet) -> ezdxf.document.Drawing:
    """Arcs on the mirrored plane (extrusion 0, 0, -1), as a mirror command leaves them."""
    drawing = new_drawing()
    model = drawing.modelspace()
    for edge in drawn.edges():
        image = moved(mirrored(edge), -1.0)  # x -> -x
        if image.is_line:
            add_edge(model, image)
        else:
            add_edge(model, edge, extrusion=(0, 0, -1))
    model.add_circle((0.0, 0.0), drawn.outer)
    return drawing


def gaps(drawn: Sheet) -> ezdxf.document.Drawing:
    """Ends up to 5 um apart: every edge shifted by up to 2.5 um, at random."""
    rng = np.random.default_rng(11)
    drawing = new_drawing()
    model = drawing.modelspace()
    for edge in drawn.edges():
        shift = 0.0025 * rng.uniform() * cmath.exp(2j * math.pi * rng.uniform())
        add_edge(model, moved(edge, 1.0, complex(shift)))
    model.add_circle((0.0, 0.0), drawn.outer)
    return drawing


def duplicates(drawn: Sheet) -> ezdxf.document.Drawing:
    """A third of it drawn twice, whole or in part; notes, a centre line and a frozen layer."""
    drawing = new_drawing()
    drawing.layers.add("frame").freeze()
    drawing.linetypes.add("CENTER", [1.0, 0.8, -0.1, 0.1, -0.1])
    model = drawing.modelspace()
    for k, edge in enumerate(drawn.edges()):
        add_edge(model, edge)
        if k % 3 == 0:
            add_edge(model, edge)
        if k % 5 == 0:  # half of it once more
            middle, bulge = edge.point(0.5), math.tan(edge.sweep / 8.0)
            add_edge(model, Edge(edge.start, middle, bulge))
    model.add_circle((0.0, 0.0), drawn.outer)
    model.add_circle((0.0, 0.0), drawn.outer)
    model.add_line((-90.0, 0.0), (90.0, 0.0), dxfattribs={"linetype": "CENTER"})
    model.add_line((-200.0, -200.0), (200.0, -200.0), dxfattribs={"layer": "frame"})
    model.add_text("stator sheet, drawn twice", height=3.0)
    return drawing


def one_pitch(drawn: Sheet) -> ezdxf.document.Drawing:
    """One slot pitch, from the middle of a tooth to the next, as a closed contour."""
    drawing = new_drawing()
    model = drawing.modelspace()
    half = cmath.exp(1j * math.pi / drawn.slots)
    bore = abs(drawn.tooth.start)
    low, high = bore / half, bore * half
    edges = [
        *drawn.wall,
        *drawn.sides,
        arc(low, drawn.wall[-1].end, 0j, ccw=True),
        arc(drawn.wall[0].start, high, 0j, ccw=True),
        Edge(low, drawn.outer / half),
        arc(drawn.outer / half, drawn.outer * half, 0j, ccw=True),
        Edge(drawn.outer * half, high),
    ]
    for edge in edges:
        add_edge(model, moved(edge, 1j, 20.0 + 5.0j))
    return drawing


FORMS: dict[str, Callable[[Sheet], ezdxf.document.Drawing]] = {
    form.__name__: form
    for form in (
        loose,
        polylines,
        blocks,
        splines,
        inches,
        rotated,
        mirror_image,
        gaps,
        duplicates,
        one_pitch,
    )
}


def design_text(demo: str, keys: str) -> str:
    """A design file whose stator is a drawing: its [stator] table replaced by `keys`."""
    head, rest = demo.split("[stator]\n")
    tail = rest[rest.index("\n[winding]") :]
    return f"{head}[stator]\n{keys}\n{tail}"


def write_form(name: str, drawn: Sheet, folder: Path) -> Path:
    """Write one form as stator.dxf."""
    path = folder / "stator.dxf"
    FORMS[name](drawn).saveas(path)
    return path
