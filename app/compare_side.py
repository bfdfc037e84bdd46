"""One side of a comparison: a design, a drawing, or a folder of results, whatever it holds."""

import csv
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from pathlib import Path

from lamwright.geometry.contours import Contour, lamination_contours
from lamwright.geometry.curves import Edge, area, perimeter
from lamwright.geometry.design_file import Machine, read_machine
from lamwright.geometry.dxf_reader import read_pieces
from lamwright.geometry.errors import LamwrightError, OutlineError
from lamwright.geometry.outline_axis import shaft_axis
from lamwright.geometry.section import CrossSection, base_name, pole_of
from lamwright.postprocess.files import VERDICT_FILE

from .lamination import section_of
from .release_manifest import MANIFEST_FILE, read_record

RIBS_FILE = "ribs.csv"
AXIS_TOL = 1e-5  # m, to which arcs share the shaft axis
MM = 1e3  # mm per m
WHAT = "a design file, a DXF drawing, or a folder of assess or release"


@dataclass(frozen=True, slots=True, eq=False)
class Side:
    """What was found at a path; what it does not hold is None or empty."""

    path: Path
    kind: str  # design, drawing, results or package
    machine: Machine | None = None
    section: CrossSection | None = None
    edges: tuple[Edge, ...] = ()  # of the rotor lamination about its axis, m
    contours: tuple[Contour, ...] = ()
    figures: Mapping[str, object] = field(default_factory=dict)  # of verdict.json
    ribs: Mapping[str, float] = field(default_factory=dict)  # width in m by name


def read_side(path: Path) -> Side:
    """What `path` holds.

    Raises:
        LamwrightError: nothing that can be compared; one line.
    """
    if not path.exists():
        raise LamwrightError(f"{path}: no such file or folder; accepted {WHAT}")
    if path.is_dir():
        return _folder(path)
    if path.suffix.lower() == ".toml":
        machine = read_machine(path)
        return _of_design(path, "design", machine)
    return Side(path, "drawing", edges=_drawn(path))


def _of_design(path: Path, kind: str, machine: Machine) -> Side:
    section = section_of(machine)
    contours = lamination_contours(section)
    return Side(
        path,
        kind,
        machine,
        section,
        tuple(e for c in contours for e in c.path.edges),
        contours,
        ribs={
            f"p{pole_of(rib.name)} {base_name(rib.name)}": rib.width
            for rib in section.ribs
            if pole_of(rib.name) <= section.rotor_period
        },
    )


def _folder(path: Path) -> Side:
    verdict = path / VERDICT_FILE
    if not verdict.is_file():
        raise LamwrightError(f"{path}: no {VERDICT_FILE} there; accepted {WHAT}")
    figures = read_record(verdict, "what lamwright has written")
    manifest = path / MANIFEST_FILE
    if manifest.is_file():
        name = read_record(manifest, "what lamwright has written").get("design_file")
        design = path / str(name)
        if isinstance(name, str) and design.is_file():
            side = _of_design(path, "package", read_machine(design))
            return Side(
                path,
                side.kind,
                side.machine,
                side.section,
                side.edges,
                side.contours,
                figures,
                side.ribs,
            )
    drawing = path / str(figures.get("outline_dxf", ""))
    edges = _drawn(drawing) if drawing.is_file() else ()
    return Side(path, "results", edges=edges, figures=figures, ribs=_widths(path / RIBS_FILE))


def _drawn(path: Path) -> tuple[Edge, ...]:
    """The lines and arcs of a drawing about its shaft axis, where its arcs tell one."""
    try:
        edges = read_pieces(path, assumed_mm=1.0).edges
    except OutlineError as error:
        raise LamwrightError(f"{path}: {error}") from None
    try:
        axis = shaft_axis(edges, AXIS_TOL)
    except OutlineError:
        return edges
    return tuple(Edge(e.start - axis, e.end - axis, e.bulge) for e in edges)


def _widths(path: Path) -> dict[str, float]:
    """Rib widths in m of an earlier run, none where it has no such table."""
    try:
        rows = list(csv.DictReader(path.read_text(encoding="utf-8").splitlines()))
        return {
            f"p{pole_of(row['rib'])} {base_name(row['rib'])}": float(row["width_mm"]) / MM
            for row in rows
        }
    except (OSError, ValueError, KeyError):
        return {}


def sizes(side: Side) -> dict[str, float]:
    """Area, cut length and diameter of the lamination in mm2 and mm, as far as they are known."""
    found: dict[str, float] = {}
    if side.contours:
        found["lamination_area_mm2"] = MM**2 * sum(area(c.path) for c in side.contours)
        found["lamination_perimeter_mm"] = MM * sum(perimeter(c.path) for c in side.contours)
    if side.edges:
        found["outer_diameter_mm"] = 2.0 * MM * _reach(side.edges)
    return found


def _reach(edges: Sequence[Edge]) -> float:
    return max(abs(p) for e in edges for p in (e.start, e.point(0.5), e.end))
