"""Stator drawings that must be refused: one slip each, with the line that says so.

`place` tells whether the slip has a place that a picture can mark. Lengths in mm; the sheet is that
of the 24-slot demo: bore radius 41, slots to radius 56.5, outer radius 70.
"""

import cmath
import math
from collections.abc import Callable
from dataclasses import dataclass, replace
from itertools import pairwise
from pathlib import Path

from draughting import Sheet, add_edge, loose, moved, new_drawing
from ezdxf.document import Drawing

from lamwright.geometry.curves import Edge

STACK = "stack_length_mm = 100.0\n"


@dataclass(frozen=True, slots=True)
class Damage:
    """One damaged drawing: how it is written, what the line says, and whether with a place."""

    name: str
    write: Callable[[Sheet, Path], None]
    text: str  # pattern
    place: bool = False
    keys: str = STACK


def _saved(make: Callable[[Sheet], Drawing]) -> Callable[[Sheet, Path], None]:
    return lambda drawn, path: make(drawn).saveas(path)


def _bytes(data: bytes) -> Callable[[Sheet, Path], None]:
    return lambda drawn, path: path.write_bytes(data) and None


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


def _half(edge: Edge, low: float, high: float) -> Edge:
    bulge = math.tan((high - low) * edge.sweep / 4.0)
    return Edge(edge.point(low), edge.point(high), bulge)


def _gap(drawn: Sheet) -> Drawing:
    """One tooth arc ends 50 um short."""
    tooth = len(drawn.wall)
    share = 1.0 - 0.05 / drawn.tooth.length
    return sheet_with(
        drawn, lambda s, k, e: [_half(e, 0.0, share)] if (s, k) == (5, tooth) else [e]
    )


def _wall(drawn: Sheet, slot: int, change: complex, shift: complex = 0j) -> Drawing:
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


def _filled_slot(drawn: Sheet) -> Drawing:
    """One slot left out, the bore closed over it."""
    own = tuple(k for k in range(len(drawn.wall) + 1 + len(drawn.sides)) if k != len(drawn.wall))
    drawing = without(drawn, 7, own)
    mouth = moved(Edge(drawn.wall[-1].end, drawn.wall[0].start), drawn.at(7))
    middle = 41.0 * drawn.at(7)
    sweep = cmath.phase(mouth.end / middle) * 2.0
    add_edge(drawing.modelspace(), Edge(mouth.start, mouth.end, math.tan(sweep / 4.0)))
    return drawing


def _square(drawn: Sheet) -> Drawing:
    drawing = sheet_with(drawn, lambda s, k, e: [e], rim=False)
    corners = [72.0 * way for way in (1 + 1j, -1 + 1j, -1 - 1j, 1 - 1j)]
    for a, b in zip(corners, corners[1:] + corners[:1], strict=True):
        drawing.modelspace().add_line((a.real, a.imag), (b.real, b.imag))
    return drawing


def _flat_rim(drawn: Sheet) -> Drawing:
    """The outer circle with a flat of 60 degrees."""
    drawing = sheet_with(drawn, lambda s, k, e: [e], rim=False)
    ends = [drawn.outer * cmath.exp(1j * math.pi * k / 6) for k in (-1, 1)]
    model = drawing.modelspace()
    model.add_arc((0, 0), drawn.outer, 30.0, 330.0)
    model.add_line((ends[0].real, ends[0].imag), (ends[1].real, ends[1].imag))
    return drawing


def _open_rim(drawn: Sheet) -> Drawing:
    drawing = sheet_with(drawn, lambda s, k, e: [e], rim=False)
    drawing.modelspace().add_arc((0, 0), drawn.outer, 12.0, 5.0)
    return drawing


def _small_rim(drawn: Sheet) -> Drawing:
    drawing = sheet_with(drawn, lambda s, k, e: [e], rim=False)
    drawing.modelspace().add_circle((0, 0), 56.0)
    return drawing


def _squeezed(drawn: Sheet) -> Drawing:
    """The block of the sheet inserted 1 % too wide."""
    drawing = new_drawing()
    block = drawing.blocks.new("sheet")
    for edge in drawn.edges():
        add_edge(block, edge)
    block.add_circle((0, 0), drawn.outer)
    drawing.modelspace().add_blockref("sheet", (0, 0), {"xscale": 1.01})
    return drawing


def _chords(drawn: Sheet) -> Drawing:
    """Every arc as its chord."""
    drawing = sheet_with(drawn, lambda s, k, e: [Edge(e.start, e.end)], rim=False)
    model = drawing.modelspace()
    rim = [drawn.outer * cmath.exp(2j * math.pi * k / 36) for k in range(37)]
    for a, b in pairwise(rim):
        model.add_line((a.real, a.imag), (b.real, b.imag))
    return drawing


def _no_slots(drawn: Sheet) -> Drawing:
    drawing = new_drawing()
    for radius in (41.0, drawn.outer):
        drawing.modelspace().add_circle((0, 0), radius)
    return drawing


def _pitch(drawn: Sheet, pitches: float) -> Drawing:
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


def _nested(drawn: Sheet) -> Drawing:
    drawing = loose(drawn)
    for k in range(12):
        block = drawing.blocks.new(f"b{k}")
        if k:
            block.add_blockref(f"b{k - 1}", (0, 0))
    drawing.modelspace().add_blockref("b11", (0, 0))
    return drawing


def _with_entity(kind: str) -> Callable[[Sheet], Drawing]:
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


def _texts(drawn: Sheet) -> Drawing:
    drawing = new_drawing()
    drawing.modelspace().add_text("stator")
    return drawing


def _without_unit(drawn: Sheet, path: Path) -> None:
    drawing = with_more(drawn)
    drawing.header["$INSUNITS"] = 0
    drawing.saveas(path)


def _cut_short(drawn: Sheet, path: Path) -> None:
    with_more(drawn).saveas(path)
    path.write_bytes(path.read_bytes()[:3000])


def _spoilt_number(drawn: Sheet, path: Path) -> None:
    with_more(drawn).saveas(path)
    path.write_text(path.read_text().replace("\n 40\n70.0\n", "\n 40\nnan\n"))


def _open_slots(drawn: Sheet) -> Drawing:
    """Parallel open slots without a line across."""
    slot = replace(drawn, wall=_open_wall(), tooth=_open_tooth(drawn.slots), sides=())
    return with_more(slot)


def _open_wall() -> tuple[Edge, ...]:
    bore = math.sqrt(41.0**2 - 3.0**2)
    a, b = complex(bore, 3.0), complex(55.0, 3.0)
    return Edge(a, b), Edge(b, b.conjugate()), Edge(b.conjugate(), a.conjugate())


def _open_tooth(slots: int) -> Edge:
    wall = _open_wall()
    start, end = wall[0].start, wall[-1].end * cmath.exp(2j * math.pi / slots)
    return Edge(start, end, math.tan(cmath.phase(end / start) / 4.0))


def _three_sides(drawn: Sheet) -> Drawing:
    cuts = [Edge(complex(x, -w), complex(x, w)) for x, w in ((47.0, 6.0), (52.0, 7.0))]
    kept = [_between_walls(drawn, cut) for cut in cuts]
    return with_more(replace(drawn, sides=(*drawn.sides, *kept)))


def _between_walls(drawn: Sheet, cut: Edge) -> Edge:
    from lamwright.geometry.corners import intersections

    hits = sorted((p for e in drawn.wall for p in intersections(e, cut)), key=lambda p: p.imag)
    return Edge(hits[0], hits[-1])


def _crossed_tooth(drawn: Sheet) -> Drawing:
    """A line from one slot to the next, across their tooth."""
    a, b = 52.0 * drawn.at(3) * cmath.exp(0.06j), 52.0 * drawn.at(4) * cmath.exp(-0.06j)
    return with_more(drawn, Edge(a, b))


BOTTOM = 5  # number of the slot bottom among the wall's edges

DAMAGES = (
    Damage("missing", lambda drawn, path: None, "no such file"),
    Damage("folder", lambda drawn, path: path.mkdir(), "not a regular file"),
    Damage("empty", _bytes(b" \n"), "the file is empty"),
    Damage("prose", _bytes(b"The stator is drawn on sheet 3.\n" * 40), "not a readable DXF file"),
    Damage("picture", _bytes(b"\x89PNG\r\n\x1a\n" + bytes(range(256)) * 8), "not a readable DXF"),
    Damage("cut_short", _cut_short, "not a readable DXF file"),
    Damage("spoilt_number", _spoilt_number, "CIRCLE .*no number"),
    Damage("no_unit", _without_unit, "the file states no unit; state outline_unit_mm"),
    Damage("no_entity", _saved(lambda drawn: new_drawing()), "no line, arc or polyline"),
    Damage("texts", _saved(_texts), "no line, arc or polyline"),
    Damage(
        "other_layer",
        _saved(with_more),
        "nothing on layer stator",
        keys=STACK + 'outline_layers = ["stator"]\n',
    ),
    Damage(
        "nested",
        _saved(_nested),
        "blocks nested more than 8 deep",
        keys=STACK + "outline_unit_mm = 1.0\n",
    ),
    Damage("mesh", _saved(_with_entity("mesh")), "POLYLINE that is a mesh"),
    Damage("tilted", _saved(_with_entity("tilted")), "ARC tilted out of the drawing's plane"),
    Damage("face", _saved(_with_entity("face")), "3DFACE cannot be read, explode it"),
    Damage("gap", _saved(_gap), r"open at .* 0\.05 mm from the next open end; heal_um = 10", True),
    Damage(
        "no_tooth",
        _saved(lambda d: without(d, 5, (len(d.wall),))),
        r"open at .* 8\.319 mm from the next",
        True,
    ),
    Damage("no_bottom", _saved(lambda d: without(d, 5, (BOTTOM,))), "open at", True),
    Damage("no_wall", _saved(lambda d: without(d, 9, (2,))), "open at", True),
    Damage(
        "no_rim",
        _saved(lambda d: without(d, 0, (), rim=False)),
        r"no closed outer circle: the outermost arcs, radius 56\.5000 mm",
        True,
    ),
    Damage(
        "open_rim",
        _saved(_open_rim),
        r"no closed outer circle.*end at \(69\.734, 6\.101\) mm",
        True,
    ),
    Damage("flat_rim", _saved(_flat_rim), r"no closed outer circle.*end at \(60\.622, -35", True),
    Damage("square", _saved(_square), "no closed outer circle", True),
    Damage("small_rim", _saved(_small_rim), "no closed outer circle", True),
    Damage(
        "moved_slot", _saved(lambda d: _wall(d, 4, 1.0, 0.1 + 0j)), "not the others turned", True
    ),
    Damage(
        "turned_slot",
        _saved(lambda d: _wall(d, 4, cmath.exp(0.003j))),
        "not the others turned",
        True,
    ),
    Damage(
        "wide_slot",
        _saved(
            lambda d: sheet_with(
                d,
                lambda s, k, e: [replace(e, bulge=e.bulge * 1.2)] if (s, k) == (8, BOTTOM) else [e],
            )
        ),
        "not the others turned",
        True,
    ),
    Damage("filled_slot", _saved(_filled_slot), "not evenly spaced|not the others turned", True),
    Damage(
        "line_in_slot",
        _saved(lambda d: with_more(d, moved(_between_walls(d, Edge(50 - 7j, 50 + 7j)), d.at(2)))),
        "not the others turned",
        True,
    ),
    Damage("crossed_tooth", _saved(_crossed_tooth), "open at", True),
    Damage(
        "bolt_hole",
        _saved(lambda d: with_circle(d, 64.0 + 0j, 1.5)),
        "a hole in the iron at .* is no slot",
        True,
    ),
    Damage(
        "bore_nick",
        _saved(lambda d: with_circle(d, 41.2 * d.at(0) * cmath.exp(1j * math.pi / 24), 0.4)),
        "inside the bore at",
        True,
    ),
    Damage(
        "rotor_inside",
        _saved(lambda d: with_circle(d, 0j, 40.6)),
        r"innermost, at \(40\.600, 0\.000\) mm, is not the bore",
        True,
    ),
    Damage(
        "shaft_inside",
        _saved(lambda d: with_circle(d, 0j, 13.0)),
        r"innermost, at \(13\.000, 0\.000\) mm, is not the bore",
        True,
    ),
    Damage(
        "frame",
        _saved(lambda d: with_more(d, Edge(-90 - 90j, 90 - 90j))),
        "outside the outer circle",
        True,
    ),
    Damage("stray_line", _saved(lambda d: with_more(d, Edge(62 + 0j, 66 + 2j))), "open at", True),
    Damage("squeezed", _saved(_squeezed), "inside the bore at|no closed outer", True),
    Damage("chords", _saved(_chords), "no arc in the drawing, so no axis"),
    Damage("no_slots", _saved(_no_slots), "no slot between bore and outer circle", True),
    Damage("wrong_share", _saved(lambda d: _pitch(d, 1.03)), "no whole share of a turn", True),
    Damage("three_sides", _saved(_three_sides), "3 coil sides are drawn in each slot"),
    Damage("open_slots", _saved(_open_slots), "an open slot drawn in one piece", True),
    Damage(
        "other_slots",
        _saved(with_more),
        r"stator\.slots = 36: the drawing has 24",
        keys=STACK + "slots = 36\n",
    ),
    Damage(
        "other_bore",
        _saved(with_more),
        r"bore_diameter_mm = 83\.0: the drawing has 82",
        keys=STACK + "bore_diameter_mm = 83.0\n",
    ),
    Damage(
        "shape_key",
        _saved(with_more),
        r"stator\.slot_corner_radius_mm: the drawing gives",
        keys=STACK + "slot_corner_radius_mm = 1.0\n",
    ),
)
