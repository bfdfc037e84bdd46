"""What `sweep` prints at its end: how many, the best, and where to look on."""

from collections.abc import Sequence
from typing import TYPE_CHECKING

from rich.console import Console
from rich.markup import escape
from rich.table import Table

from .study_screen import time_text

if TYPE_CHECKING:
    from .ledger_rows import Row
    from .study import Study
    from .sweep import SweepReport

MOST_LISTED = 8  # of the best designs
MOST_REASONS = 3  # told of rejected and failed designs


def print_sweep(report: "SweepReport", folder: str) -> None:
    """Counts, the best designs as a table, the commonest reasons, and the next commands."""
    console = Console(highlight=False)
    study = report.study
    if rows := best_rows(study, report.rows):
        goal = f", best {study.goals[0].figure} first" if study.goals else ""
        console.print(design_table(study, rows, f"{study.name}{goal}"))
    console.print(escape(_counts(report)), soft_wrap=True)
    print_reasons(console, report.rows)
    more = f"more by: lamwright ledger {folder}; a design back by: lamwright ledger {folder} --show"
    console.print(f"[dim]{escape(more)} NUMBER[/dim]", soft_wrap=True)


def best_rows(study: "Study", rows: "Sequence[Row]") -> "list[Row]":
    """The best by the first goal, those that pass before others; without a goal those that pass."""
    done = {row.number: row for row in rows if row.outcome == "done"}
    if not study.goals:
        return [row for row in done.values() if row.passes][:MOST_LISTED]
    goal = study.goals[0]
    sign = -1.0 if goal.sense == "most" else 1.0
    known = [row for row in done.values() if goal.figure in row.figures]
    known.sort(key=lambda row: (row.passes is not True, sign * row.figures[goal.figure]))
    return known[:MOST_LISTED]


def design_table(study: "Study", rows: "Sequence[Row]", title: str) -> Table:
    """Keys, goals and limits of some designs, one row each."""
    table = Table(title=escape(title), title_justify="left", title_style="bold")
    keys = [key.key for key in study.keys]
    figures = list(
        dict.fromkeys([*(g.figure for g in study.goals), *(s.figure for s in study.limits)])
    )
    for name in ("design", *keys, *figures):
        table.add_column(escape(name), justify="right", overflow="fold")
    table.add_column("limits")
    for row in rows:
        values = [_told(row.values.get(key)) for key in keys]
        found = [_told(row.figures.get(figure)) for figure in figures]
        passes = {True: "hold", False: "missed", None: "not known"}[row.passes]
        table.add_row(str(row.number), *values, *found, passes)
    return table


def print_reasons(console: Console, rows: "Sequence[Row]") -> None:
    """Why designs were rejected or failed, the commonest reasons."""
    for outcome in ("rejected", "failed"):
        for reason, count in _reasons(rows, outcome):
            console.print(f"[dim]- {count} {outcome}:[/dim] {escape(reason)}", soft_wrap=True)


def _told(value: float | int | str | None) -> str:
    if value is None:
        return "not given"
    return f"{value:.4g}" if isinstance(value, float) else escape(str(value))


def _counts(report: "SweepReport") -> str:
    rows = {row.hash: row for row in report.rows}.values()
    outcomes = [row.outcome for row in rows]
    passing = sum(row.passes is True for row in rows)
    parts = [f"{passing} hold all limits", f"{outcomes.count('done') - passing} do not"]
    parts += [f"{outcomes.count(name)} {name}" for name in ("rejected", "failed")]
    known = len(rows) - report.computed
    before = f", {known} known before" if known else ""
    return f"{len(rows)} designs in {time_text(report.seconds)}{before}: {', '.join(parts)}"


def _reasons(rows: "Sequence[Row]", outcome: str) -> list[tuple[str, int]]:
    """The commonest reasons of an outcome with an example's words, and how many share the kind."""
    kinds: dict[str, list[str]] = {}
    for row in rows:
        if row.outcome == outcome:
            kinds.setdefault(_kind(row), []).append(row.reason)
    found = sorted(kinds.values(), key=len, reverse=True)[:MOST_REASONS]
    return [(reasons[0], len(reasons)) for reasons in found]


def _kind(row: "Row") -> str:
    """Reasons that differ in their numbers alone are of one kind."""
    return row.stage + "".join(letter for letter in row.reason if not letter.isdigit())
