"""Whether a package is still what was released: every change named, and placed where it has one.

Three questions, each by its own evidence. Are the files those of the manifest (hashes)? Is the
manifest what the design in the package gives: its figures are made again, those promised are the
verdict's? Are DXF and solids those of the design, whatever the manifest says of them? On request
the design is solved again, so that a promise changed everywhere along shows too.
"""

from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path, PurePosixPath

from lamwright.geometry.design_file import Machine, read_machine
from lamwright.geometry.errors import LamwrightError
from lamwright.geometry.nesting import Strip
from lamwright.geometry.punch_options import PunchOptions
from lamwright.postprocess.files import VERDICT_FILE
from lamwright.postprocess.sheet_job import SheetOptions

from .lamination import section_of
from .progress import Progress, silent
from .release_files import drawing_notes, dxf_faults
from .release_manifest import (
    FORM,
    MANIFEST_FILE,
    Promise,
    Record,
    file_sha256,
    package_number,
    promise_of,
    read_record,
    seal_of,
)
from .release_parts import Part, parts_of
from .release_record import Order, differences, release_record
from .release_solids import kernel, solid_faults
from .verify_solved import solved_changes
from .version import version

A_PACKAGE = "the folder of a release"
OF_FILES = ("files", "seal", "design_file")  # of the manifest, not made from the design


@dataclass(frozen=True, slots=True)
class VerifyReport:
    """What was looked at, and one line for each change."""

    folder: Path
    number: str  # of the package, as its manifest is now
    status: str
    files: int
    changes: tuple[str, ...]
    notes: tuple[str, ...]

    @property
    def is_whole(self) -> bool:
        """Whether nothing was changed."""
        return not self.changes


def verify(folder: str | Path, solve: bool = False, progress: Progress = silent) -> VerifyReport:
    """Compare a package with its manifest and with the design in it.

    Args:
        folder: of the package.
        solve: whether to assess the design again and compare what is promised, and to draw its
            drawing again.
        progress: called with the phase and the share done.

    Raises:
        LamwrightError: there is no manifest that can be read.
    """
    folder = Path(folder)
    path = folder / MANIFEST_FILE
    manifest = read_record(path, A_PACKAGE)
    if manifest.get("form") != FORM:
        raise LamwrightError(f"{path}: form = {manifest.get('form')!r}: not known; accepted {FORM}")
    progress("hashes", 0.0)
    changes = [*_seal_changes(manifest), *_file_changes(folder, manifest)]
    notes: list[str] = []
    progress("design", 0.1)
    made = _made(folder, manifest, changes)
    if made is not None:
        if manifest.get("version") != version():
            notes.append(f"made by version {manifest.get('version')}, verified by {version()}")
        rest = {key: value for key, value in manifest.items() if key not in OF_FILES}
        due = release_record(made.machine, made.parts, made.promise, made.order)
        due |= {"version": made.promise.record.get("version"), "kernel": manifest.get("kernel")}
        changes += [f"{MANIFEST_FILE}: {line}" for line in differences(rest, due)]
        progress("drawings", 0.3)
        drawn = (made.machine, made.parts, made.promise, made.order.sheet)
        changes += dxf_faults(*drawn, folder)
        progress("solids", 0.4)
        other = list(solid_faults(made.parts, folder, made.order.sheet.date))
        if manifest.get("kernel") == kernel():
            changes += other
        else:
            notes += [*other, f"solids made by {manifest.get('kernel')}, compared by {kernel()}"]
        if solve:
            solved = solved_changes(made.machine, made.promise, progress)
            (changes if manifest.get("version") == version() else notes).extend(solved)
            notes += drawing_notes(*drawn, folder)
    text = path.read_text(encoding="utf-8")
    files = manifest.get("files")
    return VerifyReport(
        folder=folder,
        number=package_number(text),
        status=str(manifest.get("status")),
        files=len(files) if isinstance(files, dict) else 0,
        changes=tuple(changes),
        notes=tuple(notes),
    )


@dataclass(frozen=True, slots=True)
class _Made:
    """What the design in the package gives."""

    machine: Machine
    parts: tuple[Part, ...]
    promise: Promise
    order: Order


def _seal_changes(manifest: Record) -> Iterator[str]:
    if manifest.get("seal") != seal_of(manifest):
        yield f"{MANIFEST_FILE}: the seal does not fit: the manifest was changed"


def _file_changes(folder: Path, manifest: Record) -> Iterator[str]:
    stated = manifest.get("files")
    if not isinstance(stated, dict):
        yield f"{MANIFEST_FILE}: files: missing"
        return
    for name, digest in stated.items():
        file = folder / name
        if not _is_inside(name):
            yield f"{MANIFEST_FILE}: files: {name!r} is no place in this folder"
        elif not file.is_file():
            yield f"{name}: missing"
        elif file_sha256(file) != digest:
            yield f"{name}: changed, its hash is not the manifest's"
    for file in sorted(folder.rglob("*")):
        name = file.relative_to(folder).as_posix()
        if not file.is_dir() and name != MANIFEST_FILE and name not in stated:
            yield f"{name}: not of this package"


def _is_inside(name: str) -> bool:
    place = PurePosixPath(name)
    return not place.is_absolute() and ".." not in place.parts and "\\" not in name


def _made(folder: Path, manifest: Record, changes: list[str]) -> _Made | None:
    """What the package's design gives; None, and why, where it cannot be read."""
    name = manifest.get("design_file")
    if not isinstance(name, str) or not _is_inside(name):
        changes.append(f"{MANIFEST_FILE}: design_file: no place in this folder")
        return None
    try:
        order = _order(manifest)
        machine = read_machine(folder / name)
        parts = parts_of(machine, section_of(machine), order.punch)
        record = read_record(folder / VERDICT_FILE, "the verdict of a release")
        promise = promise_of(record, machine.design.limits)
    except LamwrightError as error:
        prefix = f"{folder}/"
        changes += [line.removeprefix(prefix) for line in str(error).split("\n")]
        return None
    if record.get("design_hash") != manifest.get("design_hash"):
        changes.append(f"{VERDICT_FILE}: design_hash: of another design than the manifest's")
    return _Made(machine, parts, promise, order)


def _order(manifest: Record) -> Order:
    """The order as the manifest states it.

    Raises:
        LamwrightError: it states something that no release has.
    """
    punch, sheet, nesting = (manifest.get(key) for key in ("punch", "drawing", "nesting"))
    try:
        strip = None
        if isinstance(nesting, dict):
            width, bridge, edge = (
                float(nesting[key]) / 1e3 for key in ("strip_width_mm", "bridge_mm", "edge_mm")
            )
            strip = Strip(width, bridge, edge)
        if not isinstance(punch, dict) or not isinstance(sheet, dict):
            raise TypeError
        remarks = sheet["remarks"]
        return Order(
            PunchOptions(**punch), SheetOptions(**{**sheet, "remarks": tuple(remarks)}), strip
        )
    except (TypeError, KeyError, ValueError) as error:
        fault = str(error) if isinstance(error, LamwrightError) else "not those of a release"
        raise LamwrightError(f"{MANIFEST_FILE}: punch, drawing or nesting: {fault}") from None
