"""What `search` prints: each generation on its way, the front at its end, and where to look on."""

from typing import TYPE_CHECKING

import click
from rich.console import Console
from rich.markup import escape

from .study_screen import time_text
from .sweep_screen import design_table, print_reasons

if TYPE_CHECKING:
    from .search import Course
    from .search_polish import PolishState
    from .search_run import SearchReport

MOST_LISTED = 15  # of the front


def print_course(course: "Course") -> None:
    """One line a generation, beside the bar."""
    click.echo(course_text(course), err=True)


def course_text(course: "Course") -> str:
    """How far a search has come."""
    text = (
        f"generation {course.generation}: {course.designs} designs, {course.held} hold all "
        f"limits, {course.front} on the front"
    )
    if course.gained is not None:
        text += f", hypervolume +{100.0 * course.gained:.3g} % over the last generations"
    return text


def print_search(report: "SearchReport", folder: str) -> None:
    """The front as a table, why the search ended, and the next commands."""
    console = Console(highlight=False)
    front = report.front
    if front:
        listed, more = front, ""
        if len(front) > MOST_LISTED:
            places = [round(k * (len(front) - 1) / (MOST_LISTED - 1)) for k in range(MOST_LISTED)]
            listed, more = tuple(front[k] for k in places), f", {MOST_LISTED} of {len(front)}"
        title = f"{report.study.name}, front along {report.study.goals[0].figure}{more}"
        console.print(design_table(report.study, listed, title))
    else:
        console.print("no design holds all limits", style="yellow")
    console.print(escape(_counts(report)), soft_wrap=True)
    console.print(escape(f"ended: {report.state.ended}"), soft_wrap=True)
    if report.polish is not None:
        console.print(escape(polish_text(report.polish)), soft_wrap=True)
    print_reasons(console, report.rows)
    more = f"more by: lamwright ledger {folder}; a design back by: lamwright ledger {folder} --show"
    console.print(f"[dim]{escape(more)} NUMBER[/dim]", soft_wrap=True)
    console.print("[dim]on by: the same command, with a larger --budget[/dim]", soft_wrap=True)


def polish_text(polish: "PolishState") -> str:
    """What the polish did, with the commonest reason for which its members stand."""
    steps = sum(line.steps for line in polish.lines)
    moved = sum(line.steps > 0 for line in polish.lines)
    text = (
        f"polish: {moved} of {len(polish.lines)} members of the front bettered, {steps} of "
        f"{len(polish.points)} steps accepted"
    )
    reasons = [line.ended for line in polish.lines if line.ended]
    if reasons:
        text += f"; mostly ended: {max(reasons, key=reasons.count)}"
    return text


def _counts(report: "SearchReport") -> str:
    rows = {row.hash: row for row in report.rows}.values()
    outcomes = [row.outcome for row in rows]
    known = len(rows) - report.computed
    before = f", {known} known before" if known > 0 else ""
    return (
        f"{len(rows)} designs in {time_text(report.seconds)}{before}: {len(report.front)} on the "
        f"front, {outcomes.count('rejected')} rejected, {outcomes.count('failed')} failed"
    )
