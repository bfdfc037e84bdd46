"""One design's ribs to one folder: `ribs`.

Nothing heavy is imported at the top, so that a broken design is refused at once.
"""

from pathlib import Path
from typing import TYPE_CHECKING

from lamwright.geometry.errors import LamwrightError
from lamwright.postprocess.files import prepared_folder, staged

from .drawings import read_marked
from .lamination import section_of
from .progress import Progress, Stopwatch, silent

if TYPE_CHECKING:
    from lamwright.solver.tolerance import ToleranceName

    from .rib_work import RibsReport

CHAPTER_SHARE = 0.2  # of the wall time, measured on demo_24s4p_arc
SHARES = {"start": 0.1, "stress": 0.3}


def ribs_design(
    path: str | Path,
    out: str | Path,
    *,
    tolerance: "ToleranceName" = "normal",
    pictures: bool = True,
    overspeed_share: float = 0.0,
    progress: Progress = silent,
) -> "RibsReport":
    """Everything about the ribs of the design in `path` into the folder `out`.

    Args:
        path: design file.
        out: folder, made where it is missing.
        tolerance: how fine to mesh.
        pictures: whether to draw.
        overspeed_share: of the starts, that go up to overspeed.
        progress: called with the phase and the share done.

    Raises:
        DesignError: the design cannot be read or drawn; one line for each fault.
        LamwrightError: the folder cannot be written, or an option cannot be.
        NotConverged: the elastic stress did not settle.
    """
    if not 0.0 <= overspeed_share <= 1.0:
        raise LamwrightError(f"--overspeed-share {overspeed_share:g}: accepted 0 to 1")
    machine = read_marked(Path(path), Path(out))
    section = section_of(machine)
    folder = prepared_folder(Path(out))
    from .rib_chapters import CHAPTERS

    watch = Stopwatch(progress, {**SHARES, **{name: CHAPTER_SHARE for name, _ in CHAPTERS}})
    with watch.phase("start"):
        from .rib_work import RIBS_FILE, ribbed_machine, write_results
        from .ribbed import RibWishes
    ribbed = ribbed_machine(
        machine, section, watch, tolerance, RibWishes(overspeed_share), pictures
    )
    with staged(folder, RIBS_FILE) as stage:
        return write_results(ribbed, stage, tolerance, CHAPTERS)
