"""A user's DXF drawing as loose lines and arcs in m, with everything that was left out listed.

What is read: all versions of the format from R12, text or binary; the model space; entities on
layers that are shown, or on the layers stated. Left out and counted: notes and measures, centre
lines (by their line type), layers that are off or frozen, pieces of no length.
ezdxf takes 0.35 s to import and is imported inside the functions.
"""

import cmath
import hashlib
import re
from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass
from io import StringIO
from itertools import islice
from pathlib import Path as FilePath
from typing import TYPE_CHECKING

from .curves import Edge
from .dxf_entities import MOST_ENTITIES, EntityError, edges_of, opened
from .errors import OutlineError
from .outline_places import place_text

if TYPE_CHECKING:
    from ezdxf.document import Drawing
    from ezdxf.entities import DXFGraphic

LARGEST_FILE = 30_000_000  # bytes; a lamination of 100 slots drawn loose has 0.5 MB
LARGEST_BINARY = 5_000_000  # bytes
MOST_LINES = 1_000_000  # of a text file; 28 000 lines of a traced outline take 700 000
MOST_RECORDS = 60_000  # entities, vertices of old polylines, table entries
RECORD = re.compile(rb"\n[ \t]*0[ \t]*\r?\n[ \t]*[A-Z]")
BINARY = b"AutoCAD Binary DXF"
MOST_EDGES = 120_000  # bounds time and memory; 14 contours traced by 2 000 points have 28 000
MOST_DATUM = 12  # centre lines on a layer DATUM among which the axis is looked for
SAME_POINT = 1e-6  # m, of those lines
LEAST_LENGTH = 1e-9  # m, a piece shorter than this is none
# $INSUNITS: mm per unit. Codes by the DXF reference (0: none stated).
UNITS_MM = {1: 25.4, 2: 304.8, 4: 1.0, 5: 10.0, 6: 1000.0, 9: 0.0254, 13: 0.001, 14: 100.0}
UNIT_NAMES = {1: "inch", 2: "foot", 4: "mm", 5: "cm", 6: "m", 9: "mil", 13: "um", 14: "dm"}
# Line types of centre lines in the usual sets, names of other languages among them.
CENTRE_TYPES = (
    "CENTER",
    "CENTRE",
    "DASHDOT",
    "PHANTOM",
    "ISO04",
    "ISO08",
    "ISO10",
    "MITTE",
    "STRICHPUNKT",
)


@dataclass(frozen=True, slots=True)
class DrawnPieces:
    """What a drawing holds: its lines and arcs in m, and how it was read."""

    edges: tuple[Edge, ...]
    layers: tuple[str, ...]  # of each edge
    unit_mm: float  # per drawing unit
    unit_source: str
    kinds: tuple[tuple[str, int], ...]  # entities read, by kind
    left_out: tuple[tuple[str, int], ...]  # entities left out, by reason
    sha256: str
    datum: float | None = None  # rad, of the axis that a released lamination's layer DATUM shows


def read_pieces(
    drawing: FilePath | bytes,
    unit_mm: float | None = None,
    layers: Sequence[str] = (),
    assumed_mm: float | None = None,
) -> DrawnPieces:
    """The lines and arcs of a DXF drawing.

    Args:
        drawing: the file, or what it holds.
        unit_mm: mm per drawing unit; None takes the file's own statement.
        layers: names of the layers that hold the outline; none means all that are shown.
        assumed_mm: mm per drawing unit where neither is told; None refuses such a file.

    Raises:
        OutlineError: one line, if the file cannot be read or states no unit, or holds nothing.
    """
    data = drawing if isinstance(drawing, bytes) else drawing_bytes(drawing)
    _raise_if_endless(data)
    document = _document(data)
    unit, source = _unit(document, unit_mm, assumed_mm)
    taken, left_out, centres = _chosen(document, layers)
    edges: list[Edge] = []
    edge_layers: list[str] = []
    kinds: Counter[str] = Counter()
    for entity in taken:
        found = _edges(entity, 1e-3 * unit)
        if found is None:
            left_out[f"{entity.dxftype()}, no outline"] += 1
            continue
        long = [edge for edge in found if edge.length > LEAST_LENGTH]
        if not long:
            left_out["no length"] += 1
            continue
        kinds[entity.dxftype()] += 1
        edges += long
        edge_layers += [_layer_of(entity)] * len(long)
        if len(edges) > MOST_EDGES:
            raise OutlineError(
                f"more than {MOST_EDGES} lines and arcs; accepted a lamination alone"
            )
    if not edges:
        raise OutlineError("no line, arc or polyline in the drawing's model space")
    return DrawnPieces(
        tuple(edges),
        tuple(edge_layers),
        unit,
        source,
        tuple(sorted(kinds.items())),
        tuple(sorted(left_out.items())),
        hashlib.sha256(data).hexdigest(),
        _datum([edge for one in centres for edge in _edges(one, 1e-3 * unit) or ()]),
    )


def _datum(lines: Sequence[Edge]) -> float | None:
    """Direction in rad of the one line that starts where all others have their middle."""
    if not 3 <= len(lines) <= MOST_DATUM:
        return None
    found = [
        line
        for line in lines
        if all(abs(other.point(0.5) - line.start) < SAME_POINT for other in lines if other != line)
    ]
    return cmath.phase(found[0].end - found[0].start) if len(found) == 1 else None


def drawing_bytes(path: FilePath) -> bytes:
    """What a drawing's file holds.

    Raises:
        OutlineError: one line, if it cannot be read, or holds nothing or too much.
    """
    fault = _read_fault(path)
    if fault:
        raise OutlineError(fault)
    with path.open("rb") as file:
        data = file.read(LARGEST_FILE + 1)
    if len(data) > LARGEST_FILE:
        raise OutlineError(f"file too large; accepted up to {LARGEST_FILE // 1_000_000} MB")
    if not data.strip():
        raise OutlineError("the file is empty; accepted a DXF drawing")
    return data


def _raise_if_endless(data: bytes) -> None:
    """Told from the bytes, for the library takes 20 us a tag and 1 kB an entity."""
    is_binary = data.startswith(BINARY)
    if is_binary and len(data) > LARGEST_BINARY:
        most = f"{LARGEST_BINARY // 1_000_000} MB in a binary file"
    elif not is_binary and max(data.count(b"\n"), data.count(b"\r")) > MOST_LINES:
        most = f"{MOST_LINES} lines of text"
    elif not is_binary and sum(1 for _ in RECORD.finditer(data)) > MOST_RECORDS:
        most = f"{MOST_RECORDS} entities"
    else:
        return
    raise OutlineError(f"more than {most}; accepted a lamination alone")


def _read_fault(path: FilePath) -> str:
    """Why `path` cannot be read, empty where it can."""
    try:
        if not path.exists():
            return "no such file; accepted a DXF drawing, counted from the design's folder"
        if not path.is_file():
            return "not a regular file"
        with path.open("rb"):
            return ""
    except OSError as error:
        return f"cannot be read, {(error.strerror or 'unknown reason').lower()}"
    except ValueError:  # a null character in the name
        return "not a file name"


def _document(data: bytes) -> "Drawing":
    import ezdxf
    from ezdxf.filemanagement import dxf_stream_info

    try:
        if data.startswith(BINARY):
            from ezdxf.document import Drawing as Document
            from ezdxf.lldxf.tagger import binary_tags_loader

            return Document.load(binary_tags_loader(data))
        # newline=None: line ends of any system become one.
        info = dxf_stream_info(StringIO(data.decode("latin-1"), newline=None))
        text = data.decode(info.encoding, errors="surrogateescape")
        if "SECTION" not in text:
            raise ValueError("no section in the file")
        return ezdxf.read(StringIO(text, newline=None))
    # What the library may raise on damaged files is not a list to rely on (see `dxf`).
    except Exception as error:
        raise OutlineError(f"not a readable DXF file; {_one_line(error)}") from None


def _one_line(error: Exception) -> str:
    # The library quotes the file's own bytes, line ends and half characters among them.
    text = str(error).encode("ascii", "backslashreplace").decode()
    text = "".join(c if c.isprintable() else "?" for c in " ".join(text.split()))
    return f"{type(error).__name__}: {text}".rstrip(" :")[:200]


def _unit(document: "Drawing", stated: float | None, assumed: float | None) -> tuple[float, str]:
    code = document.header.get("$INSUNITS", 0)
    if stated is not None:
        told = f", the file says {UNIT_NAMES[code]}" if code in UNIT_NAMES else ""
        return stated, f"{stated:g} mm as stated{told}"
    if code in UNITS_MM:
        return UNITS_MM[code], f"{UNIT_NAMES[code]}, from the file"
    if assumed is not None:
        return assumed, f"{assumed:g} mm assumed, the file states none"
    raise OutlineError(
        "the file states no unit; state outline_unit_mm, as 1.0 for mm or 25.4 for inches"
    )


def _chosen(
    document: "Drawing", layers: Sequence[str]
) -> "tuple[list[DXFGraphic], Counter[str], list[DXFGraphic]]":
    """Entities of the outline, the others counted, and centre lines on the layer DATUM."""
    left_out: Counter[str] = Counter()
    centres: list[DXFGraphic] = []
    known = {layer.dxf.name.casefold(): layer for layer in document.layers}
    wanted = {name.casefold() for name in layers}
    taken = []
    try:
        every = list(islice(opened(iter(document.modelspace())), MOST_ENTITIES + 1))
    except EntityError as error:
        raise OutlineError(str(error)) from None
    except Exception as error:
        raise OutlineError(f"a block that cannot be placed; {_one_line(error)}") from None
    if len(every) > MOST_ENTITIES:
        raise OutlineError(f"more than {MOST_ENTITIES} entities; accepted a lamination alone")
    used = {_layer_of(entity).casefold() for entity in every}
    if wanted - used:
        names = ", ".join(sorted(used))[:200]
        raise OutlineError(f"nothing on layer {sorted(wanted - used)[0]}; the layers are {names}")
    for entity in every:
        name = _layer_of(entity).casefold()
        layer = known.get(name)
        line_type = _attribute(entity, "linetype", "BYLAYER").upper()
        if line_type == "BYLAYER" and layer is not None:
            line_type = str(layer.dxf.get("linetype", "")).upper()
        is_centre = any(part in line_type for part in CENTRE_TYPES)
        if is_centre and name == "datum" and entity.dxftype() == "LINE":
            centres.append(entity)
        if wanted and name not in wanted:
            left_out["other layer"] += 1
        elif name == "defpoints" or (layer and (layer.is_off() or layer.is_frozen())):
            left_out["layer not shown"] += 1
        elif is_centre:
            left_out["centre line"] += 1
        else:
            taken.append(entity)
    return taken, left_out, centres


def _layer_of(entity: "DXFGraphic") -> str:
    return _attribute(entity, "layer", "0")


def _attribute(entity: "DXFGraphic", name: str, default: str) -> str:
    """An attribute's text; entities of no known kind have none at all."""
    value = entity.dxf.get(name, default) if entity.dxf.is_supported(name) else default
    return "".join(c if c.isprintable() else "?" for c in str(value))


def _edges(entity: "DXFGraphic", unit: float) -> list[Edge] | None:
    where = f"on layer {_layer_of(entity)}"
    try:
        return edges_of(entity, unit)
    except EntityError as error:
        place = None if error.point is None else unit * error.point
        at = "" if place is None else f" at {place_text(place)}"
        raise OutlineError(f"{error} ({where}){at}", place) from None
    except Exception as error:
        raise OutlineError(f"{entity.dxftype()} {where} is damaged; {_one_line(error)}") from None
