"""The commands: each parses, calls one function, prints its result. No physics here.

Heavy libraries are imported inside the commands, so that `--help` and `outline` stay quick.
Exit codes: 0 every limit holds, 1 a limit is missed, 2 bad input, 3 not converged, 70 a fault of
the program, 130 interrupted.
"""

import atexit
import gc
import os
import traceback
from pathlib import Path
from typing import Literal, NoReturn

import click

from lamwright.geometry.errors import LamwrightError

from .cli_assess import assess
from .cli_compare import compare
from .cli_ledger import ledger
from .cli_options import (
    TOLERANCES,
    design_argument,
    fineness_option,
    out_option,
    pictures_option,
)
from .cli_page import page
from .cli_release import release, verify
from .cli_search import search
from .cli_start import start
from .cli_study import sweep
from .examples import add_examples
from .guide import pointer
from .threads import hold_threads

FAULT = 70  # "internal software error" of the usual list of exit codes
INTERRUPTED = 130  # as a shell reports a process ended by the interrupt key


class _Front(click.Group):
    """Turns errors into one line each and the exit code that they carry."""

    def invoke(self, ctx: click.Context) -> object:
        """Run the command of the context."""
        try:
            return super().invoke(ctx)
        except LamwrightError as error:
            self._end(ctx, "\n".join((str(error), *pointer(error))), error.exit_code)
        except BrokenPipeError:
            raise  # the reader of the output has gone: click ends quietly
        except OSError as error:
            reason = (error.strerror or str(error)).lower()
            self._end(ctx, f"{error.filename or 'file'}: {reason}", 2)
        except KeyboardInterrupt as error:
            self._end(ctx, str(error) or "interrupted, nothing was written", INTERRUPTED)
        except (click.exceptions.Exit, click.Abort, click.ClickException):
            raise
        except Exception:
            # Python's own code for it would be 1: a limit missed.
            traceback.print_exc()
            self._end(ctx, "a fault of the program: please report it with the design", FAULT)

    def _end(self, ctx: click.Context, text: str, code: int) -> NoReturn:
        click.echo(text, err=True)
        ctx.exit(code)


@click.group(
    cls=_Front,
    context_settings={"help_option_names": ["-h", "--help"]},
    epilog="Each command's --help ends with an example. Completion by the shell: app/README.md.",
)
@click.version_option(package_name="lamwright", message="%(prog)s %(version)s")
def main() -> None:
    """Design synchronous reluctance rotors that can be built."""
    hold_threads()
    os.environ.setdefault("PYDANTIC_DISABLE_PLUGINS", "1")  # they are sought in every package
    # At its end Python looks for garbage among all that is left: 0.1 s after a design.
    atexit.register(gc.freeze)


@main.command("map")
@design_argument
@out_option
@click.option("--points", help="Currents of each axis, as 15x15.  [default: 15x15]")
@click.option("--i-d", help="d-axis currents, A peak, as 0,2,5,9.  [default: to 1.25 x maximum]")
@click.option("--i-q", help="q-axis currents, likewise.")
@click.option("--positions", type=int, help="Over 60 electrical degrees.  [default: 12 or more]")
@click.option(
    "--tolerance",
    type=TOLERANCES,
    default="normal",
    show_default=True,
    help="Largest error of torque and linkage: 2, 1 %; 0.5, 0.3 %; 0.1, 0.1 %.",
)
@click.option("--workers", type=int, help="Processes that solve.  [default: one for each core]")
@click.option("--eccentricity-mm", type=float, help="Of the rotor.  [default: a tenth of the gap]")
@click.option(
    "--table-size", default="16x16", show_default=True, help="Drive's tables, torques x speeds."
)
@click.option(
    "--c-format", default="float", show_default=True, help="Of the C header: float, or q7 to q31."
)
def flux_map(
    design: Path,
    out: Path,
    tolerance: Literal["coarse", "normal", "fine"],
    workers: int | None,
    eccentricity_mm: float | None,
    table_size: str,
    c_format: str,
    **wishes: str | int | None,
) -> None:
    """Flux map of DESIGN over i_d and i_q, and what the machine does with it.

    Points are kept in the folder as they finish: a run that was stopped goes on where it was.
    """
    from .control_wishes import control_wishes
    from .map_run import map_design
    from .map_screen import print_map, wishes_of
    from .shown_progress import shown_progress

    wanted, control = wishes_of(wishes), control_wishes(table_size, c_format)
    with shown_progress() as progress:
        report = map_design(
            design,
            out,
            wanted,
            tolerance=tolerance,
            workers=workers,
            progress=progress,
            eccentricity_mm=eccentricity_mm,
            control=control,
        )
    print_map(report, str(out))


@main.command()
@design_argument
@click.option("--out", type=click.Path(path_type=Path), help="Folder for the results.")
@click.option(
    "--ranges",
    is_flag=True,
    help="How far each length and angle may move before the outline breaks.",
)
def outline(design: Path, out: Path | None, ranges: bool) -> None:
    """Geometry, checks and punch outline (DXF) of DESIGN alone."""
    from .lamination import outline as run
    from .lines import print_outline

    if out is None and not ranges:
        raise click.MissingParameter(param_hint="'--out'", param_type="option")
    if out is not None:
        print_outline(run(design, out))
    if ranges:
        from .ranges import print_ranges
        from .ranges import ranges as run_ranges

        print_ranges(run_ranges(design, out))


@main.command()
@design_argument
@out_option
def slopes(design: Path, out: Path) -> None:
    """Change of torque, saliency and rib stress with each length and angle of DESIGN."""
    from .slopes import print_slopes
    from .slopes import slopes as run

    print_slopes(run(design, out), str(out))


@main.command()
@design_argument
@out_option
@click.option(
    "--tolerance",
    type=TOLERANCES,
    default="normal",
    show_default=True,
    help="Largest error of rib stress: 5; 2; 0.5 %.",
)
@pictures_option
@click.option("--overspeed-share", default=0.0, help="Share of starts to overspeed.  [default: 0]")
@click.option("--teeth-mass-factor", type=float, help="Wound over bare stator teeth, by mass.")
@click.option("--thin", is_flag=True, help="Find the thinnest ribs that hold the yield margin.")
@click.option(
    "--rib-factor",
    type=float,
    default=1.2,
    show_default=True,
    help="Supplier's least rib over the sheet's thickness, for --thin.",
)
@click.pass_context
def ribs(
    ctx: click.Context,
    design: Path,
    out: Path,
    tolerance: Literal["coarse", "normal", "fine"],
    pictures: bool,
    overspeed_share: float,
    teeth_mass_factor: float | None,
    thin: bool,
    rib_factor: float,
) -> None:
    """Ribs of DESIGN: stress, plastic reserve, burst speed and life.

    Ends with 0 when the yield margin asked for holds, with 1 when it is missed.
    """
    from .rib_run import ribs_design
    from .rib_screen import print_ribs
    from .shown_progress import shown_progress

    with shown_progress() as progress:
        report = ribs_design(
            design,
            out,
            tolerance=tolerance,
            pictures=pictures,
            overspeed_share=overspeed_share,
            rib_factor=rib_factor if thin else None,
            teeth_mass_factor=teeth_mass_factor,
            progress=progress,
        )
    print_ribs(report, str(out))
    ctx.exit(0 if report.passes else 1)


@main.command()
@design_argument
@out_option
@click.option("--samples", default=5000, show_default=True, help="Random machines by the model.")
@click.option("--solve", default=12, show_default=True, help="Of random machines solved in full.")
@click.option("--seed", default=1, show_default=True, help="Of the random numbers.")
@fineness_option
@click.option("--workers", type=int, help="Processes that solve.  [default: one for each core]")
def spread(
    design: Path,
    out: Path,
    samples: int,
    solve: int,
    seed: int,
    tolerance: Literal["coarse", "normal", "fine"],
    workers: int | None,
) -> None:
    """What the tolerances of making do to DESIGN, and how many rotors hold its limits."""
    from .shown_progress import shown_progress
    from .spread import SpreadWishes
    from .spread import spread as run
    from .spread_screen import print_spread

    wishes = SpreadWishes(samples, solve, seed, tolerance, workers)
    with shown_progress() as progress:
        report = run(design, out, wishes, progress)
    print_spread(report, str(out))


@main.command()
@design_argument
@out_option
@click.option("--currents", required=True, help="Direct currents, A, as 15,25,35.")
@click.option(
    "--feed",
    type=click.Choice(["one-and-two", "two-in-series"]),
    default="one-and-two",
    show_default=True,
    help="Into A and half out of B and C each; or into A and out of B, C open.",
)
@click.option(
    "--step-deg", type=float, help="Most between angles, mechanical.  [default: 2 electrical]"
)
@click.option(
    "--measured", type=click.Path(path_type=Path), help="Table (CSV) with measured values."
)
@click.option(
    "--zero-deg",
    type=float,
    default=0.0,
    show_default=True,
    help="Its angles' reading where the rotor rests, d axis on the current's.",
)
@fineness_option
def locked(
    design: Path,
    out: Path,
    currents: str,
    feed: str,
    step_deg: float | None,
    measured: Path | None,
    zero_deg: float,
    tolerance: Literal["coarse", "normal", "fine"],
) -> None:
    """Torque and terminal inductance of DESIGN over the angle of a locked rotor fed with d.c."""
    from .locked import locked as run
    from .locked import print_locked
    from .shown_progress import shown_progress

    with shown_progress() as progress:
        found = run(design, out, currents, feed, step_deg, measured, zero_deg, progress, tolerance)
    print_locked(found, str(out))


@main.command()
@design_argument
@click.option(
    "--csv", "table", type=click.Path(path_type=Path), help="Write the coil sides to this file."
)
def winding(design: Path, table: Path | None) -> None:
    """Phase and sign of every coil side of DESIGN, and its winding factors."""
    from .coils import print_winding
    from .coils import winding as run

    print_winding(run(design, table))


@main.command()
@design_argument
@click.option("--i-d", required=True, type=float, help="d-axis current, A peak.")
@click.option("--i-q", required=True, type=float, help="q-axis current, A peak.")
@click.option(
    "--angle",
    required=True,
    type=float,
    help="Rotor's d axis ahead of phase A's axis, mechanical degrees.",
)
def point(design: Path, i_d: float, i_q: float, angle: float) -> None:
    """One field solution of DESIGN at one rotor position, as JSON."""
    from lamwright.postprocess.files import json_text

    from .point import point as run

    click.echo(json_text(run(design, i_d=i_d, i_q=i_q, angle_deg=angle)), nl=False)


main.add_command(ledger)
main.add_command(assess)
main.add_command(compare)
main.add_command(start)
main.add_command(sweep)
main.add_command(release)
main.add_command(verify)
main.add_command(search)
main.add_command(page)
add_examples(main)
