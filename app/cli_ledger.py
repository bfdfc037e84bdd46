"""The command `ledger`; see `cli` for the rules of commands."""

from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import TYPE_CHECKING

import click

from lamwright.geometry.errors import LamwrightError

if TYPE_CHECKING:
    from .ledger import Ledger

LISTED = 20  # rows that are listed unless --limit says another number


@click.command()
@click.argument("folder", type=click.Path(path_type=Path))
@click.option("--where", help='Only such designs: "saliency_ratio > 6 and passes".')
@click.option("--sort", help="List by this name; a minus before it turns the order: -torque_nm.")
@click.option("--limit", type=click.IntRange(0), help=f"Of the list.  [default: {LISTED}]")
@click.option("--csv", "csv_file", type=click.Path(path_type=Path), help="Write the designs here.")
@click.option("--netcdf", "netcdf_file", type=click.Path(path_type=Path), help="Likewise.")
@click.option("--show", type=int, metavar="ID", help="Write this design's file, ready for assess.")
@click.option("--to", "design_file", type=click.Path(path_type=Path), help="Where --show writes.")
@click.option("--compare", nargs=2, type=int, metavar="A B", help="Two designs by their numbers.")
@click.option("--pictures", "is_pictured", is_flag=True, help="Draw the study into FOLDER.")
@click.option("--check", "is_checked", is_flag=True, help="Read all of it and tell any damage.")
def ledger(
    folder: Path,
    where: str | None,
    sort: str | None,
    limit: int | None,
    csv_file: Path | None,
    netcdf_file: Path | None,
    show: int | None,
    design_file: Path | None,
    compare: tuple[int, int] | None,
    is_pictured: bool,
    is_checked: bool,
) -> None:
    """Designs of a study in FOLDER: progress and the best so far, lists, tables, files again.

    A sweep or search may go on meanwhile. --where takes names of keys and figures, numbers, texts
    in quotes, comparisons, + - * /, and, or, not, brackets, as in
    --where "rotor.gap_mm < 0.4 and passes" --sort -torque_nm --limit 5; --csv and --netcdf write
    all designs of --where, with every figure and its error.
    """
    from .ledger import Ledger
    from .ledger_screen import print_comparison, print_progress, print_rows

    with Ledger.read(folder) as kept:
        if is_checked:
            kept.check()
            click.echo(f"{kept.path}: sound, {kept.count()} designs")
        if show is not None:
            _show(kept, show, design_file or folder / "designs" / f"design-{show}.toml")
        if compare is not None:
            first, second = (kept.row(number) for number in compare)
            print_comparison(kept.columns, first, second)
        if is_pictured:
            from lamwright.postprocess.files import prepared_folder

            from .study_pictures import write_pictures

            for picture in write_pictures(kept, prepared_folder(folder)):
                click.echo(str(picture))
        if csv_file is not None or netcdf_file is not None:
            _write(kept, where, sort, csv_file, netcdf_file)
        elif where is not None or sort is not None or limit is not None:
            print_rows(kept, where, sort or "number", LISTED if limit is None else limit)
        elif show is None and compare is None and not (is_checked or is_pictured):
            print_progress(kept)


def _show(kept: "Ledger", number: int, path: Path) -> None:
    from .ledger_screen import stated_values
    from .ledger_show import written_design

    row = kept.row(number)
    design = kept.design(number)
    written_design(path, design.text, design.files)
    click.echo(f"design {number} ({stated_values(row)}): {path}")
    if row.outcome != "done":
        click.echo(f"{row.outcome}: {row.reason}")
        if design.text == kept.study.base_text:
            click.echo("its values give no design: this is the base's file")


def _write(
    kept: "Ledger",
    where: str | None,
    sort: str | None,
    csv_file: Path | None,
    netcdf_file: Path | None,
) -> None:
    from lamwright.geometry.whole_file import whole_file, write_text

    from .ledger_tables import csv_of

    rows = kept.rows(where, sort or "number")
    if csv_file is not None:
        with _told("--csv", csv_file):
            write_text(csv_file, csv_of(kept.columns, rows))
        click.echo(f"{len(rows)} designs: {csv_file}")
    if netcdf_file is not None:
        if not rows:
            raise LamwrightError(f"--netcdf {netcdf_file}: no design to write")
        from .ledger_netcdf import write_rows

        with _told("--netcdf", netcdf_file), whole_file(netcdf_file) as temporary:
            write_rows(temporary, kept.study, kept.columns, rows)
        click.echo(f"{len(rows)} designs: {netcdf_file}")


@contextmanager
def _told(option: str, path: Path) -> Iterator[None]:
    """What the system says of a file that cannot be written, on one line."""
    try:
        yield
    except OSError as error:
        reason = (error.strerror or str(error)).lower()
        raise LamwrightError(f"{option} {path}: cannot be written: {reason}") from None
