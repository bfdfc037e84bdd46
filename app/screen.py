"""What `assess` shows on the terminal at its end: the verdict as a table."""

import textwrap

from rich.console import Console
from rich.markup import escape
from rich.table import Table
from rich.text import Text

from lamwright.postprocess.quantities import Figure
from lamwright.postprocess.verdict import Outcome, Verdict, all_figures

from .lines import number, valued

# Figures without a limit that a designer reads at a glance, in order.
GLANCE = (
    "current_a",
    "current_angle_deg",
    "psi_d_vs",
    "psi_q_vs",
    "power_factor",
    "terminal_voltage_v",
    "copper_loss_w",
    "air_gap_power_w",
    "rib_stress_peak_mpa",
    "speed_overspeed_rpm",
    "speed_yield_begins_rpm",
    "radial_growth_um",
)
MAGNET_GLANCE = (
    "no_load_linkage_fundamental_vs",
    "back_emf_v",
    "cogging_torque_nm",
    "magnet_torque_nm",
    "magnet_mass_kg",
    "demagnetising_current_a",
    "magnet_below_knee_percent",
)


def print_verdict(verdict: Verdict, folder: str) -> None:
    """The verdict as a table, then cautions, times and where the files are."""
    console = Console(highlight=False)
    console.print(_verdict_table(verdict))
    console.print(_verdict_line(verdict))
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
    for outcome in verdict.outcomes:
        mark = Text("holds", "green") if outcome.holds else Text("missed", "bold red")
        value, bar = valued(outcome.figure), _bar(verdict, outcome.figure.key)
        table.add_row(outcome.figure.label, value, bar, _limit(outcome), mark)
    table.add_section()
    figures = all_figures(verdict)
    supply = figures["supply_voltage_v"]
    for key in _glance(figures):
        limit, mark = "", Text("")
        if key == "terminal_voltage_v":
            limit = f"<= {number(supply.value)} V"
            over = figures[key].value > supply.value
            mark = Text("over supply", "yellow") if over else Text("")
        table.add_row(figures[key].label, valued(figures[key]), _bar(verdict, key), limit, mark)
    return table


def _glance(figures: dict[str, Figure]) -> list[str]:
    """Keys of the figures to show; those of magnets only where there are any."""
    return [*GLANCE, *(key for key in MAGNET_GLANCE if key in figures)]


def _bar(verdict: Verdict, key: str) -> str:
    """The figure's error by the meshes, two digits, in its unit; empty where there is none."""
    return f"{verdict.errors[key]:.2g}" if key in verdict.errors else ""


def _limit(outcome: Outcome) -> str:
    sign = ">=" if outcome.is_least else "<="
    return f"{sign} {number(outcome.limit)} {outcome.figure.unit}".rstrip()


def _verdict_line(verdict: Verdict) -> Text:
    missed = [outcome.figure.label for outcome in verdict.outcomes if not outcome.holds]
    if not missed:
        return Text("passes: every limit holds", "bold green")
    return Text(f"fails: {', '.join(missed)}", "bold red")


def _times(verdict: Verdict) -> str:
    parts = [f"{time.phase} {time.seconds:.1f}" for time in verdict.times]
    return f"where the time goes, s: {', '.join(parts)}"


def _print_wrapped(console: Console, text: str) -> None:
    lines = textwrap.wrap(text, console.width, subsequent_indent="  ", break_on_hyphens=False)
    console.print(Text("\n".join(lines), style="dim"))
