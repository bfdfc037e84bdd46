"""The commands of studies; see `cli` for the rules of commands."""

from collections.abc import Callable
from pathlib import Path
from typing import TYPE_CHECKING, Any, TypeVar

import click

if TYPE_CHECKING:
    from .study_hire import PoolWishes

Command = TypeVar("Command", bound=Callable[..., object])

_PATH = click.Path(path_type=Path)
_POOL = (
    click.option("--workers", type=int, help="Processes that compute.  [default: one a core]"),
    click.option(
        "--time-limit",
        "limit_s",
        type=float,
        metavar="SECONDS",
        help="That one design may take.  [default: the study's]",
    ),
    click.option("--cluster", metavar="ADDRESS", help="Of a Dask scheduler, as tcp://host:8786."),
    click.option("--scheduler-file", type=_PATH, help="That a Dask scheduler has written."),
    click.option("--tls-ca", type=_PATH, help="Certificate that signed the cluster's (PEM)."),
    click.option("--tls-cert", type=_PATH, help="Certificate of this process (PEM)."),
    click.option("--tls-key", type=_PATH, help="Key of that certificate (PEM)."),
)


def pool_options(command: Command) -> Command:
    """Options that say who computes; the command hands them to `pool_wishes`."""
    for option in reversed(_POOL):
        command = option(command)
    return command


def pool_wishes(options: dict[str, Any]) -> "PoolWishes":
    """Who computes, by the values of `pool_options`."""
    from .study_hire import PoolWishes

    return PoolWishes(**options)


PICTURES = click.option(
    "--pictures/--no-pictures", default=True, help="Draw the study at the end.  [default: yes]"
)


@click.command()
@click.argument("study", type=_PATH)
@click.option("--out", required=True, type=_PATH, help="Folder for the ledger and the pictures.")
@click.option("--retry-failed", "is_retrying", is_flag=True, help="Compute anew what had failed.")
@PICTURES
@pool_options
def sweep(study: Path, out: Path, is_retrying: bool, pictures: bool, **options: object) -> None:
    """Compute every design of STUDY, each once.

    The same command goes on where a run was stopped, however it was.
    """
    from .study_screen import watched
    from .sweep import sweep as run
    from .sweep_screen import print_sweep

    report = run(study, out, pool_wishes(options), watched("sweep"), is_retrying=is_retrying)
    print_sweep(report, out)
    if pictures:
        from .study_pictures import draw_study

        draw_study(out, report.study, "sweep", "--out FOLDER")
