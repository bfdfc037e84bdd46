"""Outlines of exact lines and arcs as faces of a general-purpose CAD kernel, for another mesher."""

from collections.abc import Iterable, Sequence
from typing import Any

from lamwright.geometry.curves import Edge, Path, area, reversed_path, turned
from lamwright.geometry.section import Region


def occ_edges(edge: Edge) -> list[Any]:
    """The edge as a segment, or as arcs of at most half a turn."""
    from netgen.occ import ArcOfCircle, Pnt, Segment

    def pnt(z: complex) -> Any:
        return Pnt(z.real * 1e3, z.imag * 1e3, 0.0)  # the kernel's tolerance suits mm

    if edge.is_line:
        return [Segment(pnt(edge.start), pnt(edge.end))]
    return [
        ArcOfCircle(pnt(edge.point(s)), pnt(edge.point(s + 0.25)), pnt(edge.point(s + 0.5)))
        for s in (0.0, 0.5)
    ]


def occ_face(outer: Path, holes: Iterable[Path] = ()) -> Any:
    """A plane face with holes, in mm."""
    face = plain_face(outer)
    for hole in holes:
        face = face - plain_face(hole)
    return face


def plain_face(path: Path) -> Any:
    """A face without holes; counter-clockwise, for a clockwise one gets mirrored elements."""
    from netgen.occ import Face, Wire

    path = path if area(path) > 0.0 else reversed_path(path)
    return Face(Wire([part for edge in path.edges for part in occ_edges(edge)]))


def stator_faces(regions: Sequence[Region], pole: int, angle: float) -> list[Any]:
    """Faces of one stator pole turned to its place, named `<region>@<pole>`."""
    faces = []
    for region in regions:
        face = occ_face(turned(region.outer, angle), [turned(hole, angle) for hole in region.holes])
        face.faces.name = f"{region.name}@{pole}"
        faces.append(face)
    return faces
