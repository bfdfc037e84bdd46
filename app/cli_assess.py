"""The command `assess`: a design, or a supplier's outline of it."""

from pathlib import Path
from typing import TYPE_CHECKING, Literal

import click

from lamwright.geometry.errors import LamwrightError

from .cli_options import TOLERANCES, design_argument, out_option, pictures_option

if TYPE_CHECKING:
    from .outline_run import OutlineWishes
    from .progress import Progress
    from .rib_work import RibsReport


@click.command()
@design_argument
@out_option
@click.option(
    "--tolerance",
    type=TOLERANCES,
    default="normal",
    show_default=True,
    help="Largest error of torque, linkage, rib stress: 2, 1, 5 %; 0.5, 0.3, 2 %; 0.1, 0.1, 0.5 %.",
)
@pictures_option
@click.option("--ribs", "with_ribs", is_flag=True, help="All that the command ribs tells, too.")
@click.option(
    "--outline",
    type=click.Path(path_type=Path),
    help="DXF of the rotor as supplied or inspected: measured, analysed, beside the promise.",
)
@click.option("--outline-unit-mm", type=float, help="mm per unit of it.  [default: as it states]")
@click.option("--outline-layer", multiple=True, help="Layer of it that holds the rotor; repeat.")
@click.option(
    "--promised",
    type=click.Path(path_type=Path),
    help="Folder of an earlier assess of DESIGN.  [default: it is solved again]",
)
@click.option(
    "--rib-tolerance-mm", type=float, help="Of its ribs.  [default: 2 x tolerance.cut_mm]"
)
@click.pass_context
def assess(
    ctx: click.Context,
    design: Path,
    out: Path,
    tolerance: Literal["coarse", "normal", "fine"],
    pictures: bool,
    with_ribs: bool,
    outline: Path | None,
    outline_unit_mm: float | None,
    outline_layer: tuple[str, ...],
    promised: Path | None,
    rib_tolerance_mm: float | None,
) -> None:
    """Field, stress, verdict, pictures and punch outline of DESIGN.

    Ends with 0 when every limit of the design holds, with 1 when one is missed. With --outline, as
    in `lamwright assess rotor.toml --outline back.dxf --out back`, the rotor in that drawing is
    measured and analysed instead, and 1 also tells of a rib out of its tolerance, or of a shape
    that the design lacks, which is NOT ANALYSED AS DRAWN.
    """
    if outline is not None:
        if with_ribs:
            raise click.UsageError("--ribs: of the design alone; leave it out with --outline")
        _assess_outline(
            ctx,
            design,
            out,
            tolerance,
            pictures,
            _wishes(outline, outline_unit_mm, outline_layer, promised, rib_tolerance_mm),
        )
    told = {
        "--outline-unit-mm": outline_unit_mm,
        "--outline-layer": outline_layer or None,
        "--promised": promised,
        "--rib-tolerance-mm": rib_tolerance_mm,
    }
    for name, value in told.items():
        if value is not None:
            raise click.UsageError(f"{name}: only with --outline")

    # Nothing heavy before the run: its first process is started ahead of the imports.
    from .run import assess as run
    from .shown_progress import shown_progress

    reports: list[RibsReport] = []
    on_ribs = reports.append if with_ribs else None
    with shown_progress() as progress:
        verdict = run(design, out, _with_screen(progress), tolerance, pictures, on_ribs)
    from .screen import print_verdict

    print_verdict(verdict, str(out))
    for report in reports:
        from .rib_screen import print_ribs

        print_ribs(report, str(out))
    ctx.exit(0 if verdict.passes and all(report.passes for report in reports) else 1)


def _with_screen(progress: "Progress") -> "Progress":
    """Progress that also imports what prints the verdict while the workers have work left.

    That is so when this process has done its first task of the last phase that is shared.
    """
    told: list[str] = []

    def show(phase: str, share: float) -> None:
        progress(phase, share)
        told.append(phase)
        if phase == "error bars" and told.count(phase) == 2:
            from . import screen  # noqa: F401

    return show


def _wishes(
    outline: Path,
    unit_mm: float | None,
    layers: tuple[str, ...],
    promised: Path | None,
    rib_tolerance_mm: float | None,
) -> "OutlineWishes":
    from .outline_run import OutlineWishes

    for name, value, most in (
        ("--outline-unit-mm", unit_mm, 1e6),
        ("--rib-tolerance-mm", rib_tolerance_mm, 10.0),
    ):
        if value is not None and not 0.0 < value <= most:
            raise LamwrightError(f"{name} {value:g}: accepted a number above 0 up to {most:g}")
    return OutlineWishes(outline, unit_mm, layers, promised, rib_tolerance_mm)


def _assess_outline(
    ctx: click.Context,
    design: Path,
    out: Path,
    tolerance: Literal["coarse", "normal", "fine"],
    pictures: bool,
    wishes: "OutlineWishes",
) -> None:
    from .outline_run import assess_outline
    from .outline_screen import print_outline_verdict
    from .shown_progress import shown_progress

    with shown_progress() as progress:
        result = assess_outline(design, out, wishes, progress, tolerance, pictures)
    print_outline_verdict(result, str(out))
    ctx.exit(0 if result.passes else 1)
