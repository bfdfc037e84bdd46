"""The command `start`: its many options; see `cli` for the rules of commands."""

from pathlib import Path

import click


@click.command()
@click.option("--out", required=True, type=click.Path(path_type=Path), help="Design file to write.")
@click.option(
    "--stator", type=click.Path(path_type=Path), help="Design file (TOML) or drawing (DXF) with it."
)
@click.option("--outer-diameter", "outer_diameter_mm", type=float, help="Of the stator, mm.")
@click.option("--bore", "bore_mm", type=float, help="Of the stator, mm.")
@click.option("--length", "length_mm", type=float, help="Of the stack, mm.")
@click.option("--slots", type=int, help="Of the stator, 3 to 144.")
@click.option("--unit-mm", type=float, help="mm per unit of a drawing that states none.")
@click.option("--poles", type=int, help="2 to 24, even.")
@click.option("--max-speed", "maximum_speed_rpm", type=float, help="In service, rpm.")
@click.option("--rated-speed", "rated_speed_rpm", type=float, help="rpm.  [default: half]")
@click.option("--voltage", "voltage_v", type=float, help="Between lines, V rms.  [default: 400]")
@click.option("--barriers", type=int, help="Of a pole, 1 to 6.  [default: choose]")
@click.option("--gap", "gap_mm", type=float, help="Radial air gap, mm.  [default: by the bore]")
@click.option("--shaft", "shaft_mm", type=float, help="Diameter, mm.  [default: by the bore]")
@click.option(
    "--sheet", "sheet_mm", type=float, default=0.5, show_default=True, help="Thickness, mm."
)
@click.option(
    "--rib-factor",
    type=float,
    default=1.2,
    show_default=True,
    help="Supplier's least rib over the sheet's thickness.",
)
@click.option("--steel", type=click.Path(path_type=Path), help="Steel card.  [default: demo card]")
@click.option("--name", help="Of the design.  [default: the file's]")
@click.option("--yes", "assume_yes", is_flag=True, help="Ask nothing, take defaults.")
@click.option("--replace", "is_replacing", is_flag=True, help="Write over a file that is there.")
def start(assume_yes: bool, **values: object) -> None:
    """Write a first design for a stator, by published rules, with the reason of every number.

    What is not given is asked for on a terminal, and taken by default elsewhere.
    """
    from .start import choices_of
    from .start import start as run
    from .start_prompts import completed, is_asking, print_start

    whole, taken = completed(values, is_asking(assume_yes))
    print_start(run(choices_of(whole)), taken)
