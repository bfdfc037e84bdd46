"""What `sweep` prints at its end: the best designs, counts and reasons, where to look on."""

from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING

import click
from rich import box
from rich.console import Console
from rich.markup import escape
from rich.table import Table

from .ledger import Ledger
from .ledger_screen import print_progress
from .ledger_tables import ranked, reasons
from .study_screen import time_text

if TYPE_CHECKING:
    from .ledger_rows import Row
    from .study import Study
    from .sweep import SweepReport

MOST_LISTED = 8  # of the best designs
MOST_REASONS = 6  # told of rejected and failed designs


def print_sweep(report: "SweepReport", folder: Path) -> None:
    """The best designs as a table, the ledger's own words, and the next commands."""
    study = report.study
    if rows := listed_rows(study, report.rows):
        goal = f", best {study.goals[0].figure} first" if study.goals else ""
        Console(highlight=False).print(design_table(study, rows, f"{study.name}{goal}"))
    with Ledger.read(folder) as ledger:
        print_progress(ledger)
    known = len({row.hash for row in report.rows}) - report.computed
    before = f", {known} were known before" if known else ""
    click.echo(f"{report.computed} designs computed in {time_text(report.seconds)}{before}")
    click.echo(f"more by: lamwright ledger {folder}; a design's file by its --show NUMBER")


def listed_rows(study: "Study", rows: "Sequence[Row]") -> "list[Row]":
    """The best by the first goal, those that pass before others; without a goal those that pass."""
    done = {row.number: row for row in rows if row.outcome == "done"}
    if not study.goals:
        return [row for row in done.values() if row.passes][:MOST_LISTED]
    goal = study.goals[0]
    return ranked(list(done.values()), goal.figure, goal.sense)[:MOST_LISTED]


def design_table(study: "Study", rows: "Sequence[Row]", title: str) -> Table:
    """Keys, goals and limits of some designs, one row each."""
    table = Table(
        title=escape(title),
        title_justify="left",
        title_style="bold",
        box=box.SIMPLE_HEAD,
        padding=(0, 1, 0, 0),
        pad_edge=False,
    )
    # What all designs share needs no column.
    keys = [key.key for key in study.keys if key.values is None or len(key.values) > 1]
    figures = list(
        dict.fromkeys([*(g.figure for g in study.goals), *(s.figure for s in study.limits)])
    )
    for name in ("design", *keys, *figures):
        table.add_column(escape(_in_lines(name)), justify="right", overflow="fold")
    are_told = any(row.passes is not True for row in rows)
    if are_told:
        table.add_column("limits")
    for row in rows:
        values = [_told(row.values.get(key)) for key in keys]
        found = [_told(row.figures.get(figure)) for figure in figures]
        passes = {True: "hold", False: "missed", None: "not known"}[row.passes]
        table.add_row(str(row.number), *values, *found, *([passes] if are_told else []))
    return table


def _in_lines(name: str) -> str:
    """A name over several lines, so that a column is as wide as its numbers."""
    return name.removeprefix("layout.").replace("_", "\n_").replace(".", ".\n")


def print_reasons(console: Console, rows: "Sequence[Row]") -> None:
    """Why designs were rejected or failed, the commonest reasons."""
    for outcome, reason, count in reasons(rows)[:MOST_REASONS]:
        console.print(f"[dim]- {count} {outcome}:[/dim] {escape(reason)}", soft_wrap=True)


def _told(value: float | int | str | None) -> str:
    if value is None:
        return "not given"
    return f"{value:.4g}" if isinstance(value, float) else escape(str(value))
