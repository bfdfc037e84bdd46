"""The supplier's package: everything a lamination shop is sent, made from one design.

What is punched is what was analysed: the contours of the drawing, the DXF and the solids are those
of the cross-section that the verdict is of, with the order's allowances. Every DXF is read back and
compared, every solid's volume too, before anything stands in the folder. The manifest comes last:
where it stands, all files beside it belong to it.
"""

import json
from dataclasses import dataclass, field
from pathlib import Path
from tempfile import TemporaryDirectory
from typing import TYPE_CHECKING

from lamwright.geometry.design_file import Machine, design_hash, read_machine
from lamwright.geometry.errors import LamwrightError
from lamwright.geometry.whole_file import write_text
from lamwright.postprocess.files import VERDICT_FILE, json_text, prepared_folder

from .lamination import section_of
from .progress import Progress, silent
from .release_files import dxf_faults, write_drawing, write_dxfs
from .release_manifest import (
    MANIFEST_FILE,
    Promise,
    Record,
    manifest_text,
    package_number,
    promise_of,
    read_record,
)
from .release_parts import parts_of
from .release_record import Order, nesting_record, release_record
from .release_solids import write_solids
from .release_source import Copies, copies_of
from .release_stage import earlier_files, hashes, staged_package
from .version import version

if TYPE_CHECKING:
    from lamwright.solver.tolerance import ToleranceName

SHARE_OF_VERDICT = 0.8  # of the wall time
A_VERDICT = "the verdict.json of an assess"


@dataclass(frozen=True, slots=True)
class ReleaseWishes:
    """What `release` is asked for beside the design."""

    order: Order = field(default_factory=Order)
    verdict: Path | None = None  # of the same design by the same version; else it is assessed
    tolerance: "ToleranceName" = "normal"
    despite_limits: bool = False


@dataclass(frozen=True, slots=True)
class ReleaseReport:
    """What was released: the manifest, and the number by which both sides know the package."""

    folder: Path
    manifest: Record
    number: str
    passes: bool


def release(
    path: str | Path,
    out: str | Path,
    wishes: ReleaseWishes | None = None,
    progress: Progress = silent,
) -> ReleaseReport:
    """Write the package of the design in `path` to the folder `out`.

    Raises:
        DesignError: the design, an allowance or the strip cannot be used; one line for each fault.
        LamwrightError: a limit fails and that was not accepted, the verdict is of another design,
            or the folder holds something else.
        NotConverged: the verdict's iterations did not end.
    """
    path, out, wishes = Path(path), Path(out), wishes or ReleaseWishes()
    progress("outline", 0.0)
    machine = read_machine(path)
    section = section_of(machine)
    copies = copies_of(machine)
    parts = parts_of(machine, section, wishes.order.punch)
    nesting_record(parts, wishes.order.strip)  # a strip too narrow is refused before any work
    folder = prepared_folder(out)
    earlier = earlier_files(folder)
    promise = _promise(machine, wishes, progress)
    if not promise.passes and not wishes.despite_limits:
        raise LamwrightError(
            f"{path}: fails {', '.join(f'limits.{key}' for key in promise.missed)}; nothing was "
            "released; change the design, or --despite-limits marks the package NOT PASSED"
        )
    progress("files", SHARE_OF_VERDICT)
    with staged_package(folder, earlier) as stage:
        _copy(machine, copies, stage)
        write_text(stage / VERDICT_FILE, json_text(promise.record))
        write_dxfs(machine, parts, promise, wishes.order.sheet, stage)
        write_solids(parts, stage, wishes.order.sheet.date)
        write_drawing(machine, parts, promise, wishes.order.sheet, stage)
        faults = dxf_faults(machine, parts, promise, wishes.order.sheet, stage)
        if faults:
            raise LamwrightError("\n".join(faults))
        record = {
            **release_record(machine, parts, promise, wishes.order),
            "design_file": copies.design,
            "files": hashes(stage),
        }
        text = manifest_text(record)
        write_text(stage / MANIFEST_FILE, text)
    return ReleaseReport(folder, record, package_number(text), promise.passes)


def _copy(machine: Machine, copies: Copies, stage: Path) -> None:
    """Copies that read as the same design, or the files were changed while it was released."""
    copies.write_to(stage)
    again = read_machine(stage / copies.design)
    if _hash(again) != _hash(machine):
        raise LamwrightError(f"{machine.path}: was changed meanwhile; start again")


def _promise(machine: Machine, wishes: ReleaseWishes, progress: Progress) -> Promise:
    """The verdict's promise: of the file that was given, or of an assessment made now."""
    limits = machine.design.limits
    if wishes.verdict is not None:
        return promise_of(fresh_record(machine, wishes.verdict), limits)
    from .run import assess

    def told(phase: str, share: float) -> None:
        progress(phase, SHARE_OF_VERDICT * share)

    with TemporaryDirectory() as folder:
        assess(machine.path, folder, told, wishes.tolerance, pictures=False)
        record = json.loads((Path(folder) / VERDICT_FILE).read_text(encoding="utf-8"))
    if record["design_hash"] != _hash(machine):
        raise LamwrightError(f"{machine.path}: was changed meanwhile; start again")
    return promise_of(record, limits)


def fresh_record(machine: Machine, path: Path) -> Record:
    """The verdict in a file, if it is of this design and by this version.

    Raises:
        LamwrightError: it is not, or cannot be read.
    """
    record = read_record(path, A_VERDICT)
    for key, due in (("design_hash", _hash(machine)), ("version", version())):
        if record.get(key) != due:
            what = "another design" if key == "design_hash" else "another version"
            raise LamwrightError(f"{path}: {key}: of {what}; assess {machine.path} again")
    try:
        promise_of(record, machine.design.limits)
    except LamwrightError as error:
        raise LamwrightError(f"{path}: {error}") from None
    return record


def _hash(machine: Machine) -> str:
    return design_hash(machine.design, machine.cards)
