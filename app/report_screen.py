"""How the reports of `map` and `ribs` end on the terminal."""

from collections.abc import Mapping, Sequence

from rich.console import Console
from rich.markup import escape


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
