"""The DXF that a supplier is sent: every contour to be cut, and notes on layers that are not.

Two forms of the same drawing: R2000, which any program and machine control of the last decades
reads, and R2018, the newest. Units are millimetres and said in the header, the shaft axis is at
0 0. Contours are closed LWPOLYLINEs with true arcs (bulges), the steel to the left of each, in the
order of cutting and with the starts of `punch_layers`. Layers DATUM (centre lines, the axis of the
first pole or slot) and TEXT are off the cut layers and do not plot as cuts: lines and single-line
text only, outside the lamination but for the centre lines.

The same drawing gives the same bytes, as in `dxf`, whose ways of fixing time stamps and identifiers
are used here.
"""

import math
from collections.abc import Sequence
from pathlib import Path as FilePath
from typing import TYPE_CHECKING, Literal, get_args

from .contours import Contour
from .curves import Edge, Path, Point
from .dxf import MM, fixed_text, path_of, readable_document
from .errors import DesignError
from .punch_layers import CUT_LAYERS
from .whole_file import write_text

if TYPE_CHECKING:
    from ezdxf.document import Drawing
    from ezdxf.layouts import Modelspace

DxfForm = Literal["R2000", "R2018"]
FORMS: tuple[DxfForm, ...] = get_args(DxfForm)

# Colour index: black or white, red, blue, green, magenta, cyan, yellow; grey for what is not cut.
COLOURS = {
    "OUTER_CONTOUR": 7,
    "BORE": 1,
    "KEYWAY": 1,
    "BARRIERS": 5,
    "MAGNET_POCKETS": 6,
    "HOLES": 3,
    "SLOTS": 5,
}
NOTE_LAYERS = ("DATUM", "TEXT")
NOTE_COLOUR = 8
OVERHANG = 1.08  # of the outer radius, to which centre lines reach
LINE_PITCH = 1.8  # of the text's height
TEXT_SHARE = 0.03  # of the outer radius, the text's height


def write_release(
    contours: Sequence[Contour],
    path: FilePath,
    form: DxfForm,
    texts: Sequence[str] = (),
    axis: float | None = None,
) -> None:
    """Write a lamination as DXF for its supplier; the file appears complete or not at all.

    Args:
        contours: as cut, in m, on the layers of `punch_layers`.
        path: file to write; its folder must exist.
        form: version of the format.
        texts: lines written below the lamination, on layer TEXT.
        axis: angle in rad of a third centre line, from the shaft axis, as the first pole's q axis.

    Raises:
        DesignError: for a contour on another layer, or a drawing in which the library's audit
            finds an error.
    """
    strange = sorted({c.layer for c in contours} - set(CUT_LAYERS))
    if strange:
        names = ", ".join(CUT_LAYERS)
        raise DesignError(f"{path}: layer {strange[0]} is not one to be cut; accepted {names}")
    document = _document(contours, form, texts, axis)
    auditor = document.audit()
    if auditor.errors or auditor.fixes:
        first = [*auditor.errors, *auditor.fixes][0]
        raise DesignError(f"{path}: the drawing fails its audit; {first.message}")
    write_text(path, fixed_text(document, _remarks(contours)))


def read_release(path: FilePath) -> tuple[Contour, ...]:
    """The contours to be cut of a released DXF, in the file's order, in m; notes are left out.

    Raises:
        DesignError: if the file cannot be read, is not in millimetres, or holds anything but
            closed polylines on the cut layers and notes on theirs.
    """
    document = readable_document(path)
    contours = []
    for entity in document.modelspace():
        layer, kind = str(entity.dxf.layer), entity.dxftype()
        if layer in NOTE_LAYERS:
            if kind not in ("LINE", "TEXT"):
                raise DesignError(f"{path}: {kind} on layer {layer}; accepted LINE and TEXT")
            continue
        if layer not in CUT_LAYERS:
            names = ", ".join((*CUT_LAYERS, *NOTE_LAYERS))
            raise DesignError(f"{path}: {kind} on layer {layer}; accepted {names}")
        outline = path_of(entity, path)
        if len(outline.edges) < 2:
            raise DesignError(f"{path}: a polyline on layer {layer} has no two vertices")
        contours.append(Contour(layer, outline))
    if not contours:
        raise DesignError(f"{path}: no contour in the file")
    return tuple(contours)


def bounding_box(contours: Sequence[Contour]) -> tuple[Point, Point]:
    """Lower left and upper right corner in m of all contours, arcs included exactly."""
    points = [p for contour in contours for e in contour.path.edges for p in _extremes(e)]
    xs, ys = [p.real for p in points], [p.imag for p in points]
    return complex(min(xs), min(ys)), complex(max(xs), max(ys))


def _extremes(edge: Edge) -> list[Point]:
    points = [edge.start, edge.end]
    if not edge.is_line:
        centre, radius, half = edge.centre, edge.radius, 0.5 * abs(edge.sweep)
        middle = edge.point(0.5) - centre
        for way in (1.0, 1j, -1.0, -1j):
            turn = way * middle.conjugate() / radius
            if abs(math.atan2(turn.imag, turn.real)) <= half:
                points.append(centre + radius * way)
    return points


def _remarks(contours: Sequence[Contour]) -> list[str]:
    layers = list(dict.fromkeys(contour.layer for contour in contours))
    counts = [f"{layer} {sum(c.layer == layer for c in contours)}" for layer in layers]
    return [
        "Lamwright: lamination to be cut, millimetres, shaft axis at 0 0",
        "closed polylines with arcs; the steel lies to the left of every contour",
        "not to be cut: layers " + ", ".join(NOTE_LAYERS),
        "contours by layer: " + ", ".join(counts),
    ]


def _document(
    contours: Sequence[Contour], form: DxfForm, texts: Sequence[str], axis: float | None
) -> "Drawing":
    import ezdxf

    document = ezdxf.new(form)
    document.units = ezdxf.units.MM
    document.header["$MEASUREMENT"] = 1  # metric
    document.header["$LUNITS"] = 2  # decimal
    document.header["$LUPREC"] = 4
    if form != "R2000":  # the variable is newer
        document.header["$LASTSAVEDBY"] = "Lamwright"
    document.linetypes.add("CENTER", [2.0, 1.25, -0.25, 0.25, -0.25], description="Center")
    present = {contour.layer for contour in contours}
    for layer in CUT_LAYERS:
        if layer in present:
            document.layers.add(layer, color=COLOURS[layer])
    document.layers.add("DATUM", color=NOTE_COLOUR, linetype="CENTER")
    document.layers.add("TEXT", color=NOTE_COLOUR)
    model = document.modelspace()
    for contour in contours:
        model.add_lwpolyline(
            _vertices(contour.path), "xyb", close=True, dxfattribs={"layer": contour.layer}
        )
    reach = max(abs(p) for c in contours for e in c.path.edges for p in (e.start, e.point(0.5)))
    reach /= MM
    _add_datum(model, reach, axis)
    bottom = _add_texts(model, reach, texts)
    document.header["$LTSCALE"] = reach / 80.0
    side = OVERHANG * reach
    model.reset_extents((-side, bottom, 0.0), (side, side, 0.0))
    document.set_modelspace_vport(
        height=1.05 * (side - bottom), center=(0.0, 0.5 * (side + bottom))
    )
    # The library lists its classes in the order of a set, which changes from run to run.
    for name in sorted(document.entitydb.dxf_types_in_use()):
        document.classes.add_class(name)
    return document


def _vertices(path: Path) -> list[tuple[float, float, float]]:
    return [(edge.start.real / MM, edge.start.imag / MM, edge.bulge) for edge in path.edges]


def _add_datum(model: "Modelspace", reach: float, axis: float | None) -> None:
    """Centre lines through the shaft axis (mm)."""
    side = OVERHANG * reach
    attributes = {"layer": "DATUM"}
    model.add_line((-side, 0.0), (side, 0.0), dxfattribs=attributes)
    model.add_line((0.0, -side), (0.0, side), dxfattribs=attributes)
    if axis is not None:  # over another one too: by its start at the axis it is told when read
        end = (side * math.cos(axis), side * math.sin(axis))
        model.add_line((0.0, 0.0), end, dxfattribs=attributes)


def _add_texts(model: "Modelspace", reach: float, texts: Sequence[str]) -> float:
    """The lines below the lamination (mm), and the lowest ordinate of the drawing."""
    height = TEXT_SHARE * reach
    y = -OVERHANG * reach
    for text in texts:
        y -= LINE_PITCH * height
        attributes = {"layer": "TEXT", "height": height, "insert": (-reach, y)}
        model.add_text(plain_text(text), dxfattribs=attributes)
    return y - height if texts else y


def plain_text(text: str) -> str:
    """Text that every program shows alike: one line of printable ASCII, no control codes."""
    text = text.replace("%%", "% %").replace("^", " ")
    return " ".join(text.split()).encode("ascii", "replace").decode()
