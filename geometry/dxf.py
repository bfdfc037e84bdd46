"""The punch outline as DXF and back: millimetres, closed polylines with true arcs.

Every contour is a closed LWPOLYLINE whose vertices carry bulges, the full circles of rim and bore
included (two halves): one kind of entity on a layer, each closed by its own flag, so a cutting
program needs no joining and cannot take a circle for a drill hole. Only the layers to be cut are
in the file. DXF R2010 is the version; group codes by the DXF reference (bulge = tan(sweep / 4)).

The same lamination gives the same bytes: the library's time stamps are taken out of the text and
its random identifiers replaced by one made from the content, with no global option touched.
ezdxf takes 0.35 s to import (measured) and is imported inside the functions.
"""

import math
import re
import uuid
from collections.abc import Sequence
from io import StringIO
from pathlib import Path as FilePath
from typing import TYPE_CHECKING

from .contours import Contour, compare_contours, lamination_contours
from .curves import Edge, Path, perimeter
from .errors import DesignError
from .section import CrossSection
from .whole_file import write_text

if TYPE_CHECKING:
    from ezdxf.document import Drawing
    from ezdxf.entities import DXFEntity

__all__ = [
    "Contour",
    "compare_contours",
    "lamination_contours",
    "read_contours",
    "write_contours",
    "write_lamination",
]

MM = 1e-3  # m
# Colour index: black or white, red, blue, green.
COLOURS = {"OUTER_CONTOUR": 7, "BORE": 1, "BARRIERS": 5, "HOLES": 3}
IDENTIFIER_SPACE = uuid.UUID("6a3f0c52-5d0e-5b0f-9a58-2f5a8d1c7e44")  # any fixed value of our own
_STAMPS = re.compile(r"  9\n\$TDU?(?:CREATE|UPDATE)\n 40\n.*\n")
_IDENTIFIERS = re.compile(r"(\$(?:FINGERPRINT|VERSION)GUID\n  2\n).*(?=\n)")
_MARKERS = re.compile(r"^(\S+) @ \d{4}-\d\d-\d\dT.*$", re.MULTILINE)


def load() -> None:
    """Import the library ahead of its first use, for a process that has the time."""
    import ezdxf  # noqa: F401
    from ezdxf.audit import Auditor  # noqa: F401


def write_lamination(section: CrossSection, path: str | FilePath) -> None:
    """Write the whole rotor lamination, all poles, as DXF; the file appears complete or not at all.

    Args:
        section: one pole in SI units.
        path: file to write; its folder must exist.
    """
    write_contours(lamination_contours(section), FilePath(path))


def write_contours(contours: Sequence[Contour], path: FilePath) -> None:
    """Write closed contours (m) as DXF in mm, each on its own layer."""
    write_text(path, fixed_text(_document(contours), _remarks(contours)))


def read_contours(path: str | FilePath) -> tuple[Contour, ...]:
    """The closed contours of a DXF file in mm, in the file's order, in m.

    Raises:
        DesignError: if the file cannot be read, is not in millimetres, holds anything but closed
            and finite polylines in its model space, or nothing at all.
    """
    path = FilePath(path)
    document = readable_document(path)
    contours = []
    for entity in document.modelspace():
        contours.append(Contour(str(entity.dxf.layer), path_of(entity, path)))
    if not contours:
        raise DesignError(f"{path}: no contour in the file")
    return tuple(contours)


def readable_document(path: FilePath) -> "Drawing":
    """The DXF file as the library reads it.

    Raises:
        DesignError: if it cannot be read or is not in millimetres.
    """
    import ezdxf

    try:
        document = ezdxf.readfile(path)
    # 200 files with random bytes changed, 200 cut short: the library also raised StopIteration
    # and ValueError, so what it may raise is not a list to rely on.
    except Exception as error:
        raise DesignError(f"{path}: not a readable DXF file; {_one_line(error)}") from error
    if document.header.get("$INSUNITS", 0) != ezdxf.units.MM:
        raise DesignError(f"{path}: $INSUNITS is not 4; millimetres needed")
    return document


def _one_line(error: Exception) -> str:
    # The library quotes the file's own bytes, line ends and half characters among them.
    text = str(error).encode("ascii", "backslashreplace").decode()
    return f"{type(error).__name__}: {' '.join(text.split())}"


def path_of(entity: "DXFEntity", path: FilePath) -> Path:
    """The closed path in m that an entity of the file draws.

    Raises:
        DesignError: for anything but a closed and finite polyline.
    """
    from ezdxf.entities import LWPolyline

    if not isinstance(entity, LWPolyline) or not entity.closed:
        kind, layer = entity.dxftype(), entity.dxf.layer
        raise DesignError(f"{path}: {kind} on layer {layer} is no closed polyline")
    way = entity.dxf.extrusion
    if abs(way.x) + abs(way.y) > 0.0 or way.z == 0.0 or entity.dxf.elevation != 0.0:
        raise DesignError(f"{path}: a polyline on layer {entity.dxf.layer} is not in the plane")
    # Seen from below its x axis is turned round: so programs write what they have mirrored.
    side = 1.0 if way.z > 0.0 else -1.0
    points = entity.get_points("xyb")
    vertices = [(MM * complex(side * x, y), side * float(b)) for x, y, b in points]
    ends = [point for point, _ in (*vertices[1:], *vertices[:1])]
    outline = Path(tuple(Edge(p, end, b) for (p, b), end in zip(vertices, ends, strict=True)))
    if not math.isfinite(perimeter(outline)):
        raise DesignError(f"{path}: a polyline on layer {entity.dxf.layer} is not finite")
    return outline


def fixed_text(document: "Drawing", remarks: Sequence[str]) -> str:
    """The document as text without time stamps and random identifiers, remarks at its head."""
    stream = StringIO()
    document.write(stream)
    text = _MARKERS.sub(r"\1", _STAMPS.sub("", stream.getvalue()))
    nil = f"{{{uuid.UUID(int=0)}}}"
    name = uuid.uuid5(IDENTIFIER_SPACE, _IDENTIFIERS.sub(rf"\g<1>{nil}", text))
    text = _IDENTIFIERS.sub(rf"\g<1>{{{str(name).upper()}}}", text)
    return "".join(f"999\n{remark}\n" for remark in remarks) + text


def _remarks(contours: Sequence[Contour]) -> list[str]:
    # Group 999 is the format's comment: read by people, skipped by programs.
    counts = [f"{layer} {_count(contours, layer)}" for layer in _layers(contours)]
    return [
        "Lamwright: lamination outline, millimetres, shaft axis at 0 0",
        "closed polylines with arcs; the sheet lies to the left of every contour",
        "contours by layer: " + ", ".join(counts),
    ]


def _layers(contours: Sequence[Contour]) -> list[str]:
    return list(dict.fromkeys(contour.layer for contour in contours))


def _count(contours: Sequence[Contour], layer: str) -> int:
    return sum(contour.layer == layer for contour in contours)


def _document(contours: Sequence[Contour]) -> "Drawing":
    import ezdxf

    document = ezdxf.new("R2010")
    document.units = ezdxf.units.MM
    document.header["$MEASUREMENT"] = 1  # metric
    document.header["$LASTSAVEDBY"] = "Lamwright"
    for layer in _layers(contours):
        document.layers.add(layer, color=COLOURS.get(layer, 7))
    model = document.modelspace()
    for contour in contours:
        vertices = [
            (edge.start.real / MM, edge.start.imag / MM, edge.bulge) for edge in contour.path.edges
        ]
        model.add_lwpolyline(vertices, "xyb", close=True, dxfattribs={"layer": contour.layer})
    # Without extents many viewers open on an empty corner.
    reach = max(_reach(contour.path) for contour in contours) / MM
    model.reset_extents((-reach, -reach, 0.0), (reach, reach, 0.0))
    document.set_modelspace_vport(height=2.2 * reach)
    # The library lists its classes in the order of a set, which changes from run to run.
    for name in sorted(document.entitydb.dxf_types_in_use()):
        document.classes.add_class(name)
    return document


def _reach(path: Path) -> float:
    # Farthest from the shaft axis: bulges of a lamination's outer contour are arcs about it.
    return max(math.hypot(edge.start.real, edge.start.imag) for edge in path.edges)
