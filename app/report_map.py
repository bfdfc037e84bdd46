"""The report of `map`."""

from pathlib import Path

from lamwright.geometry.design_file import Machine, design_hash
from lamwright.postprocess.report import Report, Section
from lamwright.postprocess.verdict import Outcome

from .mapping import MapReport
from .report_parts import (
    CAUTION,
    LIMITS,
    figure_grid,
    limits_grid,
    lines_section,
    method_grid,
    picture_blocks,
    times_grid,
)
from .report_repeat import repeat_section
from .version import version

PICTURES = {
    "map": ("map",),
    "control": ("control_plane",),
    "envelope and efficiency": ("envelope", "efficiency"),
    "ripple and forces": ("ripple", "forces"),
    "losses": ("losses", "loss_density"),
    "yardsticks": ("yardsticks",),
}
METHOD = (
    ("fields", "as in assess, at every pair of currents and position", "see that report"),
    (
        "surface",
        "one coenergy surface, splines of fifth degree, whose slopes are the linkages",
        "derived",
    ),
    (
        "torque",
        "3/2 p (psi_d i_q - psi_q i_d) of the means, compared with Maxwell's stress",
        "Arkkio 1987 (m)",
    ),
    (
        "current angles, envelope",
        "most torque within current, per ampere and per volt, on the surface",
        "Betz, Lagerquist, Jovanovic, Miller & Middleton 1993 (m)",
    ),
    ("iron loss", "hysteresis, eddy and excess loss by the card's points", "Bertotti 1988 (m)"),
    (
        "copper in slots",
        "eddy currents of strands in a slot",
        "Emde 1908, Field 1905 (m)",
    ),
    ("friction in the gap", "torque of coaxial cylinders", "Bilgen & Boulos 1973 (m)"),
)
OTHERS = "At rated current. The other limits of the design are judged by the command assess."


def map_report(
    report: MapReport, machine: Machine, folder: Path, tolerance: str, options: str
) -> Report:
    """The report of the command `map`.

    Args:
        report: what it has found.
        machine: the design with its cards.
        folder: with the pictures that have been drawn.
        tolerance: that was asked for.
        options: of the command that computes it again.
    """
    digest = design_hash(machine.design, machine.cards)
    chapters = [
        Section(
            name.capitalize(),
            (
                *((figure_grid(figures, report.errors),) if figures else ()),
                *picture_blocks(folder, PICTURES.get(name, ())),
            ),
        )
        for name, figures in report.sections
    ]
    outcomes = _judged(report, machine)
    missed = "; ".join(LIMITS[one.key] for one in outcomes if not one.holds)
    judged = f"MISSED: {missed}" if missed else "limits judged here hold" if outcomes else ""
    missing = len(report.not_given)
    given = f"{missing} result{'s'[: missing > 1]} not given" if missing else "all results given"
    return Report(
        title=f"Flux map of {report.design_name}",
        subtitle=f"lamwright {version()}, tolerance {tolerance}, design {digest[:16]}",
        outcome="; ".join(text for text in (judged, given) if text),
        mark="bad" if missed else "wary" if missing else "good",
        sections=(
            Section("Limits", (limits_grid(outcomes, report.errors, OTHERS),)),
            *(chapter for chapter in chapters if chapter.blocks),
            Section(
                "How it was computed",
                (
                    method_grid(METHOD),
                    times_grid(report.seconds),
                ),
            ),
            lines_section("What was not computed", report.not_given, "nothing was left out"),
            lines_section("Cautions", report.cautions, "none"),
            repeat_section("map", options, machine, digest),
        ),
        closing=CAUTION,
    )


def _judged(report: MapReport, machine: Machine) -> list[Outcome]:
    """The limits of the design on figures that the map has."""
    limits = machine.design.limits
    asked = (
        ("least_torque_nm", "rated_torque_nm", limits.least_torque_nm),
        ("least_saliency_ratio", "yardstick_design_saliency_ratio", limits.least_saliency_ratio),
    )
    found = {figure.key: figure for figure in report.figures}
    return [
        Outcome(key, found[figure], limit, True) for key, figure, limit in asked if figure in found
    ]
