"""What `assess` shows on the terminal at its end: the verdict as a table."""

import textwrap
from collections.abc import Sequence

from rich.console import Console
from rich.markup import escape
from rich.table import Table
from rich.text import Text

from lamwright.postprocess.glance import glance_rows, limit_rows, verdict_line
from lamwright.postprocess.verdict import Verdict

from .report_screen import print_table

STYLES = {"holds": "green", "missed": "bold red", "exceeded": "yellow", "": ""}


def print_verdict(verdict: Verdict, folder: str, also: Sequence[str] = ()) -> None:
    """The verdict as a table, then cautions, times and where the files are.

    What fails besides the limits comes as `also`.
    """
    console = Console(highlight=False)
    print_table(console, _verdict_table(verdict))
    console.print(_verdict_line(verdict, also))
    for caution in verdict.cautions:
        _print_wrapped(console, f"- {caution}")
    _print_wrapped(console, _times(verdict))
    console.print(f"[dim]~ estimate by formula; files in[/dim] {escape(folder)}", soft_wrap=True)


def _table(title: str, *columns: str) -> Table:
    table = Table(title=title, title_justify="left", title_style="bold")
    for column in columns:
        table.add_column(column, justify="right" if column in ("value", "+-", "limit") else "left")
    return table


def _verdict_table(verdict: Verdict) -> Table:
    table = _table(verdict.design_name, "what", "value", "+-", "limit", "verdict")
    for rows in (limit_rows(verdict), glance_rows(verdict)):
        for row in rows:
            table.add_row(
                row.label, row.value, row.error, row.limit, Text(row.word, STYLES[row.word])
            )
        table.add_section()
    return table


def _verdict_line(verdict: Verdict, also: Sequence[str]) -> Text:
    passes = verdict.passes and not also
    return Text(verdict_line(verdict, also), "bold green" if passes else "bold red")


def _times(verdict: Verdict) -> str:
    parts = [f"{time.phase} {time.seconds:.1f}" for time in verdict.times]
    return f"where the time goes, s: {', '.join(parts)}"


def _print_wrapped(console: Console, text: str) -> None:
    lines = textwrap.wrap(text, console.width, subsequent_indent="  ", break_on_hyphens=False)
    console.print(Text("\n".join(lines), style="dim"))
