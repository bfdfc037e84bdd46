"""One design's ribs to one folder: `ribs`.

Nothing heavy is imported at the top, so that a broken design is refused at once.
"""

from functools import partial
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

CHAPTERS_SHARE = 0.6  # of the wall time, all together, measured on demo_24s4p_arc
SHARES = {"start": 0.1, "stress": 0.3}
MOST_TEETH_MASS = 10.0  # a slot full of copper beside a thin tooth has about 4
SEARCH, PRICE = "thinnest ribs", "price of ribs"
SEARCH_TIME, PRICE_TIME = 0.5, 1.6  # times all the rest, measured on demo_36s6p_arc


def ribs_design(
    path: str | Path,
    out: str | Path,
    *,
    tolerance: "ToleranceName" = "normal",
    pictures: bool = True,
    overspeed_share: float = 0.0,
    rib_factor: float | None = None,
    teeth_mass_factor: float | None = None,
    progress: Progress = silent,
) -> "RibsReport":
    """Everything about the ribs of the design in `path` into the folder `out`.

    Args:
        path: design file.
        out: folder, made where it is missing.
        tolerance: how fine to mesh.
        pictures: whether to draw.
        overspeed_share: of the starts, that go up to overspeed.
        rib_factor: least rib width over the sheet's thickness, to find the thinnest ribs too.
        teeth_mass_factor: mass of the stator's teeth with winding over the bare ones, for modes.
        progress: called with the phase and the share done.

    Raises:
        DesignError: the design cannot be read or drawn; one line for each fault. Or the thinnest
            ribs are asked for and no widths hold.
        LamwrightError: the folder cannot be written, or an option cannot be.
        NotConverged: the elastic stress did not settle.
    """
    if not 0.0 <= overspeed_share <= 1.0:
        raise LamwrightError(f"--overspeed-share {overspeed_share:g}: accepted 0 to 1")
    if teeth_mass_factor is not None and not 1.0 <= teeth_mass_factor <= MOST_TEETH_MASS:
        raise LamwrightError(
            f"--teeth-mass-factor {teeth_mass_factor:g}: accepted 1 to {MOST_TEETH_MASS:g}"
        )
    machine = read_marked(Path(path), Path(out))
    section = section_of(machine)
    folder = prepared_folder(Path(out))
    from .rib_chapters import CHAPTERS

    chapters = CHAPTERS
    own = {name: CHAPTERS_SHARE / len(CHAPTERS) for name, _ in CHAPTERS}
    shares = {**SHARES, **own}
    if rib_factor is not None:
        shares = {**SHARES, SEARCH: SEARCH_TIME, **own, PRICE: PRICE_TIME}
        whole = sum(shares.values())
        shares = {name: share / whole for name, share in shares.items()}
    watch = Stopwatch(progress, shares)
    with watch.phase("start"):
        from .rib_work import RIBS_FILE, ribbed_machine, write_results
        from .ribbed import RibWishes
    wishes = RibWishes(overspeed_share, teeth_mass_factor)
    ribbed = ribbed_machine(machine, section, watch, tolerance, wishes, pictures)
    if rib_factor is not None:
        from .thin import thin_chapter, thinned_ribs

        # Before the chapters and no chapter itself: a refusal ends the run.
        with watch.phase(SEARCH):
            thinned = thinned_ribs(ribbed, rib_factor)
        chapters = (*chapters, (PRICE, partial(thin_chapter, thinned, tolerance)))
    with staged(folder, RIBS_FILE) as stage:
        report = write_results(ribbed, stage, tolerance, chapters)
        if pictures:
            from .report_files import write_report
            from .report_ribs import ribs_report

            thin = "" if rib_factor is None else f" --thin --rib-factor {rib_factor:g}"
            options = f"--out FOLDER --tolerance {tolerance}"
            if overspeed_share:
                options += f" --overspeed-share {overspeed_share:g}"
            if teeth_mass_factor is not None:
                options += f" --teeth-mass-factor {teeth_mass_factor:g}"
            write_report(ribs_report(report, machine, stage, tolerance, options + thin), stage)
        return report
