"""A verdict at a glance: its limits and main figures as rows of text, for terminal and notebook."""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

from .quantities import error_number, number, valued
from .verdict import Outcome, Verdict, all_figures

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


Word = Literal["", "holds", "missed", "exceeded"]


@dataclass(frozen=True, slots=True)
class GlanceRow:
    """One figure as it is read: everything in words."""

    label: str
    value: str
    error: str  # two digits, in the figure's unit; empty where there is none
    limit: str = ""
    word: Word = ""


def limit_rows(verdict: Verdict) -> tuple[GlanceRow, ...]:
    """A row for each limit of the design."""
    return tuple(
        GlanceRow(
            outcome.figure.label,
            valued(outcome.figure),
            _bar(verdict, outcome.figure.key),
            _limit(outcome),
            "holds" if outcome.holds else "missed",
        )
        for outcome in verdict.outcomes
    )


def glance_rows(verdict: Verdict) -> tuple[GlanceRow, ...]:
    """A row for each figure of `GLANCE`, and of `MAGNET_GLANCE` where there are magnets."""
    figures = all_figures(verdict)
    supply = figures["supply_voltage_v"].value
    rows = []
    for key in (*GLANCE, *(key for key in MAGNET_GLANCE if key in figures)):
        figure, bar = figures[key], _bar(verdict, key)
        if key == "terminal_voltage_v":
            word: Word = "exceeded" if figure.value > supply else ""
            limit = f"<= {number(supply)} V"
            rows.append(GlanceRow(figure.label, valued(figure), bar, limit, word))
        else:
            rows.append(GlanceRow(figure.label, valued(figure), bar))
    return tuple(rows)


def verdict_line(verdict: Verdict, also: Sequence[str] = ()) -> str:
    """Whether it passes, and which limits are missed; `also` is what fails besides, named first."""
    missed = [outcome.figure.label for outcome in verdict.outcomes if not outcome.holds]
    return (
        f"fails: {', '.join((*also, *missed))}" if also or missed else "passes: every limit holds"
    )


def _bar(verdict: Verdict, key: str) -> str:
    return error_number(verdict.errors[key]) if key in verdict.errors else ""


def _limit(outcome: Outcome) -> str:
    sign = ">=" if outcome.is_least else "<="
    return f"{sign} {number(outcome.limit)} {outcome.figure.unit}".rstrip()
