"""The work of `ribs`: the elastic stress, then chapters and files."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from functools import partial
from pathlib import Path

from lamwright.geometry.design_file import Machine, design_hash
from lamwright.geometry.section import CrossSection
from lamwright.geometry.whole_file import write_text
from lamwright.postprocess.figure_errors import error_values, without_error
from lamwright.postprocess.files import json_text
from lamwright.postprocess.quantities import Figure, figures_of
from lamwright.postprocess.rib_cautions import rib_cautions
from lamwright.postprocess.rib_tables import RibRow, rib_columns, rib_rows, ribs_csv
from lamwright.postprocess.table_errors import Columns
from lamwright.postprocess.verdict import RPM
from lamwright.solver.tolerance import ToleranceName, tolerance_settings

from .chapter import made_chapter
from .desk import Desk
from .progress import Stopwatch
from .ribbed import Ribbed, RibChapter, RibChapterMaker, RibWishes, Rows
from .version import version

RIBS_FILE, TABLE_FILE = "ribs.json", "ribs.csv"


@dataclass(frozen=True, slots=True)
class RibsReport:
    """What `ribs` has found."""

    design_name: str
    sections: tuple[tuple[str, tuple[Figure, ...]], ...]  # of each chapter
    ribs: tuple[RibRow, ...]  # of the rotor's own period
    errors: Mapping[str, float]  # by the figures' keys, in their units
    without_error: Mapping[str, str]  # why others have none, beside what their declaration says
    table_errors: Mapping[str, Columns]  # of the columns, by file
    facts: Mapping[str, str | bool]  # by key, what is no number
    tables: Mapping[str, Rows]  # by key
    least_margin: float  # yield margin asked for
    cautions: tuple[str, ...]
    not_given: tuple[str, ...]
    seconds: Mapping[str, float]  # wall time by phase

    @property
    def figures(self) -> dict[str, Figure]:
        """All figures by key in their order."""
        return {figure.key: figure for _, figures in self.sections for figure in figures}

    @property
    def margin(self) -> float:
        """The least yield margin: of the spin alone, and with fit, heat and magnets if known."""
        keys = ("yield_margin", "yield_margin_pressed")
        return min(self.figures[key].value for key in keys if key in self.figures)

    @property
    def passes(self) -> bool:
        """Whether the design's limit of the yield margin holds; being equal meets it."""
        return self.margin >= self.least_margin


def ribbed_machine(
    machine: Machine,
    section: CrossSection,
    watch: Stopwatch,
    tolerance: ToleranceName,
    wishes: RibWishes,
    pictures: bool,
) -> Ribbed:
    """The machine with its elastic stress at overspeed.

    Raises:
        NotConverged: the peaks did not settle.
    """
    _, settings, _ = tolerance_settings(tolerance)
    duty = machine.design.duty
    with watch.phase("stress"):
        stress = Desk().stress(
            section,
            machine.rotor_steel,
            duty.overspeed_factor * duty.maximum_speed_rpm / RPM,
            settings,
        )
    return Ribbed(machine, section, stress, settings, watch, wishes, pictures)


def write_results(
    ribbed: Ribbed,
    stage: Path,
    tolerance: ToleranceName,
    makers: Sequence[tuple[str, RibChapterMaker]],
) -> RibsReport:
    """All files into `stage`, with those of the chapters; returns what `ribs.json` says."""
    machine, watch = ribbed.machine, ribbed.watch
    chapters = [made_chapter(watch, name, partial(write, ribbed, stage)) for name, write in makers]
    whole = [chapter for chapter in chapters if isinstance(chapter, RibChapter)]
    groups = [chapter.of_ribs for chapter in whole if chapter.of_ribs]
    of_ribs = [chapter.rib_errors for chapter in whole if chapter.rib_errors]
    bars = [{k: v for own in rib for k, v in own.items()} for rib in zip(*of_ribs, strict=True)]
    rows = rib_rows(ribbed.section, ribbed.stress.report, *groups, errors=bars)
    report = RibsReport(
        design_name=machine.design.name,
        sections=tuple(
            (name, tuple(figure for group in chapter.figures for figure in figures_of(group)))
            for (name, _), chapter in zip(makers, chapters, strict=True)
        ),
        ribs=rows,
        errors={key: error for chapter in chapters for key, error in chapter.errors.items()},
        without_error={key: why for one in chapters for key, why in one.without_error.items()},
        table_errors={
            TABLE_FILE: rib_columns(rows),
            **{name: columns for one in chapters for name, columns in one.table_errors.items()},
        },
        facts={key: fact for chapter in whole for key, fact in chapter.facts.items()},
        tables={key: rows for chapter in whole for key, rows in chapter.tables.items()},
        least_margin=machine.design.limits.least_yield_margin,
        cautions=(
            *rib_cautions(machine.rotor_steel),
            *dict.fromkeys(line for chapter in chapters for line in chapter.cautions),
        ),
        not_given=tuple(line for chapter in chapters for line in chapter.not_given),
        seconds={time.phase: round(time.seconds, 3) for time in watch.times},
    )
    if ribbed.pictures:
        from lamwright.postprocess.figures_ribs import RibsPicture, write_ribs_figure

        tested = report.figures.get("life_line_tested_to_cycles")
        write_ribs_figure(
            stage,
            RibsPicture(
                report.design_name,
                report.ribs,
                report.least_margin,
                None if tested is None else tested.value,
            ),
        )
    write_text(stage / TABLE_FILE, ribs_csv(report.ribs))
    write_text(stage / RIBS_FILE, json_text(_record(report, machine, tolerance)))
    return report


def _record(report: RibsReport, machine: Machine, tolerance: ToleranceName) -> dict[str, object]:
    figures = [figure for _, own in report.sections for figure in own]
    values = error_values(figures, report.errors)
    return {
        "design": report.design_name,
        "passes": report.passes,
        "least_yield_margin": report.least_margin,
        **values,
        **report.facts,
        "ribs": [row.record for row in report.ribs],
        **{key: list(rows) for key, rows in report.tables.items()},
        "table_errors": {name: dict(columns) for name, columns in report.table_errors.items()},
        "errors_not_given": without_error(figures, report.errors, report.without_error),
        "estimates": [key for key, figure in report.figures.items() if figure.is_estimate],
        "not_given": list(report.not_given),
        "cautions": list(report.cautions),
        "tolerance": tolerance,
        "version": version(),
        "design_hash": design_hash(machine.design, machine.cards),
        "seconds": dict(report.seconds),
    }
