"""The files of a package that are drawn: DXF and the drawing, and whether they are true."""

from collections.abc import Iterator, Sequence
from dataclasses import replace
from itertools import zip_longest
from pathlib import Path
from tempfile import TemporaryDirectory

from lamwright.geometry.contour_changes import contour_changes
from lamwright.geometry.design_file import Machine, design_hash
from lamwright.geometry.dxf_cut import read_cut
from lamwright.geometry.dxf_release import FORMS, plain_text, write_release
from lamwright.geometry.errors import LamwrightError
from lamwright.postprocess.sheet import drawing_sheet
from lamwright.postprocess.sheet_job import SheetJob, SheetOptions

from .lamination import section_of
from .release_manifest import NOT_PASSED, Promise
from .release_parts import Part

DRAWING_FILES = ("rotor.pdf", "rotor.svg", "stator.pdf", "stator.svg")
# The drawing measures by the layers of `geometry.contours`.
ON_SHEET = {"MAGNET_POCKETS": "BARRIERS", "KEYWAY": "BORE"}
MM = 1e3  # mm per m


def dxf_name(part: Part, form: str) -> str:
    """File name of a part's DXF."""
    return f"{part.name}_{form.lower()}.dxf"


def dxf_texts(machine: Machine, part: Part, promise: Promise, wishes: SheetOptions) -> list[str]:
    """The notes in a part's DXF; no date, no figure, so that they fit on one glance."""
    number = f", part {wishes.part_number}" if wishes.part_number else ""
    revision = f", revision {wishes.revision}" if wishes.revision else ""
    lines = [
        f"{machine.design.name}: {part.name} lamination{number}{revision}",
        f"design {design_hash(machine.design, machine.cards)[:16]}, millimetres, "
        f"sheet {part.thickness * MM:g} mm, {part.steel.name}",
    ]
    if part.tool != part.sheet:
        lines.append("contours are the path of the tool: its offset is in them")
    return lines if promise.passes else [_not_passed(promise), *lines]


def write_dxfs(
    machine: Machine, parts: Sequence[Part], promise: Promise, wishes: SheetOptions, folder: Path
) -> None:
    """Write each part's lamination in every form of DXF."""
    for part in parts:
        texts = dxf_texts(machine, part, promise, wishes)
        for form in FORMS:
            write_release(part.tool, folder / dxf_name(part, form), form, texts, part.axis)


def _not_passed(promise: Promise) -> str:
    return f"{NOT_PASSED}: the design fails {', '.join(promise.missed)}"


def write_drawing(
    machine: Machine, parts: Sequence[Part], promise: Promise, wishes: SheetOptions, folder: Path
) -> None:
    """Write each part's drawing as PDF and SVG; of a design that fails they say so."""
    options = wishes
    if not promise.passes:
        warning = f"{_not_passed(promise)}. NOT FOR RUNNING ROTORS."
        options = replace(wishes, status=NOT_PASSED, warning=warning)
    section, digest = section_of(machine), design_hash(machine.design, machine.cards)
    for part in parts:
        contours = part.sheet
        if part.name == "rotor":
            contours = tuple(replace(c, layer=ON_SHEET.get(c.layer, c.layer)) for c in contours)
        job = SheetJob(machine.design, section, contours, part.steel, digest, options, part.name)
        drawing_sheet(job, folder / f"{part.name}.pdf", folder / f"{part.name}.svg")


def drawing_notes(
    machine: Machine, parts: Sequence[Part], promise: Promise, wishes: SheetOptions, folder: Path
) -> Iterator[str]:
    """One line for each file of the drawing that is not, byte for byte, what is drawn now.

    No change for sure: other versions of the library that draws write other bytes.
    """
    with TemporaryDirectory() as made:
        write_drawing(machine, parts, promise, wishes, Path(made))
        for name in DRAWING_FILES:
            file = folder / name
            if file.is_file() and file.read_bytes() != (Path(made) / name).read_bytes():
                yield f"{name}: not byte for byte what is drawn here; compare the two by eye"


def dxf_faults(
    machine: Machine, parts: Sequence[Part], promise: Promise, wishes: SheetOptions, folder: Path
) -> list[str]:
    """One line for each place where a DXF in the folder is not the parts'."""
    lines: list[str] = []
    for part in parts:
        texts = dxf_texts(machine, part, promise, wishes)
        for form in FORMS:
            lines += _dxf_faults(part, dxf_name(part, form), texts, folder)
    return lines


def _dxf_faults(part: Part, name: str, texts: Sequence[str], folder: Path) -> Iterator[str]:
    if not (folder / name).is_file():
        return
    try:
        found = read_cut(folder / name)
    except LamwrightError as error:
        yield str(error).replace(str(folder / name), name)
        return
    yield from (f"{name}: {line}" for line in found.strange)
    for change in contour_changes(part.tool, found.contours):
        yield f"{name}: {change.text}"
    for due, note in zip_longest(map(plain_text, texts), found.notes):
        if due != note:
            yield f"{name}: note {note!r}: made {due!r}"
