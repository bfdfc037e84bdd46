"""What `map` reads from its options and shows on the terminal."""

import math
import re
from collections.abc import Mapping

from rich.console import Console
from rich.markup import escape
from rich.table import Table

from lamwright.geometry.errors import LamwrightError

from .lines import error_number, valued
from .map_grid import GridWishes
from .mapping import MapReport
from .report_screen import print_ending, print_table

MOST_LISTED = 10_000  # characters of a list of currents


def wishes_of(options: Mapping[str, str | int | None]) -> GridWishes:
    """The grid that is asked for.

    Raises:
        LamwrightError: an option is no list of numbers, or says the same twice.
    """
    points, positions = options["points"], options["positions"]
    i_d, i_q = (_listed(f"--{key.replace('_', '-')}", options[key]) for key in ("i_d", "i_q"))
    if points is not None and i_d is not None and i_q is not None:
        raise LamwrightError(f"--points {points}: --i-d and --i-q are given; remove one of them")
    assert positions is None or isinstance(positions, int)
    return GridWishes(None if points is None else _counted(str(points)), i_d, i_q, positions)


def _counted(text: str) -> tuple[int, int]:
    found = re.fullmatch(r"\s*(\d{1,6})\s*[xX]\s*(\d{1,6})\s*", text)
    if found is None:
        raise LamwrightError(f"--points {text}: no pair of counts; accepted such as 15x15")
    return int(found.group(1)), int(found.group(2))


def _listed(option: str, text: object) -> tuple[float, ...] | None:
    if text is None:
        return None
    remedy = "accepted numbers in A with commas between, such as 0,2,5,9"
    try:
        values = tuple(float(part) for part in str(text)[:MOST_LISTED].split(","))
    except ValueError:
        raise LamwrightError(f"{option} {text}: no list of currents; {remedy}") from None
    return values


def print_map(report: MapReport, folder: str) -> None:
    """The figures as a table, then what is missing, cautions, times and where the files are."""
    console = Console(highlight=False)
    table = Table(title=report.design_name, title_justify="left", title_style="bold")
    for column in ("what", "value", "+-"):
        table.add_column(column, justify="left" if column == "what" else "right")
    counts = {figure.key: figure for figure in report.figures if isinstance(figure.value, int)}
    for name, figures in report.sections:
        table.add_section()
        table.add_row(f"[bold]{escape(name)}[/bold]")
        for figure in figures:
            bar = report.errors.get(figure.key, math.nan)
            if figure.key not in counts:
                shown = "" if math.isnan(bar) else error_number(bar)
                table.add_row(figure.label, valued(figure), shown)
    print_table(console, table)
    if counts:
        told = ", ".join(f"{figure.label} {figure.value}" for figure in counts.values())
        console.print(f"[dim]{told}[/dim]", soft_wrap=True)
    print_ending(console, report.not_given, report.cautions, report.seconds, folder)
