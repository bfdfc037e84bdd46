"""What `ribs` shows on the terminal: the ribs, the rotor's figures, what is missing, cautions."""

import math
from collections.abc import Sequence

from rich.console import Console
from rich.markup import escape
from rich.table import Table
from rich.text import Text

from lamwright.postprocess.rib_tables import RibRow

from .lines import number, valued
from .rib_work import RibsReport

MOST_SHOWN = 16  # ribs; all are in ribs.csv
OTHER_SIDE = {"left": "right", "right": "left"}
ALIKE = 5e-3  # of the peak: the two of a mirrored pair differ by their meshes
# Column heads of a rib's figures by key, stress in MPa; a key that no chapter gave has none.
COLUMNS = {
    "width_mm": "mm",
    "tension_mean_mpa": "mean",
    "bending_mpa": "bending",
    "peak_mpa": "peak",
    "stress_concentration": "peak/\nmean",
    "yield_margin": "margin",
    "yielded_section_percent": "plastic %",
    "life_least_cycles": "life",
}


def print_ribs(report: RibsReport, folder: str) -> None:
    """The ribs, most stressed first, then the figures, what is missing, cautions and files."""
    console = Console(highlight=False)
    console.print(_ribs_table(report))
    more = len(shown_ribs(report.ribs)) - MOST_SHOWN
    console.print(f"[dim]{f'{more} more ribs, ' if more > 0 else ''}places in ribs.csv[/dim]")
    console.print(_figures_table(report))
    for key, fact in report.facts.items():
        told = fact if isinstance(fact, str) else ("yes" if fact else "no")
        console.print(f"{key.replace('_', ' ')}: {escape(told)}", soft_wrap=True)
    console.print(_verdict_line(report))
    for line in report.not_given:
        console.print(f"[yellow]not given:[/yellow] {escape(line)}", soft_wrap=True)
    for line in report.cautions:
        console.print(f"[dim]- {escape(line)}[/dim]", soft_wrap=True)
    times = ", ".join(f"{phase} {seconds:.1f}" for phase, seconds in report.seconds.items())
    console.print(f"[dim]where the time goes, s: {times}[/dim]", soft_wrap=True)
    console.print(f"[dim]~ estimate by formula; files in[/dim] {escape(folder)}", soft_wrap=True)


def _ribs_table(report: RibsReport) -> Table:
    table = Table(
        title=f"{report.design_name}: ribs at overspeed, stress in MPa",
        title_justify="left",
        title_style="bold",
    )
    known = {key: head for key, head in COLUMNS.items() if key in report.ribs[0].values}
    table.add_column("rib", no_wrap=True)
    for head in known.values():
        table.add_column(head, justify="right")
    for name, row in shown_ribs(report.ribs)[:MOST_SHOWN]:
        table.add_row(name, *(_cell(row.values[key]) for key in known))
    return table


def shown_ribs(rows: Sequence[RibRow]) -> list[tuple[str, RibRow]]:
    """Ribs by falling peak, each with its name; of a mirrored pair the more stressed for both."""
    found: list[tuple[str, RibRow]] = []
    names = {row.rib.name: row for row in rows}
    for row in sorted(rows, key=_peak, reverse=True):
        stem, _, side = row.rib.name.rpartition("_")
        other = names.get(f"{stem}_{OTHER_SIDE[side]}") if side in OTHER_SIDE else None
        is_pair = other is not None and _peak(row) - _peak(other) <= ALIKE * _peak(row)
        if is_pair and any(shown.rib.name == f"{stem}_{OTHER_SIDE[side]}" for _, shown in found):
            continue
        words = stem if is_pair else row.rib.name
        found.append((f"{words.replace('_', ' ')}{', both' if is_pair else ''}", row))
    return found


def _peak(row: RibRow) -> float:
    peak = row.values["peak_mpa"]
    assert peak is not None
    return peak


def _cell(value: float | None) -> str:
    return "" if value is None else number(value)


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
            shown = "" if math.isnan(bar) else f"{bar:.2g}"
            value = str(figure.value) if isinstance(figure.value, int) else valued(figure)
            table.add_row(figure.label, value, shown)
    return table


def _verdict_line(report: RibsReport) -> Text:
    margin = number(report.figures["yield_margin"].value)
    asked = number(report.least_margin)
    if report.passes:
        return Text(f"holds: yield margin {margin}, asked {asked}", "bold green")
    return Text(f"missed: yield margin {margin}, asked {asked}", "bold red")
