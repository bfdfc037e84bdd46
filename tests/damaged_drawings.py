"""Stator drawings with one slip each, made from a whole sheet.

Lengths in mm; the sheet is that of the 24-slot demo: bore radius 41, slots to radius 56.5, outer
radius 70. Which line each must be refused with stands in `damages`.
"""

import cmath
import math
from collections.abc import Callable
from dataclasses import replace
from itertools import pairwise
from pathlib import Path

from draughting import Sheet, add_edge, loose, moved, new_drawing
from ezdxf.document import Drawing

from lamwright.geometry.curves import Edge


def sheet_with(
    drawn: Sheet, change: Callable[[int, int, Edge], list[Edge]], rim: bool = True
) -> Drawing:
    """The sheet in mm; `change` gives what is drawn for edge number k of slot s."""
    drawing = new_drawing()
    model = drawing.modelspace()
    for s in range(drawn.slots):
        for k, edge in enumerate((*drawn.wall, drawn.tooth, *drawn.sides)):
            for one in change(s, k, moved(edge, drawn.at(s))):
                add_edge(model, one)
    if rim:
        model.add_circle((0.0, 0.0), drawn.outer)
    return drawing


def without(drawn: Sheet, slot: int, numbers: tuple[int, ...], rim: bool = True) -> Drawing:
    """The sheet without some edges of one slot."""
    return sheet_with(drawn, lambda s, k, e: [] if s == slot and k in numbers else [e], rim)


def with_more(drawn: Sheet, *edges: Edge) -> Drawing:
    """The sheet with edges more."""
    drawing = sheet_with(drawn, lambda s, k, e: [e])
    for edge in edges:
        add_edge(drawing.modelspace(), edge)
    return drawing


def with_circle(drawn: Sheet, centre: complex, radius: float) -> Drawing:
    """The sheet with a circle more."""
    return with_more(
        drawn,
        Edge(centre - radius, centre + radius, 1.0),
        Edge(centre + radius, centre - radius, 1.0),
    )


def half(edge: Edge, low: float, high: float) -> Edge:
    bulge = math.tan((high - low) * edge.sweep / 4.0)
    return Edge(edge.point(low), edge.point(high), bulge)


def gap(drawn: Sheet) -> Drawing:
    """One tooth arc ends 50 um short."""
    tooth = len(drawn.wall)
    share = 1.0 - 0.05 / drawn.tooth.length
    return sheet_with(drawn, lambda s, k, e: [half(e, 0.0, share)] if (s, k) == (5, tooth) else [e])


def wall(drawn: Sheet, slot: int, change: complex, shift: complex = 0j) -> Drawing:
    """One slot (its walls, the teeth's corners with them) turned or moved."""
    count = len(drawn.wall)

    def changed(s: int, k: int, edge: Edge) -> list[Edge]:
        if s == slot and k != count:
            return [moved(edge, change, shift * drawn.at(slot))]
        start, end = edge.start, edge.end
        if (s, k) == (slot, count):
            start = start * change + shift * drawn.at(slot)
        if (s, k) == ((slot - 1) % drawn.slots, count):
            end = end * change + shift * drawn.at(slot)
        return [Edge(start, end, edge.bulge)]

    return sheet_with(drawn, changed)


def filled_slot(drawn: Sheet) -> Drawing:
    """One slot left out, the bore closed over it."""
    own = tuple(k for k in range(len(drawn.wall) + 1 + len(drawn.sides)) if k != len(drawn.wall))
    drawing = without(drawn, 7, own)
    mouth = moved(Edge(drawn.wall[-1].end, drawn.wall[0].start), drawn.at(7))
    middle = 41.0 * drawn.at(7)
    sweep = cmath.phase(mouth.end / middle) * 2.0
    add_edge(drawing.modelspace(), Edge(mouth.start, mouth.end, math.tan(sweep / 4.0)))
    return drawing


def square(drawn: Sheet) -> Drawing:
    drawing = sheet_with(drawn, lambda s, k, e: [e], rim=False)
    corners = [72.0 * way for way in (1 + 1j, -1 + 1j, -1 - 1j, 1 - 1j)]
    for a, b in zip(corners, corners[1:] + corners[:1], strict=True):
        drawing.modelspace().add_line((a.real, a.imag), (b.real, b.imag))
    return drawing


def flat_rim(drawn: Sheet) -> Drawing:
    """The outer circle with a flat of 60 degrees."""
    drawing = sheet_with(drawn, lambda s, k, e: [e], rim=False)
    ends = [drawn.outer * cmath.exp(1j * math.pi * k / 6) for k in (-1, 1)]
    model = drawing.modelspace()
    model.add_arc((0, 0), drawn.outer, 30.0, 330.0)
    model.add_line((ends[0].real, ends[0].imag), (ends[1].real, ends[1].imag))
    return drawing


def open_rim(drawn: Sheet) -> Drawing:
    drawing = sheet_with(drawn, lambda s, k, e: [e], rim=False)
    drawing.modelspace().add_arc((0, 0), drawn.outer, 12.0, 5.0)
    return drawing


def small_rim(drawn: Sheet) -> Drawing:
    drawing = sheet_with(drawn, lambda s, k, e: [e], rim=False)
    drawing.modelspace().add_circle((0, 0), 56.0)
    return drawing


def squeezed(drawn: Sheet) -> Drawing:
    """The block of the sheet inserted 1 % too wide."""
    drawing = new_drawing()
    block = drawing.blocks.new("sheet")
    for edge in drawn.edges():
        add_edge(block, edge)
    block.add_circle((0, 0), drawn.outer)
    drawing.modelspace().add_blockref("sheet", (0, 0), {"xscale": 1.01})
    return drawing


def chords(drawn: Sheet) -> Drawing:
    """Every arc as its chord."""
    drawing = sheet_with(drawn, lambda s, k, e: [Edge(e.start, e.end)], rim=False)
    model = drawing.modelspace()
    rim = [drawn.outer * cmath.exp(2j * math.pi * k / 36) for k in range(37)]
    for a, b in pairwise(rim):
        model.add_line((a.real, a.imag), (b.real, b.imag))
    return drawing


def no_slots(drawn: Sheet) -> Drawing:
    drawing = new_drawing()
    for radius in (41.0, drawn.outer):
        drawing.modelspace().add_circle((0, 0), radius)
    return drawing


def pitch(drawn: Sheet, pitches: float) -> Drawing:
    """A sector of the bare ring with one slot, its sides the wrong angle apart."""
    drawing = new_drawing()
    model = drawing.modelspace()
    half = cmath.exp(1j * math.pi * pitches / drawn.slots)
    bore = 41.0
    degrees = 180.0 * pitches / drawn.slots
    for edge in (*drawn.wall, *drawn.sides):
        add_edge(model, edge)
    mouth = math.degrees(cmath.phase(drawn.wall[0].start))
    model.add_arc((0, 0), bore, mouth, degrees)
    model.add_arc((0, 0), bore, -degrees, -mouth)
    model.add_arc((0, 0), drawn.outer, -degrees, degrees)
    for side in (half, half.conjugate()):
        ends = [(r * side.real, r * side.imag) for r in (bore, drawn.outer)]
        model.add_line(*ends)
    return drawing


def nested(drawn: Sheet) -> Drawing:
    drawing = loose(drawn)
    for k in range(12):
        block = drawing.blocks.new(f"b{k}")
        if k:
            block.add_blockref(f"b{k - 1}", (0, 0))
    drawing.modelspace().add_blockref("b11", (0, 0))
    return drawing


def with_entity(kind: str) -> Callable[[Sheet], Drawing]:
    def make(drawn: Sheet) -> Drawing:
        drawing = with_more(drawn)
        model = drawing.modelspace()
        if kind == "mesh":
            model.add_polymesh((3, 3))
        elif kind == "tilted":
            model.add_arc((0, 0), 50.0, 0.0, 90.0, dxfattribs={"extrusion": (1, 0, 1)})
        else:
            model.add_3dface([(0, 0), (50, 0), (50, 50), (0, 50)])
        return drawing

    return make


def texts(drawn: Sheet) -> Drawing:
    drawing = new_drawing()
    drawing.modelspace().add_text("stator")
    return drawing


def without_unit(drawn: Sheet, path: Path) -> None:
    drawing = with_more(drawn)
    drawing.header["$INSUNITS"] = 0
    drawing.saveas(path)


def cut_short(drawn: Sheet, path: Path) -> None:
    with_more(drawn).saveas(path)
    path.write_bytes(path.read_bytes()[:3000])


def spoilt_number(drawn: Sheet, path: Path) -> None:
    with_more(drawn).saveas(path)
    path.write_text(path.read_text().replace("\n 40\n70.0\n", "\n 40\nnan\n"))


def open_slots(drawn: Sheet) -> Drawing:
    """Parallel open slots without a line across."""
    slot = replace(drawn, wall=open_wall(), tooth=open_tooth(drawn.slots), sides=())
    return with_more(slot)


def open_wall() -> tuple[Edge, ...]:
    bore = math.sqrt(41.0**2 - 3.0**2)
    a, b = complex(bore, 3.0), complex(55.0, 3.0)
    return Edge(a, b), Edge(b, b.conjugate()), Edge(b.conjugate(), a.conjugate())


def open_tooth(slots: int) -> Edge:
    wall = open_wall()
    start, end = wall[0].start, wall[-1].end * cmath.exp(2j * math.pi / slots)
    return Edge(start, end, math.tan(cmath.phase(end / start) / 4.0))


def three_sides(drawn: Sheet) -> Drawing:
    cuts = [Edge(complex(x, -w), complex(x, w)) for x, w in ((47.0, 6.0), (52.0, 7.0))]
    kept = [between_walls(drawn, cut) for cut in cuts]
    return with_more(replace(drawn, sides=(*drawn.sides, *kept)))


def between_walls(drawn: Sheet, cut: Edge) -> Edge:
    from lamwright.geometry.corners import intersections

    hits = sorted((p for e in drawn.wall for p in intersections(e, cut)), key=lambda p: p.imag)
    return Edge(hits[0], hits[-1])


def crossed_tooth(drawn: Sheet) -> Drawing:
    """A line from one slot to the next, across their tooth."""
    a, b = 52.0 * drawn.at(3) * cmath.exp(0.06j), 52.0 * drawn.at(4) * cmath.exp(-0.06j)
    return with_more(drawn, Edge(a, b))
