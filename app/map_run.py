"""One design's flux map to one folder, and what the chapters make of it: `map`.

The points go to a store in the folder as they finish; a run that was stopped, however, goes on
there. Nothing heavy is imported at the top, so that a broken design is refused at once.
"""

from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING

from lamwright.geometry.errors import LamwrightError
from lamwright.postprocess.files import prepared_folder, staged

from .drawings import read_marked
from .lamination import section_of
from .pool import Crew, spare_cores
from .progress import Progress, Stopwatch, silent

if TYPE_CHECKING:
    from lamwright.geometry.section import CrossSection
    from lamwright.solver.tolerance import ToleranceName

    from .control_wishes import ControlWishes
    from .desk import Desk
    from .map_grid import GridWishes
    from .mapping import MapReport

MOST_WORKERS = 64
MOST_SHARE = 0.4  # of the gap, that the rotor may stand beside the axis: see `solver.eccentric`
# Of the wall time on two cores (measured on demo_24s4p_arc); each chapter as much as the last.
SHARES = {
    "start": 0.03,
    "mesh": 0.02,
    "flux map": 0.7,
    "error bars": 0.1,
    "files": 0.02,
    "pictures": 0.03,
}
CHAPTER_SHARE = 0.02
INTERRUPTED = "interrupted; the points so far are kept: the same command goes on from there"


def map_design(
    path: str | Path,
    out: str | Path,
    wishes: "GridWishes | None" = None,
    *,
    tolerance: "ToleranceName" = "normal",
    workers: int | None = None,
    progress: Progress = silent,
    eccentricity_mm: float | None = None,
    control: "ControlWishes | None" = None,
) -> "MapReport":
    """Compute the flux map of the design in `path`, and all that follows from it, into `out`.

    Args:
        path: design file.
        out: folder, made where it is missing; points of the same map that it holds are kept.
        wishes: what is asked of the grid.
        tolerance: how fine to mesh.
        workers: processes that solve; by default one for each core.
        progress: called with the phase and the share done.
        eccentricity_mm: of the rotor's axis beside the stator's, for the pull; by default a tenth
            of the gap.
        control: size and number format of the drive's tables.

    Raises:
        DesignError: the design cannot be read or drawn; one line for each fault.
        LamwrightError: a grid that cannot be, a folder that cannot be written, or one that holds
            the points of another map.
        NotConverged: an iteration did not end; what is committed stays.
        KeyboardInterrupt: with a line for the user; what is committed stays.
    """
    if workers is not None and not 1 <= workers <= MOST_WORKERS:
        raise LamwrightError(f"--workers {workers}: accepted 1 to {MOST_WORKERS}")
    machine = read_marked(Path(path), Path(out))
    section = section_of(machine)
    eccentricity = _eccentricity(eccentricity_mm, section)
    folder = prepared_folder(Path(out))
    from .map_chapters import CHAPTERS
    from .map_grid import GridWishes, map_grid
    from .map_store import PointStore
    from .mapping import MAP_FILE, mapped_machine, run_of, write_results
    from .report_files import write_report
    from .report_map import map_report

    wished = wishes or GridWishes()
    grid = map_grid(machine, section, wished)
    watch = Stopwatch(progress, {**SHARES, **{name: CHAPTER_SHARE for name, _ in CHAPTERS}})
    with PointStore(folder, run_of(machine, grid, tolerance)) as store:
        with watch.phase("start"):
            crew = Crew(make_desk, workers or spare_cores() + 1)
        try:
            with crew:
                mapped, solved = mapped_machine(
                    machine, section, grid, store, crew, watch, tolerance
                )
                mapped = replace(
                    mapped, eccentricity=eccentricity, control=control or mapped.control
                )
                with staged(folder, MAP_FILE) as stage:
                    report = write_results(mapped, solved, grid, stage, tolerance, CHAPTERS)
                    options = _again(wished, mapped.control, tolerance, eccentricity_mm)
                    write_report(map_report(report, machine, stage, tolerance, options), stage)
                    return report
        except KeyboardInterrupt:
            raise KeyboardInterrupt(INTERRUPTED) from None


def _again(
    wishes: "GridWishes", control: "ControlWishes", tolerance: str, offset_mm: float | None
) -> str:
    """Options of the command that computes the same: what was chosen is chosen again."""
    words = [f"--out FOLDER --tolerance {tolerance}"]
    if wishes.points is not None:
        words.append("--points {}x{}".format(*wishes.points))
    for name, axis in (("i-d", wishes.i_d), ("i-q", wishes.i_q)):
        words += [f"--{name}={','.join(map(repr, axis))}"] if axis else []
    if wishes.positions is not None:
        words.append(f"--positions {wishes.positions}")
    if offset_mm is not None:
        words.append(f"--eccentricity-mm {offset_mm!r}")
    words.append("--table-size {}x{}".format(*control.table_size))
    return " ".join([*words, f"--c-format {control.number_format.text}"])


def _eccentricity(wish_mm: float | None, section: "CrossSection") -> float | None:
    """The offset asked for in m, checked before anything is solved."""
    if wish_mm is None:
        return None
    most = 1e3 * MOST_SHARE * section.gap
    if not 0.0 < wish_mm <= most:
        remedy = f"accepted above 0 to {most:.4g}, {MOST_SHARE:g} of the gap"
        raise LamwrightError(f"--eccentricity-mm {wish_mm:g}: the rotor would touch; {remedy}")
    return 1e-3 * wish_mm


def make_desk() -> "Desk":
    """An empty desk; what it and a map need is imported where it is made."""
    from . import mapping  # noqa: F401
    from .desk import Desk

    return Desk()
