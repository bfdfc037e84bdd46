"""What `ribs` shows on the terminal: the ribs, the rotor's figures, what is missing, cautions.

Places of the peaks, and what has no room here, are in `ribs.csv`.
"""

import math

from rich.console import Console
from rich.markup import escape
from rich.table import Table
from rich.text import Text

from lamwright.postprocess.rib_tables import shown_ribs

from .lines import error_number, number, valued
from .report_screen import print_ending, print_table
from .rib_work import RibsReport
from .thin_screen import THIN_TABLE, thin_screen

MOST_SHOWN = 16  # ribs; all are in ribs.csv
# Column heads of a rib's figures by key, stress in MPa; a key that no chapter gave has none.
COLUMNS = {
    "width_mm": "mm",
    "tension_mean_mpa": "mean",
    "bending_mpa": "bend",
    "peak_mpa": "peak",
    "stress_concentration": "peak/\nmean",
    "yield_margin": "margin",
    "life_2_3_percent_cycles": "starts\nto 2.3 %",
}
LIFE = "life_2_3_percent_cycles"


def print_ribs(report: RibsReport, folder: str) -> None:
    """The ribs, most stressed first, then the figures, what is missing, cautions and files."""
    console = Console(highlight=False)
    print_table(console, _ribs_table(report))
    more = len(shown_ribs(report.ribs)) - MOST_SHOWN
    if more > 0:
        console.print(f"[dim]{more} more ribs in ribs.csv[/dim]")
    if THIN_TABLE in report.tables:
        print_table(console, thin_screen(report.tables[THIN_TABLE]))
    print_table(console, _figures_table(report))
    for key, fact in report.facts.items():
        told = fact if isinstance(fact, str) else ("yes" if fact else "no")
        console.print(f"{key.replace('_', ' ')}: {escape(told)}", soft_wrap=True)
    console.print(_verdict_line(report))
    print_ending(console, report.not_given, report.cautions, report.seconds, folder)


def _ribs_table(report: RibsReport) -> Table:
    table = Table(
        title=f"{report.design_name}: ribs at overspeed, stress in MPa",
        title_justify="left",
        title_style="bold",
    )
    known = {key: head for key, head in COLUMNS.items() if key in report.ribs[0].values}
    table.add_column("rib")
    for head in known.values():
        table.add_column(head, justify="right", no_wrap=True)
    for name, row in shown_ribs(report.ribs)[:MOST_SHOWN]:
        table.add_row(name, *(_cell(report, key, row.values[key]) for key in known))
    return table


def _cell(report: RibsReport, key: str, value: float | None) -> str:
    """Three digits; a life beyond what the card's line was tested to is told as more than that."""
    if value is None:
        return ""
    if key != LIFE:
        return f"{value:.3g}"
    most = report.figures["life_line_tested_to_cycles"].value
    return f"{value:.2g}" if value <= most else f"> {most:.2g}"


def _figures_table(report: RibsReport) -> Table:
    table = Table()
    for column in ("what", "value", "+-"):
        table.add_column(column, justify="left" if column == "what" else "right")
    for name, figures in report.sections:
        if not figures:
            continue
        table.add_section()
        table.add_row(f"[bold]{escape(name)}[/bold]")
        for figure in figures:
            bar = report.errors.get(figure.key, math.nan)
            shown = "" if math.isnan(bar) else error_number(bar)
            value = str(figure.value) if isinstance(figure.value, int) else valued(figure)
            table.add_row(figure.label, value, shown)
    return table


def _verdict_line(report: RibsReport) -> Text:
    margin = number(report.margin)
    asked = number(report.least_margin)
    if report.passes:
        return Text(f"holds: yield margin {margin}, asked {asked}", "bold green")
    return Text(f"missed: yield margin {margin}, asked {asked}", "bold red")
