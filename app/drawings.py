"""A user's drawings: listed and drawn before use, or drawn with the place where they fail."""

from dataclasses import dataclass
from functools import partial
from pathlib import Path

from lamwright.geometry.curves import Edge
from lamwright.geometry.design_drawing import OutlineKeys
from lamwright.geometry.design_file import Machine, read_machine
from lamwright.geometry.errors import DrawingError, DrawingMark, OutlineError
from lamwright.geometry.outline_report import rotor_lines, stator_lines
from lamwright.postprocess.files import prepared_folder

FAULT_NAME = "drawing_fault"  # of the picture, without ending
LONGEST_TITLE = 150  # characters that a picture's head has room for


@dataclass(frozen=True, slots=True)
class Recognised:
    """What was recognised in one drawing, and the picture that shows it."""

    part: str
    file: str
    lines: tuple[tuple[str, str], ...]
    picture: str


def read_marked(path: Path, out: Path) -> Machine:
    """The machine of a design file; a drawing that cannot be used is drawn, its fault marked.

    Raises:
        DesignError: the design cannot be read; a DrawingError names the picture in `out`.
    """
    try:
        return read_machine(path)
    except DrawingError as error:
        if not error.marks:
            raise
        picture = _write_fault(error.marks[0], prepared_folder(out))
        if picture is None:
            raise
        lines = str(error).split("\n")
        said = [
            f"{line}; marked in {picture}" if error.marks[0].text in line else line
            for line in lines
        ]
        raise DrawingError("\n".join(said), error.marks) from None


def write_recognised(machine: Machine, folder: Path) -> tuple[Recognised, ...]:
    """Draw what was recognised in each drawing of a machine, as PNG and SVG, and list it."""
    stator, rotor = machine.design.stator, machine.design.rotor
    found = []
    if stator.outline is not None:
        from lamwright.postprocess.figures import found_stator_figure, write_figure

        title, edges = _heading(machine, "stator", stator)
        compose = partial(found_stator_figure, title, edges, stator.outline.drawing)
        picture, _ = write_figure(folder, "stator_recognised", compose)
        lines = stator_lines(stator.outline)
        found.append(Recognised("stator", str(stator.outline_dxf), lines, picture.name))
    if rotor.outline is not None:
        from lamwright.postprocess.figures import found_rotor_figure, write_figure

        title, edges = _heading(machine, "rotor", rotor)
        compose = partial(found_rotor_figure, title, edges, rotor.outline.drawing, rotor.poles)
        picture, _ = write_figure(folder, "rotor_recognised", compose)
        lines = rotor_lines(rotor.outline)
        found.append(Recognised("rotor", str(rotor.outline_dxf), lines, picture.name))
    return tuple(found)


def _heading(machine: Machine, part: str, keys: OutlineKeys) -> tuple[str, tuple[Edge, ...]]:
    """The picture's title, and the drawing's pieces once more: the design does not keep them."""
    path = machine.path.parent / str(keys.outline_dxf)
    edges = _edges(path, keys.outline_unit_mm, keys.outline_layers)
    return f"{machine.design.name}: {part} recognised in {path.name}", edges


def _write_fault(mark: DrawingMark, folder: Path) -> Path | None:
    """The picture of a fault; None where the drawing cannot be read at all."""
    from lamwright.postprocess.figures import fault_figure, write_figure

    try:
        edges = _edges(mark.path, mark.unit_mm, mark.layers)
    except OutlineError:
        return None
    title = mark.text if len(mark.text) <= LONGEST_TITLE else f"{mark.text[:LONGEST_TITLE]}..."
    png, _ = write_figure(
        folder, FAULT_NAME, lambda style: fault_figure(title, edges, mark.place, style)
    )
    return png


def _edges(path: Path, unit_mm: float | None, layers: tuple[str, ...]) -> tuple[Edge, ...]:
    from lamwright.geometry.dxf_reader import read_pieces

    return read_pieces(path, unit_mm, layers).edges
