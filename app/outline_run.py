"""A supplier's or an inspection's outline analysed in place of the designed one, side by side.

The promise is what the design's own outline gives: solved in the same run, or read from the folder
of an earlier one of the same design.
"""

import json
import tempfile
from collections.abc import Mapping
from dataclasses import dataclass, replace
from pathlib import Path
from typing import TYPE_CHECKING

from lamwright.geometry.design_file import Machine, design_hash
from lamwright.geometry.errors import LamwrightError, OutlineError
from lamwright.geometry.section import CrossSection
from lamwright.geometry.whole_file import write_text
from lamwright.postprocess.files import VERDICT_FILE, json_text, prepared_folder, staged

from .drawings import read_marked
from .lamination import section_of
from .pool import Crew, spare_cores
from .progress import SHARES, Progress, Stopwatch, silent
from .run import MOST_WORKERS, make_desk

if TYPE_CHECKING:
    from lamwright.geometry.supplier_outline import SupplierOutline
    from lamwright.postprocess.differences import FigureDifference
    from lamwright.postprocess.verdict import Verdict
    from lamwright.solver.tolerance import ToleranceName

RECORD_FILE, RIBS_FILE, PROMISE_FILE = "outline.json", "outline_ribs.csv", "promise.csv"
LARGEST_RECORD = 50_000_000  # bytes
TWO_CUTS = 2.0  # a rib has two cut edges
MM = 1e-3  # m


@dataclass(frozen=True, slots=True)
class OutlineWishes:
    """How a supplier's outline is to be read, and what it is held against."""

    file: Path
    unit_mm: float | None = None
    layers: tuple[str, ...] = ()
    promised: Path | None = None  # folder of an earlier assessment of the design itself
    rib_tolerance_mm: float | None = None  # to both sides; by default twice tolerance.cut_mm


@dataclass(frozen=True, slots=True)
class OutlineVerdict:
    """What was found, what it means, and what had been promised."""

    verdict: "Verdict"
    found: "SupplierOutline"
    tolerance: float  # m, of a rib's width to both sides
    differences: "tuple[FigureDifference, ...]"
    cautions: tuple[str, ...]

    @property
    def ribs_out(self) -> int:
        """How many ribs are not within the tolerance."""
        from lamwright.postprocess.supplier_tables import ribs_out

        return ribs_out(self.found, self.tolerance)

    @property
    def faults(self) -> tuple[str, ...]:
        """What fails whatever the limits say: a shape not analysed, ribs out of tolerance."""
        from .report_assess import supplied_faults

        return supplied_faults(len(self.found.strays), self.ribs_out)

    @property
    def passes(self) -> bool:
        """Whether all was analysed as drawn, every limit holds and every rib its tolerance."""
        return self.verdict.passes and not self.faults


def assess_outline(
    path: str | Path,
    out: str | Path,
    wishes: OutlineWishes,
    progress: Progress = silent,
    tolerance: "ToleranceName" = "normal",
    pictures: bool = True,
) -> OutlineVerdict:
    """Assess the design in the file `path` with the outline of a drawing; all goes to `out`.

    Raises:
        DesignError: the design cannot be read or drawn; one line for each fault.
        LamwrightError: the drawing is not this design's rotor, or the folder cannot be written.
        NotConverged: an iteration did not end; with its history.
    """
    machine = read_marked(Path(path), Path(out))
    section = section_of(machine)
    found = read_outline(section, wishes)
    promise = None if wishes.promised is None else promised_record(wishes.promised, machine)
    folder = prepared_folder(Path(out))
    begun = 0.0 if promise is None else 1.0
    with Crew(make_desk, min(spare_cores(), MOST_WORKERS)) as crew, staged(folder) as stage:
        from lamwright.postprocess.differences import figure_differences
        from lamwright.postprocess.supplier_tables import (
            promise_csv,
            ribs_out,
            supplier_cautions,
            supplier_record,
            supplier_ribs_csv,
        )

        from .assessment import Assessment
        from .report_assess import Supplied

        if promise is None:
            with tempfile.TemporaryDirectory(dir=stage) as beside:
                watch = Stopwatch(_part(progress, "promise: ", 0.0), SHARES)
                Assessment(machine, section, crew, None, watch, tolerance, False).written_to(
                    Path(beside)
                )
                promise = _record(Path(beside) / VERDICT_FILE)
        watch = Stopwatch(_part(progress, "", 0.5) if not begun else progress, SHARES)
        limit = rib_tolerance(machine, wishes)
        cautions = supplier_cautions(found)
        if pictures:  # before the report, which shows it
            from lamwright.postprocess.figures_deviation import write_deviation

            write_deviation(stage, machine.design.name, found)
        source = found.source
        out_of = ribs_out(found, limit)
        supplied = Supplied(wishes.file.name, source.sha256, out_of, cautions, len(found.strays))
        work = Assessment(
            machine,
            found.section,
            crew,
            None,
            watch,
            tolerance,
            pictures,
            supplied=supplied,
        )
        verdict = work.written_to(stage)
        record = _record(stage / VERDICT_FILE)
        differences = figure_differences(promise, record)
        told = {
            "design": machine.design.name,
            "design_hash": design_hash(machine.design, machine.cards),
            **supplier_record(found, limit, differences),
            "cautions": list(cautions),
        }
        write_text(stage / RECORD_FILE, json_text(told))
        write_text(stage / RIBS_FILE, supplier_ribs_csv(found, limit))
        write_text(stage / PROMISE_FILE, promise_csv(differences))
        # The verdict says whose outline it is of.
        verdict = replace(verdict, cautions=(*cautions, *verdict.cautions))
        # First of all what no figure below tells.
        record = {"analysed_as_drawn": not found.strays, **record}
        record["passes"] = verdict.passes and not supplied.faults
        record["analysed_outline"] = wishes.file.name
        record["analysed_outline_sha256"] = found.source.sha256
        record["cautions"] = list(verdict.cautions)
        write_text(stage / VERDICT_FILE, json_text(record))
    return OutlineVerdict(verdict, found, limit, differences, cautions)


def read_outline(section: CrossSection, wishes: OutlineWishes) -> "SupplierOutline":
    """The outline of a drawing held against the design's section.

    Raises:
        LamwrightError: one line with the file's name.
    """
    from lamwright.geometry.supplier_outline import supplier_outline

    try:
        return supplier_outline(section, wishes.file, wishes.unit_mm, wishes.layers)
    except OutlineError as error:
        raise LamwrightError(f"--outline {wishes.file}: {error}") from None


def rib_tolerance(machine: Machine, wishes: OutlineWishes) -> float:
    """By how much a rib's width may be off, m: as told, or both its cuts by the design's limit."""
    if wishes.rib_tolerance_mm is not None:
        return MM * wishes.rib_tolerance_mm
    return TWO_CUTS * MM * machine.design.tolerance.cut_mm


def promised_record(folder: Path, machine: Machine) -> Mapping[str, object]:
    """The verdict of an earlier run of the same design.

    Raises:
        LamwrightError: there is none, or it is of another design or another outline.
    """
    path = folder / VERDICT_FILE
    if not path.is_file():
        raise LamwrightError(
            f"--promised {folder}: no {VERDICT_FILE} there; accepted a folder of lamwright assess"
        )
    record = _record(path)
    if record.get("design_hash") != design_hash(machine.design, machine.cards):
        raise LamwrightError(
            f"--promised {folder}: its {VERDICT_FILE} is of another state of the design; assess "
            "the design anew, or leave --promised out"
        )
    if record.get("analysed_outline") is not None:
        raise LamwrightError(
            f"--promised {folder}: its {VERDICT_FILE} is of the outline "
            f"{record['analysed_outline']}, not of the design's own"
        )
    return record


def _record(path: Path) -> dict[str, object]:
    try:
        with path.open("rb") as file:
            data = file.read(LARGEST_RECORD + 1)
        record = json.loads(data) if len(data) <= LARGEST_RECORD else None
    except (OSError, ValueError, RecursionError):
        record = None
    if not isinstance(record, dict):
        raise LamwrightError(f"{path}: not a readable verdict; accepted what lamwright has written")
    return record


def _part(progress: Progress, name: str, begun: float) -> Progress:
    """Progress of half the run."""
    return lambda phase, share: progress(
        phase if phase == "start" else f"{name}{phase}", begun + 0.5 * share
    )
