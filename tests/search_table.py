"""The table of all rotors of a grid that the search's test looks through, and how it is made.

    python -m tests.search_table FOLDER

sweeps `tests/data/search_grid.toml` into FOLDER (2000 quick designs, some 25 minutes of a core; it
goes on where it was stopped) and writes `tests/data/search_grid.csv`.
"""

import csv
import sys
from collections.abc import Mapping
from pathlib import Path

from lamwright.app.study import Study, StudyLimit, Value
from lamwright.app.study_file import read_study

DATA = Path(__file__).parent / "data"
STUDY, TABLE = DATA / "search_grid.toml", DATA / "search_grid.csv"
FIGURES = ("torque_nm", "torque_ripple_percent", "yield_margin", "saliency_ratio", "power_factor")
DIGITS = 7

Point = tuple[Value, ...]


def grid_study() -> Study:
    """The study of the grid."""
    return read_study(STUDY)


def read_table() -> dict[Point, tuple[str, str, dict[str, float]]]:
    """Outcome, stage and figures of each point, by its values in the order of the study's keys."""
    keys = grid_study().keys
    rows = {}
    with TABLE.open(encoding="utf-8", newline="") as file:
        for row in csv.DictReader(line for line in file if not line.startswith("#")):
            point = tuple(_number(row[key.key], key.whole) for key in keys)
            figures = {name: float(row[name]) for name in FIGURES if row[name]}
            rows[point] = (row["outcome"], row["stage"], figures)
    return rows


def write_table(found: Mapping[Point, tuple[str, str, Mapping[str, float]]]) -> None:
    """The table as CSV, in the order of the grid."""
    study = grid_study()
    with TABLE.open("w", encoding="utf-8", newline="") as file:
        file.write("# Invented rotors; made by python -m tests.search_table\n")
        writer = csv.writer(file, lineterminator="\n")
        writer.writerow([*(key.key for key in study.keys), "outcome", "stage", *FIGURES])
        for point in sorted(found):
            outcome, stage, figures = found[point]
            numbers = [f"{figures[name]:.{DIGITS}g}" if figures else "" for name in FIGURES]
            writer.writerow([*(f"{value:g}" for value in point), outcome, stage, *numbers])


def table_limits() -> tuple[StudyLimit, ...]:
    """The study's limits: the base design's own on other figures hold everywhere in the grid."""
    return grid_study().limits


def _number(text: str, is_whole: bool) -> Value:
    return int(text) if is_whole else float(text)


def main() -> None:
    """Sweep and write."""
    from lamwright.app.sweep import sweep

    report = sweep(STUDY, sys.argv[1])
    names = [key.key for key in report.study.keys]
    write_table(
        {
            tuple(row.values[name] for name in names): (row.outcome, row.stage, row.figures)
            for row in report.rows
        }
    )


if __name__ == "__main__":
    main()
