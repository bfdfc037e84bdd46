"""Where the stator of a first design comes from: a design file, a drawing, or its main sizes."""

import os
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path

from .design import StatorDesign
from .first_stator import MainSizes, stator_table
from .first_text import DesignTable, Line, design_data
from .stator_file import StatorParts, read_stator, stator_of_drawing


@dataclass(frozen=True, slots=True)
class StatorSource:
    """A stator with the tables that a design file will state it by."""

    stator: StatorDesign
    table: DesignTable
    winding: DesignTable | None = None  # where the source has one
    poles: int | None = None  # that the source's winding is for


def from_sizes(sizes: MainSizes, poles: int, sheet: float, stacking: float) -> StatorSource:
    """A stator with slots by formula.

    Raises:
        DesignError: there is no room for yoke and slots.
    """
    table = stator_table(sizes, poles, sheet, stacking)
    return StatorSource(StatorDesign.model_validate(design_data([table])["stator"]), table)


def from_file(path: Path, folder: Path) -> StatorSource:
    """The stator, and the winding where there is one, of a design file.

    Args:
        path: TOML with the tables [stator] and perhaps [winding] and [rotor].
        folder: of the file to be written; a drawing's name will count from there.

    Raises:
        DesignError: the file cannot be read or used; one line for each fault.
    """
    parts = read_stator(path)
    winding = None
    if parts.winding is not None:
        winding = _table("winding", parts.winding, f"Winding: as in {path.name}.")
    return StatorSource(parts.stator, _stator(parts, path, folder), winding, parts.poles)


def from_drawing(
    path: Path, stack_length: float, unit_mm: float | None, folder: Path
) -> StatorSource:
    """The stator of a DXF drawing.

    Args:
        path: of the drawing.
        stack_length: in m.
        unit_mm: mm per unit of the drawing, where the file states none.
        folder: as above.

    Raises:
        DesignError: no stator is recognised; one line.
    """
    parts = stator_of_drawing(path, 1e3 * stack_length, unit_mm)
    return StatorSource(parts.stator, _stator(parts, path, folder))


def relative_name(path: Path, folder: Path) -> str:
    """A file's name as counted from a folder, with slashes; absolute where there is no way."""
    try:
        return Path(os.path.relpath(path.resolve(), folder.resolve())).as_posix()
    except ValueError:  # another drive
        return path.resolve().as_posix()


def _stator(parts: StatorParts, path: Path, folder: Path) -> DesignTable:
    values = dict(parts.keys)
    if "outline_dxf" in values:
        drawing = path.parent / str(values["outline_dxf"])
        values["outline_dxf"] = relative_name(drawing, folder)
    return _table("stator", values, f"Stator: as in {path.name}.")


def _table(header: str, values: Mapping[str, object], about: str) -> DesignTable:
    lines = []
    for key, value in values.items():
        assert isinstance(value, str | int | float | tuple | Mapping)
        lines.append(Line(key, value))
    return DesignTable(header, tuple(lines), about)
