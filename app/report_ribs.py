"""The report of `ribs`, and its part in that of `assess`."""

from collections.abc import Mapping
from pathlib import Path

from lamwright.geometry.design_file import Machine, design_hash
from lamwright.postprocess.report import Block, Grid, Report, Section, numeral, words

from .lines import number
from .report_parts import (
    CAUTION,
    error_cell,
    figure_grid,
    lines_section,
    method_grid,
    picture_blocks,
    records_grid,
    times_grid,
    without_empty,
)
from .report_repeat import repeat_section
from .rib_work import RibsReport
from .thin_screen import PRICE, THIN_TABLE
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
THIN_COLUMNS = (
    ("rib", "rib"),
    ("width_before_mm", "was, mm"),
    ("width_mm", "thinnest, mm"),
    ("floor_mm", "floor, mm"),
    ("yield_margin_before", "margin was"),
    ("yield_margin", "margin"),
    (PRICE, "torque, N m for 0.1 mm more"),
)
PRESSED = "yield_margin_pressed"  # with fit, heat and magnets
SURVIVED = "overspeed_test_survived"
# What is done, and whose it is; (m) marks what is cited from memory.
METHOD = (
    (
        "ribs",
        "force and moment of each rib's narrowest section as a beam's; the peak on a mesh refined "
        "until it settles",
        "Timoshenko & Goodier 1970 (m); Becker & Rannacher 2001 (m)",
    ),
    (
        "yielding",
        "plane-stress plasticity by return mapping, load stepped up and back",
        "Simo & Taylor 1986 (m)",
    ),
    (
        "burst",
        "limit load between a lower and an upper bound, yield by von Mises; beside it the mean "
        "hoop stress of a whole cut",
        "Drucker, Prager & Greenberg 1952 (m); Robinson 1944 (m)",
    ),
    ("start and stop", "shakedown of cycles from rest", "Koenig 1987 (m)"),
    (
        "life",
        "local stress and strain by Neuber's rule, the mean stress by the rule that the steel "
        "card names, damage summed",
        "Neuber 1961, Ramberg & Osgood 1943, Masing 1926, Goodman 1899, Morrow 1968, Smith, "
        "Watson & Topper 1970, Basquin 1910, Miner 1945 (m)",
    ),
    (
        "fit, heat, magnets",
        "contact of shaft and lamination without friction, thermal strain beside it",
        "derived",
    ),
    (
        "modes",
        "natural frequencies in the plane by cyclic symmetry, bodies free or held",
        "Thomas 1979 (m)",
    ),
)
PICTURES = {
    "elastic": ("stress", "ribs"),
    "fit": ("fit_pressure",),
    "plastic": ("plastic",),
    "modes": ("modes",),
    "price of ribs": ("thin",),
}


def ribs_report(
    report: RibsReport, machine: Machine, folder: Path, tolerance: str, options: str
) -> Report:
    """The report of the command `ribs`.

    Args:
        report: what it has found.
        machine: the design with its cards.
        folder: with the pictures that have been drawn.
        tolerance: that was asked for.
        options: of the command that computes it again.
    """
    margin, asked = number(report.margin), number(report.least_margin)
    holds = report.passes
    digest = design_hash(machine.design, machine.cards)
    return Report(
        title=f"Ribs of {report.design_name}",
        subtitle=f"lamwright {version()}, tolerance {tolerance}, design {digest[:16]}",
        outcome=f"{'PASSES' if holds else 'FAILS'}: yield margin {margin}, asked {asked}",
        mark="good" if holds else "bad",
        sections=(
            Section("Verdict", (margin_grid(report),)),
            *rib_sections(report, folder),
            Section("How it was computed", (method_grid(METHOD), times_grid(report.seconds))),
            lines_section("What was not computed", report.not_given, "nothing was left out"),
            lines_section("Cautions", report.cautions, "none"),
            repeat_section("ribs", options, machine, digest),
        ),
        closing=CAUTION,
    )


def margin_grid(report: RibsReport) -> Grid:
    """The yield margin that is judged: the least of all states that are known."""
    margin = min(
        (report.figures[key] for key in ("yield_margin", PRESSED) if key in report.figures),
        key=lambda figure: figure.value,
    )
    found = (
        words(margin.label),
        numeral(f">= {number(report.least_margin)}", "least_yield_margin"),
        numeral(number(margin.value), margin.key),
        error_cell(report.errors, margin.key),
        words("holds", "good") if report.passes else words("MISSED", "bad"),
    )
    return without_empty(Grid(("limit", "asked", "found", "+-", "outcome"), (found,)))


def rib_sections(report: RibsReport, folder: Path, beside: bool = False) -> tuple[Section, ...]:
    """A section for each chapter that has something, and the table of ribs.

    Args:
        report: what `ribs` has found.
        folder: with the pictures that have been drawn.
        beside: of an assessment, which shows the stress and the ribs' stresses already.
    """
    records = [row.record for row in report.ribs]
    shown = ("stress",) if beside else ()
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
    stresses = () if beside else (records_grid(records, RIB_COLUMNS, "ribs"),)
    work = records_grid(records, WORK_COLUMNS, "ribs", _tested(report))
    found.append(Section("Ribs: one by one", (*stresses, work, *_thin(report), *facts)))
    return tuple(section for section in found if section.blocks)


def _tested(report: RibsReport) -> str:
    """How far the lives in the table may be believed."""
    most = report.figures.get("life_line_tested_to_cycles")
    if most is None:
        return ""
    return f"Read a life beyond {number(most.value)} starts, which the card was tested to, as more."


def _thin(report: RibsReport) -> tuple[Grid, ...]:
    """The thinnest ribs, where they were asked for."""
    rows = report.tables.get(THIN_TABLE, ())
    note = "Thinnest ribs that hold, all together; their torque's price by the field's slopes."
    return (records_grid(rows, THIN_COLUMNS, THIN_TABLE, note),) if rows else ()


def _facts(facts: Mapping[str, str | bool]) -> Grid:
    shown = {True: "yes", False: "no"}
    rows = tuple(
        (
            words(key.replace("_", " ")),
            words(
                shown[fact] if isinstance(fact, bool) else fact,
                "bad" if key == SURVIVED and not fact else "",
            ),
        )
        for key, fact in facts.items()
    )
    return Grid(("what", "found"), rows)
