"""One design to one folder, on as many cores as there are: `assess`.

Nothing heavy is imported at the top. First a process is started that imports what writes the DXF,
a second, beside this one's imports. Then the design is read and drawn, so that a broken one is
refused at once, and the workers are started: as copies of this process once it has imported what
all need, or, where that is not safe, anew, their imports beside its own.
"""

from collections.abc import Callable
from pathlib import Path
from typing import TYPE_CHECKING

from .imports import quick_imports
from .outline_work import early_outliner
from .pool import Crew, spare_cores

if TYPE_CHECKING:
    from lamwright.postprocess.verdict import Verdict
    from lamwright.solver.tolerance import ToleranceName

    from .desk import Desk
    from .progress import Progress
    from .rib_work import RibsReport

MOST_WORKERS = 3  # beside this process; a design has six chains to share
SHARE_BEFORE_RIBS = 0.4  # of the wall time, measured on demo_24s4p_arc
SHARE_BEFORE_PICTURES = 0.65  # where they are drawn last, likewise


def assess(
    path: str | Path,
    out: str | Path,
    progress: "Progress | None" = None,
    tolerance: "ToleranceName" = "normal",
    pictures: bool = True,
    on_ribs: "Callable[[RibsReport], None] | None" = None,
    on_verdict: Callable[[Path], None] | None = None,
) -> "Verdict":
    """Assess the design in the file `path`; all results go to the folder `out`.

    Args:
        path: design file.
        out: folder, made where it is missing.
        progress: called with the phase and the share done.
        tolerance: how fine to mesh; `solver.tolerance` says what each name promises.
        pictures: whether to draw the figures, 40 % of the processors' time.
        on_ribs: called with what `ribs` would say, whose files then go to the folder too; without
            it they are not made.
        on_verdict: called with a folder where verdict and tables stand as soon as they do; the
            pictures are drawn after it, not beside, so that who waits for figures waits less.

    Returns:
        The verdict, as written to `verdict.json`.

    Raises:
        DesignError: the design cannot be read or drawn; one line for each fault.
        LamwrightError: the folder cannot be written.
        NotConverged: an iteration did not end; with its history.
    """
    with early_outliner() as hired:
        with quick_imports():
            from lamwright.postprocess.files import prepared_folder, staged

            from .drawings import read_marked
            from .lamination import section_of
            from .progress import SHARES, Stopwatch, silent

            shares = SHARES if on_ribs is None else _shares_with_ribs()
            if on_verdict is not None:
                shares = {phase: SHARE_BEFORE_PICTURES * share for phase, share in shares.items()}
                shares["pictures"] = 1.0 - SHARE_BEFORE_PICTURES
            watch = Stopwatch(progress or silent, shares)
            machine = read_marked(Path(path), Path(out))
            section = section_of(machine)
            folder = prepared_folder(Path(out))
            with watch.phase("start"):
                if pictures:  # before the workers are copied, which need it too
                    from lamwright.postprocess.figures import write_figure  # noqa: F401
                crew = Crew(make_desk, min(spare_cores(), MOST_WORKERS))
                from .assessment import Assessment
        with crew, staged(folder) as stage:
            outliner = hired()  # only now: its threads here would forbid the crew's copies
            work = Assessment(
                *(machine, section, crew, outliner, watch, tolerance, pictures, on_ribs),
                on_verdict=on_verdict,
            )
            return work.written_to(stage)


def _shares_with_ribs() -> dict[str, float]:
    from .progress import SHARES
    from .rib_chapters import CHAPTERS

    own = {phase: (1.0 - SHARE_BEFORE_RIBS) / len(CHAPTERS) for phase, _ in CHAPTERS}
    return {phase: SHARE_BEFORE_RIBS * share for phase, share in SHARES.items()} | own


def make_desk() -> "Desk":
    """An empty desk; what it and an assessment need is imported where it is made."""
    from . import assessment  # noqa: F401
    from .desk import Desk

    return Desk()
