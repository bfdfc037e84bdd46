"""A released DXF as it came back: contours on the cut layers, notes, and anything strange.

Unlike `dxf_release.read_release`, which refuses the first thing that no release has, this names
them all, so that a changed file can be told apart in full.
"""

from dataclasses import dataclass
from pathlib import Path as FilePath

from .contours import Contour
from .curves import area
from .dxf import path_of, readable_document
from .dxf_release import NOTE_LAYERS
from .errors import DesignError
from .punch_layers import CUT_LAYERS

LARGEST = 16_000_000  # bytes; a stator of 144 slots has 0.2 MB
FAR = 1e3  # m; a contour that goes further is damaged
SAID = 120  # characters of a strange thing that are told


@dataclass(frozen=True, slots=True)
class CutFile:
    """What a released DXF holds; lengths in m."""

    contours: tuple[Contour, ...]
    notes: tuple[str, ...]  # texts off the cut layers, in their order
    strange: tuple[str, ...]  # one line each


def read_cut(path: FilePath) -> CutFile:
    """All that is in a released DXF.

    Raises:
        DesignError: the file is too large, cannot be read, or is not in millimetres.
    """
    if path.stat().st_size > LARGEST:
        raise DesignError(f"{path}: file too large; accepted up to {LARGEST // 1_000_000} MB")
    contours: list[Contour] = []
    notes, strange = [], []
    for entity in readable_document(path).modelspace():
        layer, kind = str(entity.dxf.layer), entity.dxftype()
        if layer in NOTE_LAYERS:
            if kind == "TEXT":
                notes.append(str(entity.dxf.text))
            elif kind != "LINE":
                strange.append(f"{kind} on layer {layer}")
        elif layer not in CUT_LAYERS:
            strange.append(f"{kind} on layer {layer}, which no release has")
        else:
            try:
                contour = Contour(layer, path_of(entity, path))
            except DesignError as error:
                strange.append(str(error).removeprefix(f"{path}: "))
                continue
            if _is_sound(contour):
                contours.append(contour)
            else:
                strange.append(f"a polyline on layer {layer} without an area")
    told = [line.encode("ascii", "backslashreplace").decode()[:SAID] for line in strange]
    return CutFile(tuple(contours), tuple(notes), tuple(told))


def _is_sound(contour: Contour) -> bool:
    """Whether its points are apart and near enough to be compared."""
    edges = contour.path.edges
    return (
        len(edges) >= 2
        and all(edge.start != edge.end and abs(edge.start) < FAR for edge in edges)
        and area(contour.path) != 0.0
    )
