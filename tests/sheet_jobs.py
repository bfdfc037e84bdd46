"""Shipped designs as they are drawn for the supplier, each composed and written once a session."""

import functools
import tempfile
from dataclasses import replace
from pathlib import Path

from lamwright.geometry.contours import lamination_contours
from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design_file import design_hash, read_machine
from lamwright.geometry.punch_layers import stator_lamination
from lamwright.postprocess.sheet import composed, drawing_sheet
from lamwright.postprocess.sheet_fitting import Sheet
from lamwright.postprocess.sheet_job import SheetJob, SheetOptions

DESIGNS = Path(__file__).parents[1] / "designs"
QUICK = ("demo_24s4p_arc", "blower_36s2p", "hoist_60s10p")


@functools.cache
def job_of(name: str, **options: object) -> SheetJob:
    """A shipped design as it is drawn."""
    path = DESIGNS / f"{name}.toml"
    machine = read_machine(path if path.exists() else DESIGNS / "gallery" / path.name)
    section = cross_section(machine.design)
    digest = design_hash(machine.design, machine.cards)
    contours = lamination_contours(section)
    wishes = SheetOptions(part_number="4711", **options)  # type: ignore[arg-type]
    return SheetJob(machine.design, section, contours, machine.rotor_steel, digest, wishes)


@functools.cache
def stator_job_of(name: str, **options: object) -> SheetJob:
    """The stator of a shipped design as it is drawn."""
    rotor = job_of(name, **options)
    path = DESIGNS / f"{name}.toml"
    machine = read_machine(path if path.exists() else DESIGNS / "gallery" / path.name)
    contours = stator_lamination(rotor.section)
    return replace(rotor, contours=contours, steel=machine.stator_steel, part="stator")


@functools.cache
def sheet_of(name: str) -> Sheet:
    """A shipped design's drawing."""
    return composed(job_of(name))


@functools.cache
def written_sheet(name: str) -> tuple[Path, Path]:
    """PDF and SVG of a shipped design's drawing."""
    folder = Path(_folder().name)
    pdf, svg = folder / f"{name}.pdf", folder / f"{name}.svg"
    drawing_sheet(job_of(name), pdf, svg)
    return pdf, svg


@functools.cache
def _folder() -> "tempfile.TemporaryDirectory[str]":
    """Goes with the process."""
    return tempfile.TemporaryDirectory()
