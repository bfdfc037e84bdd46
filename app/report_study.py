"""The report of `sweep` and `search`: which designs were computed, and which are worth a look."""

from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING

from lamwright.postprocess.report import (
    Block,
    Cell,
    Grid,
    Paragraph,
    Picture,
    Report,
    Section,
    numeral,
    words,
)

from .ledger import Ledger
from .ledger_rows import Row
from .ledger_tables import best_of, missed_limits, ranked, told_reasons
from .lines import number
from .report_parts import CAUTION, error_cell, lines_section, method_grid, without_empty
from .report_repeat import study_section
from .study_figures import known_figures
from .version import version

if TYPE_CHECKING:
    from .study import Study

MOST_LISTED = 25
CAPTIONS = {
    "study_parallel": "Every design as a line across what varies and what was found.",
    "study_effects": "What each key does to each figure, all else mixed.",
    "study_heat": "Figures over the two keys that vary.",
    "study_front": "Designs that no other beats in both goals, with the limits.",
}
QUICK = (
    "effort quick: each design was computed on a coarse field, enough to sort designs by; assess "
    "the one that is chosen"
)


def study_report(
    study: "Study", ledger: Ledger, pictures: Sequence[Path], command: str, options: str
) -> Report:
    """The report of a study.

    Args:
        study: as read from its file.
        ledger: its designs.
        pictures: that were drawn of it, in the folder of the report.
        command: that goes on with it, or computes it again, as `sweep`.
        options: of that command, as they are typed.
    """
    rows = ledger.rows()
    holding = [row for row in rows if row.passes]
    outcomes = ledger.outcomes()
    counts = ", ".join(f"{count} {name}" for name, count in sorted(outcomes.items()))
    found = f"{len(holding)} of {len(rows)} designs hold every limit"
    return Report(
        title=f"Study {study.name}",
        subtitle=f"lamwright {version()}, effort {study.effort}, study {study.hash[:16]}",
        outcome=found,
        mark="good" if holding else "bad",
        sections=(
            Section("Best of each goal", (_best(ledger), *_note(study))),
            Section("Pictures", _pictures(pictures)),
            Section("Designs", _designs(study, holding or rows, bool(holding))),
            _asked(study, counts),
            _refused(ledger),
            Section("How it was computed", (method_grid(_method(command)),)),
            lines_section(
                "What was not computed",
                (QUICK,) if study.effort == "quick" else (),
                "each design was computed as by assess, without pictures",
            ),
            lines_section(
                "Cautions", ("a study compares designs; none of them is signed off by it",), ""
            ),
            study_section(study, command, options),
        ),
        closing=CAUTION,
    )


def _method(command: str) -> tuple[tuple[str, str, str], ...]:
    searched = (
        (
            "search",
            "generations by crossing and change of the best; designs without figures graded by "
            "the stage they reached",
            "NSGA-II: Deb, Pratap, Agarwal & Meyarivan 2002 (m)",
        ),
        (
            "progress",
            "hypervolume of the front, reference at 1.1 of its worst",
            "Zitzler & Thiele 1999 (m); Ishibuchi et al. 2018 (m)",
        ),
    )
    return (
        ("figures", "each design on its own meshes as in assess, by effort", "see that report"),
        (
            "screening",
            "stages, the cheapest first: values, design file, geometry, ribs in closed form, "
            "figures; where a design ends its reason is kept",
            "common practice, no source",
        ),
        *(searched if command == "search" else ()),
    )


def _note(study: "Study") -> tuple[Block, ...]:
    return (Paragraph(f"Note of the study file: {study.note}"),) if study.note else ()


def _label(name: str) -> str:
    shown = known_figures().get(name)
    return f"{shown.label}, {shown.unit}".rstrip(", ") if shown else name


def _value(row: Row, name: str) -> tuple[Cell, Cell]:
    value = row.figures.get(name)
    place = f"{row.number}/{name}"
    shown = numeral("") if value is None else numeral(number(value), place)
    return shown, error_cell(row.errors, name, place)


def _best(ledger: Ledger) -> Grid:
    study = ledger.study
    lines = []
    for best in best_of(ledger):
        missed = ", ".join(missed_limits(study, best.row))
        mark = (
            words("holds every limit", "good") if best.holds else words(f"misses {missed}", "bad")
        )
        goal = words(f"{best.sense} {_label(best.figure)}")
        keys = words(_keys(best.row))
        lines.append(
            (goal, *_value(best.row, best.figure), numeral(str(best.row.number)), keys, mark)
        )
    heads = ("goal", "value", "+-", "design", "keys", "limits")
    return without_empty(Grid(heads, tuple(lines)))


def _keys(row: Row) -> str:
    return ", ".join(f"{key} = {_stated(value)}" for key, value in row.values.items())


def _stated(value: object) -> str:
    return f"{value:.6g}" if isinstance(value, float) else str(value)


def _pictures(paths: Sequence[Path]) -> tuple[Block, ...]:
    names = dict.fromkeys(path.stem for path in paths)
    return tuple(
        Picture(name, CAPTIONS.get(name.rstrip("_0123456789"), name.replace("_", " ")))
        for name in names
    )


def _designs(study: "Study", rows: Sequence[Row], holding: bool) -> tuple[Block, ...]:
    """A table of the first designs by the first goal."""
    listed, order = list(rows), "in order of finishing"
    for goal in study.goals[:1]:
        listed, order = ranked(rows, goal.figure, goal.sense), f"by {_label(goal.figure)}"
    figures = [g.figure for g in study.goals] + [limit.figure for limit in study.limits]
    names = list(dict.fromkeys(figures))
    keys = [key.key for key in study.keys]
    heads = ["design", *keys, *(head for name in names for head in (_label(name), "+-"))]
    lines = tuple(
        (
            numeral(str(row.number)),
            *(numeral(_stated(row.values.get(key, "")), f"{row.number}/{key}") for key in keys),
            *(cell for name in names for cell in _value(row, name)),
        )
        for row in listed[:MOST_LISTED]
    )
    of = "that hold every limit" if holding else "of which none holds every limit"
    told = f"The first {len(lines)} of {len(listed)} designs {of}, {order}."
    return Paragraph(told), without_empty(Grid(tuple(heads), lines))


def _asked(study: "Study", counts: str) -> Section:
    limits = [
        f"{_label(limit.figure)}: "
        + " and ".join(
            f"{sign} {number(end)}"
            for sign, end in ((">=", limit.least), ("<=", limit.most))
            if end is not None
        )
        for limit in study.limits
    ]
    goals = [f"{goal.sense} {_label(goal.figure)}" for goal in study.goals]
    rows = [
        ("base design", study.base_name),
        ("keys", ", ".join(key.key for key in study.keys)),
        ("goals", "; ".join(goals)),
        ("limits", "; ".join(limits) or "none"),
        ("sampling", study.sampling.kind),
        ("effort, tolerance", f"{study.effort}, {study.tolerance}"),
        ("designs", counts),
    ]
    return Section(
        "What was asked", (Grid(("what", "asked"), tuple((words(a), words(b)) for a, b in rows)),)
    )


def _refused(ledger: Ledger) -> Section:
    lines = tuple(
        (words(outcome), words(reason), numeral(str(count)))
        for outcome, reason, count in told_reasons(ledger.reasons())
    )
    table: Block = Grid(("outcome", "reason", "designs"), lines)
    return Section("Designs without figures", (table if lines else Paragraph("none"),))
