"""The commands `release` and `verify`; see `cli` for the rules of commands."""

from pathlib import Path
from typing import Literal

import click

from .cli_options import design_argument, fineness_option

_OUT = click.option(
    "--out", required=True, type=click.Path(path_type=Path), help="Folder of the package."
)


@click.command()
@design_argument
@_OUT
@click.option(
    "--verdict",
    type=click.Path(path_type=Path),
    help="verdict.json of the same design by this version.  [default: assess now]",
)
@fineness_option
@click.option(
    "--despite-limits", is_flag=True, help="Release a design that fails, marked NOT PASSED."
)
@click.option(
    "--tool-offset", "tool_offset_mm", type=float, default=0.0, help="Outward off the steel, mm."
)
@click.option(
    "--grinding-allowance",
    "grinding_allowance_mm",
    type=float,
    default=0.0,
    help="On the rotor's diameter, mm.",
)
@click.option(
    "--magnet-clearance",
    "magnet_clearance_mm",
    type=float,
    default=0.0,
    help="Added all round magnet pockets, mm.",
)
@click.option(
    "--corners",
    type=click.Choice(["sharp", "round"]),
    default="sharp",
    show_default=True,
    help="Of contours that the tool's offset widens.",
)
@click.option("--strip-width", "strip_width_mm", type=float, help="Of the sheet to nest in, mm.")
@click.option(
    "--strip-bridge",
    "bridge_mm",
    type=float,
    default=2.0,
    show_default=True,
    help="Least sheet between blanks, mm.",
)
@click.option(
    "--strip-edge",
    "edge_mm",
    type=float,
    default=2.0,
    show_default=True,
    help="Least sheet between a blank and the strip's edge, mm.",
)
@click.option("--date", default="", help="Of issue, as 2026-01-31.  [default: left blank]")
@click.option("--revision", default="", help="Index of the revision.")
@click.option("--part-number", default="", help="Identification number.")
@click.option("--title", default="", help="Of the drawing.")
@click.option("--owner", default="", help="Legal owner of the drawing.")
@click.option("--creator", default="", help="Who made the drawing.")
@click.option("--approved-by", default="", help="Who approved it.")
@click.option("--bore-fit", default="H7", show_default=True, help="ISO 286 class of the bore.")
@click.option("--outer-fit", default="", help="ISO 286 class of the outer diameter.")
@click.option("--key-fit", default="JS9", show_default=True, help="ISO 286 class of keyways.")
@click.option(
    "--stator-bore-fit", default="H8", show_default=True, help="ISO 286 class of the stator's bore."
)
@click.option("--stator-outer-fit", default="", help="ISO 286 class of its outer diameter.")
@click.option(
    "--general-tolerance", default="m", show_default=True, help="ISO 2768-1 class, or a text."
)
@click.option("--rib-tolerance", "rib_tolerance_mm", type=float, help="Of rib widths, +- mm.")
@click.option("--burr-side", default="", help="near (the side seen) or far.")
@click.option("--burr", "burr_mm", type=float, help="Most height of a burr, mm.")
@click.option("--rolling-direction", default="", help="Note on the rolling direction.")
@click.option("--remark", "remarks", multiple=True, help="Further note; may be given again.")
@click.option("--paper", default="", help="A4, A3 or A2.  [default: the smallest with room]")
@click.pass_context
def release(
    ctx: click.Context,
    /,
    design: Path,
    out: Path,
    verdict: Path | None,
    tolerance: Literal["coarse", "normal", "fine"],
    despite_limits: bool,
    **values: object,
) -> None:
    """Write what a lamination supplier is sent for DESIGN: DXF, drawing, STEP, manifest.

    As in `lamwright release motor.toml --out package --strip-width 305 --date 2026-01-31`. Ends
    with 0, or with 1 where a limit fails and the package is marked NOT PASSED.
    """
    from .release import ReleaseWishes
    from .release import release as run
    from .release_order import order_of
    from .release_screen import print_release
    from .shown_progress import shown_progress

    wishes = ReleaseWishes(order_of(values), verdict, tolerance, despite_limits)
    with shown_progress() as progress:
        report = run(design, out, wishes, progress)
    print_release(report)
    ctx.exit(0 if report.passes else 1)


@click.command()
@click.argument("folder", type=click.Path(path_type=Path))
@click.option("--solve", is_flag=True, help="Assess and draw the design again, and compare.")
@click.pass_context
def verify(ctx: click.Context, folder: Path, solve: bool) -> None:
    """Compare the package in FOLDER with its manifest and the design in it.

    Every change is named, one line each. Ends with 0 where there is none, else with 1.
    """
    from .release_screen import print_verify
    from .shown_progress import shown_progress
    from .verify import verify as run

    with shown_progress() as progress:
        report = run(folder, solve, progress)
    print_verify(report)
    ctx.exit(0 if report.is_whole else 1)
