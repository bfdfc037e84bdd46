"""What `compare` shows on the terminal."""

from rich.console import Console
from rich.markup import escape
from rich.table import Table

from lamwright.postprocess.differences import Pair

from .compare import MM, UM, CompareReport
from .lines import number
from .outline_screen import cells

MOST_RIBS = 16
UNITS = {"lamination_area_mm2": "mm2"}


def print_compare(report: CompareReport) -> None:
    """Keys, geometry, ribs and figures that differ, and what is the same in a word."""
    console = Console(highlight=False)
    for letter, side in (("A", report.first), ("B", report.second)):
        console.print(f"{letter}: {side.kind} {escape(str(side.path))}", soft_wrap=True)
    if report.is_same:
        console.print("[green]nothing differs in what both have[/green]")
        return
    if report.keys:
        table = _table("keys", "key", "A", "B")
        for key, a, b in report.keys:
            table.add_row(escape(key), *("" if v is None else escape(str(v)) for v in (a, b)))
        console.print(table)
    _print_geometry(console, report)
    differing = [one for one in report.figures if one.differs]
    if differing:
        table = _table("figures", "what", "A", "B", "change", "+-", "errors")
        for one in differing:
            table.add_row(f"{one.label}{', ' * bool(one.unit)}{one.unit}", *cells(one))
        console.print(table)
    if report.figures and not differing:
        console.print("figures: all the same")


def _print_geometry(console: Console, report: CompareReport) -> None:
    for text in report.changes:
        console.print(f"- {escape(text)}", soft_wrap=True)
    if report.largest is not None:
        gap, place = report.largest
        least = "at least " if report.gaps is not None and report.gaps.is_beyond else ""
        console.print(f"largest deviation: {least}{number(UM * gap)} um at {place}")
    sizes = [pair for pair in report.sizes if pair.differs]
    if sizes:
        table = _table("geometry", "what", "A", "B", "change")
        for pair in sizes:
            table.add_row(pair.key.replace("_", " "), *_cells(pair, 1.0))
        console.print(table)
    ribs = sorted(
        (pair for pair in report.ribs if pair.differs), key=lambda p: -abs(p.change or 1.0)
    )
    if ribs:
        table = _table("ribs, mm", "rib", "A", "B", "change")
        for pair in ribs[:MOST_RIBS]:
            table.add_row(pair.key, *_cells(pair, MM))
        console.print(table)
        if len(ribs) > MOST_RIBS:
            console.print(f"[dim]{len(ribs) - MOST_RIBS} more ribs differ; all with --json[/dim]")


def _cells(pair: Pair, scale: float) -> tuple[str, ...]:
    a, b = ("" if v is None else number(scale * v) for v in (pair.first, pair.second))
    return a, b, "" if pair.change is None else f"{scale * pair.change:+.3g}"


def _table(title: str, *heads: str) -> Table:
    table = Table(title=title, title_justify="left", title_style="bold")
    for k, head in enumerate(heads):
        table.add_column(head, justify="left" if k == 0 or head == "errors" else "right")
    return table
