"""Tables on the terminal, and how the reports of `map` and `ribs` end there."""

from collections.abc import Mapping, Sequence

from rich import box
from rich.console import Console
from rich.markup import escape
from rich.table import Table


def print_table(console: Console, table: Table) -> None:
    """A table, without lines between its columns where it would be too wide with them.

    So that no label takes two lines on the 80 columns of a plain terminal.
    """
    wanted = table.__rich_measure__(console, console.options.update(width=10 * console.width))
    if wanted.maximum > console.width:
        table.box = box.HORIZONTALS
        table.show_edge = table.pad_edge = False
        table.collapse_padding = True
    console.print(table)


def print_ending(
    console: Console,
    not_given: Sequence[str],
    cautions: Sequence[str],
    seconds: Mapping[str, float],
    folder: str,
) -> None:
    """What is missing, cautions, wall time by phase, and where the files are."""
    for line in not_given:
        console.print(f"[yellow]not given:[/yellow] {escape(line)}", soft_wrap=True)
    for line in cautions:
        console.print(f"[dim]- {escape(line)}[/dim]", soft_wrap=True)
    times = ", ".join(f"{phase} {spent:.1f}" for phase, spent in seconds.items())
    console.print(f"[dim]where the time goes, s: {times}[/dim]", soft_wrap=True)
    console.print(f"[dim]~ estimate by formula; files in[/dim] {escape(folder)}", soft_wrap=True)
