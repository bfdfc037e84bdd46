"""The report of `map`."""

from pathlib import Path

from lamwright.geometry.design_file import Machine, design_hash
from lamwright.postprocess.report import Grid as Table
from lamwright.postprocess.report import Report, Section, word_rows

from .mapping import MapReport
from .report_parts import (
    CAUTION,
    figure_grid,
    lines_section,
    picture_blocks,
    repeat_section,
    times_grid,
)
from .version import version

PICTURES = {
    "map": ("map",),
    "control": ("control",),
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


def map_report(
    report: MapReport, machine: Machine, folder: Path, tolerance: str, command: str
) -> Report:
    """The report of the command `map`.

    Args:
        report: what it has found.
        machine: the design with its cards.
        folder: with the pictures that have been drawn.
        tolerance: that was asked for.
        command: that computes it again.
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
    missing = len(report.not_given)
    outcome = f"{missing} results not given for want of data" if missing else "all results given"
    return Report(
        title=f"Flux map of {report.design_name}",
        subtitle=f"lamwright {version()}, tolerance {tolerance}, design {digest[:16]}",
        outcome=outcome,
        mark="wary" if missing else "good",
        sections=(
            *(chapter for chapter in chapters if chapter.blocks),
            Section(
                "How it was computed",
                (
                    Table(("what", "how", "source"), word_rows(METHOD), "(m): cited from memory"),
                    times_grid(report.seconds),
                ),
            ),
            lines_section("What was not computed", report.not_given, "nothing was left out"),
            lines_section("Cautions", report.cautions, "none"),
            repeat_section(command, machine, digest, machine.path.read_text(encoding="utf-8")),
        ),
        closing=CAUTION,
    )
