"""How far each length and angle of a design may move before its outline breaks."""

from dataclasses import dataclass
from pathlib import Path

import click

from lamwright.geometry.design_file import read_machine
from lamwright.geometry.key_ranges import KeyRange, key_ranges
from lamwright.geometry.whole_file import write_text
from lamwright.postprocess.files import csv_text, prepared_folder, staged
from lamwright.solver.design_motion import shape_keys

from .lamination import section_of

RANGES_FILE = "ranges.csv"
HEADER = ("key", "value", "least", "most", "check_below", "check_above", "below", "above")


@dataclass(frozen=True, slots=True)
class RangesReport:
    """The ranges of a design, and the table written, if any."""

    design_name: str
    ranges: tuple[KeyRange, ...]
    table: Path | None


def ranges(path: Path, out: Path | None) -> RangesReport:
    """Find the range of every key; with `out` also write them to `ranges.csv` in that folder.

    Raises:
        DesignError: the design cannot be read or drawn; one line for each fault.
        LamwrightError: the folder cannot be written.
    """
    machine = read_machine(path)
    section_of(machine)  # a design with faults has no ranges
    found = key_ranges(machine.design, shape_keys(machine.design))
    if out is None:
        return RangesReport(machine.design.name, found, None)
    folder = prepared_folder(out)
    with staged(folder) as stage:
        write_text(stage / RANGES_FILE, csv_text(HEADER, [_row(one) for one in found]))
    return RangesReport(machine.design.name, found, folder / RANGES_FILE)


def print_ranges(report: RangesReport) -> None:
    """A table: key, value, least, most, and the checks that stop the key on either side."""
    lines = [["key", "value", "least", "most", "stops below", "stops above"]]
    for one in report.ranges:
        values = [_number(x) for x in (one.value, one.least.value, one.most.value)]
        lines.append([one.key, *values, one.least.code or "-", one.most.code or "-"])
    widths = [max(len(line[k]) for line in lines) for k in range(6)]
    click.echo(f"{report.design_name}: how far each key may move, mm and degrees")
    for key, *cells in lines:
        numbers = "  ".join(c.rjust(w) for c, w in zip(cells[:3], widths[1:4], strict=True))
        checks = "  ".join(c.ljust(w) for c, w in zip(cells[3:], widths[4:], strict=True))
        click.echo(f"{key:<{widths[0]}}  {numbers}  {checks}".rstrip())
    if report.table is not None:
        click.echo(f"ranges: {report.table}")


def _row(one: KeyRange) -> list[str]:
    ends = (one.least, one.most)
    return [
        one.key,
        *(_number(x) for x in (one.value, one.least.value, one.most.value)),
        *(end.code for end in ends),
        *(end.text for end in ends),
    ]


def _number(value: float) -> str:
    return f"{value:.6f}".rstrip("0").rstrip(".")
