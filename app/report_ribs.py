"""The report of `ribs`, and its part in that of `assess`."""

from collections.abc import Mapping, Sequence
from pathlib import Path

from lamwright.geometry.design_file import Machine, design_hash
from lamwright.postprocess.report import Block, Grid, Report, Section, numeral, words

from .lines import number
from .report_parts import (
    CAUTION,
    figure_grid,
    lines_section,
    picture_blocks,
    ribs_grid,
    times_grid,
)
from .report_repeat import repeat_section
from .rib_work import RibsReport
from .version import version

RIB_COLUMNS = (
    ("rib", "rib"),
    ("width_mm", "width, mm"),
    ("tension_mean_mpa", "mean tension, MPa"),
    ("bending_mpa", "bending, MPa"),
    ("peak_mpa", "peak, MPa"),
    ("peak_mpa_error", "peak +-, MPa"),
    ("yield_margin", "yield margin"),
    ("speed_first_yield_rpm", "first yield, 1/min"),
)
WORK_COLUMNS = (
    ("rib", "rib"),
    ("yielded_section_percent", "yielded section, %"),
    ("plastic_strain_percent", "plastic strain, %"),
    ("start_stop_stress_mpa", "start-stop stress, MPa"),
    ("life_2_3_percent_cycles", "starts until 2.3 % cracked"),
    ("life_50_percent_cycles", "starts until half cracked"),
)
PICTURES = {
    "elastic": ("stress", "ribs"),
    "fit": ("fit_pressure",),
    "plastic": ("plastic",),
    "modes": ("modes",),
    "price of ribs": ("thin",),
}


def ribs_report(report: RibsReport, machine: Machine, folder: Path, options: str) -> Report:
    """The report of the command `ribs`.

    Args:
        report: what it has found.
        machine: the design with its cards.
        folder: with the pictures that have been drawn.
        options: of the command that computes it again.
    """
    margin, asked = number(report.margin), number(report.least_margin)
    holds = report.passes
    verdict = Grid(
        ("limit", "asked", "found", "outcome"),
        (
            (
                words("least yield margin at overspeed"),
                numeral(f">= {asked}"),
                numeral(margin),
                words("holds", "good") if holds else words("MISSED", "bad"),
            ),
        ),
    )
    digest = design_hash(machine.design, machine.cards)
    return Report(
        title=f"Ribs of {report.design_name}",
        subtitle=f"lamwright {version()}, design {digest[:16]}",
        outcome=f"{'PASSES' if holds else 'FAILS'}: yield margin {margin}, asked {asked}",
        mark="good" if holds else "bad",
        sections=(
            Section("Verdict", (verdict,)),
            *rib_sections(report, folder),
            lines_section("What was not computed", report.not_given, "nothing was left out"),
            lines_section("Cautions", report.cautions, "none"),
            Section("Where the time went", (times_grid(report.seconds),)),
            repeat_section("ribs", options, machine, digest),
        ),
        closing=CAUTION,
    )


def rib_sections(
    report: RibsReport, folder: Path, shown: Sequence[str] = ()
) -> tuple[Section, ...]:
    """A section for each chapter that has something, and the table of ribs.

    Args:
        report: what `ribs` has found.
        folder: with the pictures that have been drawn.
        shown: pictures that stand elsewhere in the report.
    """
    records = [row.record for row in report.ribs]
    found = [
        Section(
            f"Ribs: {name}",
            (
                *((figure_grid(figures, report.errors),) if figures else ()),
                *picture_blocks(folder, [n for n in PICTURES.get(name, ()) if n not in shown]),
            ),
        )
        for name, figures in report.sections
    ]
    facts: tuple[Block, ...] = (_facts(report.facts),) if report.facts else ()
    tables = (ribs_grid(records, RIB_COLUMNS), ribs_grid(records, WORK_COLUMNS))
    found.append(Section("Ribs: one by one", (*tables, *facts)))
    return tuple(section for section in found if section.blocks)


def _facts(facts: Mapping[str, str | bool]) -> Grid:
    shown = {True: "yes", False: "no"}
    rows = tuple(
        (
            words(key.replace("_", " ")),
            words(shown[fact] if isinstance(fact, bool) else fact, "" if fact else "wary"),
        )
        for key, fact in facts.items()
    )
    return Grid(("what", "found"), rows)
