"""Damaged stator drawings and the line that each must be refused with.

`place` tells whether the slip has a place that a picture can mark.
"""

import cmath
import math
from collections.abc import Callable
from dataclasses import dataclass, replace
from pathlib import Path

from damaged_drawings import (
    between_walls,
    chords,
    crossed_tooth,
    cut_short,
    filled_slot,
    flat_rim,
    gap,
    nested,
    no_slots,
    open_rim,
    open_slots,
    pitch,
    sheet_with,
    small_rim,
    spoilt_number,
    square,
    squeezed,
    texts,
    three_sides,
    wall,
    with_circle,
    with_entity,
    with_more,
    without,
    without_unit,
)
from draughting import Sheet, moved, new_drawing
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


BOTTOM = 5  # number of the slot bottom among the wall's edges

DAMAGES = (
    Damage("missing", lambda drawn, path: None, "no such file"),
    Damage("folder", lambda drawn, path: path.mkdir(), "not a regular file"),
    Damage("empty", _bytes(b" \n"), "the file is empty"),
    Damage("prose", _bytes(b"The stator is drawn on sheet 3.\n" * 40), "not a readable DXF file"),
    Damage("picture", _bytes(b"\x89PNG\r\n\x1a\n" + bytes(range(256)) * 8), "not a readable DXF"),
    Damage("cut_short", cut_short, "not a readable DXF file"),
    Damage("spoilt_number", spoilt_number, "CIRCLE .*no number"),
    Damage("no_unit", without_unit, "the file states no unit; state outline_unit_mm"),
    Damage("no_entity", _saved(lambda drawn: new_drawing()), "no line, arc or polyline"),
    Damage("texts", _saved(texts), "no line, arc or polyline"),
    Damage(
        "other_layer",
        _saved(with_more),
        "nothing on layer stator",
        keys=STACK + 'outline_layers = ["stator"]\n',
    ),
    Damage(
        "nested",
        _saved(nested),
        "blocks nested more than 8 deep",
        keys=STACK + "outline_unit_mm = 1.0\n",
    ),
    Damage("mesh", _saved(with_entity("mesh")), "POLYLINE that is a mesh"),
    Damage("tilted", _saved(with_entity("tilted")), "ARC tilted out of the drawing's plane"),
    Damage("face", _saved(with_entity("face")), "3DFACE cannot be read, explode it"),
    Damage("gap", _saved(gap), r"open at .* 0\.05 mm from the next open end; heal_um = 10", True),
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
        _saved(open_rim),
        r"no closed outer circle.*end at \(69\.734, 6\.101\) mm",
        True,
    ),
    Damage("flat_rim", _saved(flat_rim), r"no closed outer circle.*end at \(60\.622, -35", True),
    Damage("square", _saved(square), "no closed outer circle", True),
    Damage("small_rim", _saved(small_rim), "no closed outer circle", True),
    Damage(
        "moved_slot", _saved(lambda d: wall(d, 4, 1.0, 0.1 + 0j)), "not the others turned", True
    ),
    Damage(
        "turned_slot",
        _saved(lambda d: wall(d, 4, cmath.exp(0.003j))),
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
    Damage("filled_slot", _saved(filled_slot), "not evenly spaced|not the others turned", True),
    Damage(
        "line_in_slot",
        _saved(lambda d: with_more(d, moved(between_walls(d, Edge(50 - 7j, 50 + 7j)), d.at(2)))),
        "not the others turned",
        True,
    ),
    Damage("crossed_tooth", _saved(crossed_tooth), "open at", True),
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
    Damage("squeezed", _saved(squeezed), "inside the bore at|no closed outer", True),
    Damage("chords", _saved(chords), "no arc in the drawing, so no axis"),
    Damage("no_slots", _saved(no_slots), "no slot between bore and outer circle", True),
    Damage("wrong_share", _saved(lambda d: pitch(d, 1.03)), "no whole share of a turn", True),
    Damage("three_sides", _saved(three_sides), "3 coil sides are drawn in each slot"),
    Damage("open_slots", _saved(open_slots), "an open slot drawn in one piece", True),
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
    Damage(
        "idle_wedge",
        _saved(with_more),
        "the drawing shows where copper begins; leave it out",
        keys=STACK + "wedge_depth_mm = 1.0\n",
    ),
)
