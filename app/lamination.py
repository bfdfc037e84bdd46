"""A design's punch outline: geometry, checks and DXF, without mesh or field.

Nothing heavy is imported here, the whole command has to end within a second.
"""

from dataclasses import dataclass
from pathlib import Path

from lamwright.geometry.contours import Contour, compare_contours, lamination_contours
from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.curves import area, perimeter
from lamwright.geometry.design_file import Machine, design_hash, placed
from lamwright.geometry.dxf import read_contours, write_contours
from lamwright.geometry.errors import GeometryError
from lamwright.geometry.section import CrossSection, Rib
from lamwright.geometry.whole_file import write_text
from lamwright.postprocess.files import json_text, prepared_folder, staged
from lamwright.postprocess.quantities import OutlineFigures, figures_of

from .drawings import Recognised, read_marked, write_recognised
from .version import version

DXF_FILE = "lamination.dxf"
OUTLINE_FILE = "outline.json"
MM = 1e3  # mm per m


@dataclass(frozen=True, slots=True)
class OutlineReport:
    """What `outline` has written, and how true it is."""

    design_name: str
    dxf: Path
    figures: OutlineFigures
    ribs: tuple[Rib, ...]
    recognised: tuple[Recognised, ...] = ()  # of each part that is a drawing


def outline(path: str | Path, out: str | Path) -> OutlineReport:
    """Write the punch outline of the design in `path` to the folder `out`.

    Raises:
        DesignError: the design cannot be read or drawn; one line for each fault.
        LamwrightError: the folder cannot be written.
    """
    path, out = Path(path), Path(out)
    machine = read_marked(path, out)
    section = section_of(machine)
    folder = prepared_folder(out)
    with staged(folder) as stage:
        recognised = write_recognised(machine, stage)
        figures = write_outline(section, stage / DXF_FILE)
        record = _record(machine, figures, section.ribs)
        write_text(stage / OUTLINE_FILE, json_text(record))
    name = machine.design.name
    return OutlineReport(name, folder / DXF_FILE, figures, section.ribs, recognised)


def section_of(machine: Machine) -> CrossSection:
    """The cross-section of a design file.

    Raises:
        DesignError: it cannot be drawn or punched; file, line and key of every reason.
    """
    try:
        return cross_section(machine.design)
    except GeometryError as error:
        raise placed(error.findings, machine.path) from None


def write_outline(section: CrossSection, path: Path) -> OutlineFigures:
    """Write the lamination as DXF, read it back and compare it with the outline analysed."""
    analysed = lamination_contours(section)
    write_contours(analysed, path)
    read = read_contours(path)
    return OutlineFigures(
        area=_area(analysed),
        perimeter=_cut_length(analysed),
        area_difference=abs(_area(read) / _area(analysed) - 1.0),
        perimeter_difference=abs(_cut_length(read) / _cut_length(analysed) - 1.0),
        vertex_difference=compare_contours(analysed, read),
    )


def _area(contours: tuple[Contour, ...]) -> float:
    # Holes run clockwise, their area is negative.
    return sum(area(contour.path) for contour in contours)


def _cut_length(contours: tuple[Contour, ...]) -> float:
    return sum(perimeter(contour.path) for contour in contours)


def _record(machine: Machine, figures: OutlineFigures, ribs: tuple[Rib, ...]) -> dict[str, object]:
    return {
        "design": machine.design.name,
        "outline_dxf": DXF_FILE,
        **{figure.key: figure.value for figure in figures_of(figures)},
        "ribs": [
            {
                "name": rib.name,
                "kind": rib.kind,
                "barrier": rib.barrier,
                "width_mm": round(rib.width * MM, 6),  # to a nanometre
            }
            for rib in ribs
        ],
        "version": version(),
        "design_hash": design_hash(machine.design, machine.cards),
    }
