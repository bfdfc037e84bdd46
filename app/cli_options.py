"""Arguments and options that several commands share; see `cli` for the rules of commands."""

from pathlib import Path

import click

TOLERANCES = click.Choice(["coarse", "normal", "fine"])

design_argument = click.argument("design", type=click.Path(path_type=Path))
out_option = click.option(
    "--out", required=True, type=click.Path(path_type=Path), help="Folder for the results."
)
fineness_option = click.option(
    "--tolerance",
    type=TOLERANCES,
    default="normal",
    show_default=True,
    help="How fine to mesh, as of assess.",
)
pictures_option = click.option(
    "--pictures/--no-pictures", default=True, help="Draw the figures.  [default: yes]"
)
