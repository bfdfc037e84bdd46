"""What `ledger` shows on the terminal: plain lines that also read well in a file."""

from collections.abc import Iterator, Sequence

import click

from .ledger import Ledger
from .ledger_rows import Columns, Row
from .ledger_study import KeptStudy
from .ledger_tables import (
    best_rows,
    differences,
    missed_limits,
    reasons,
    value_of,
)
from .lines import number

REASONS = 6  # classes of reasons that are told


def print_progress(ledger: Ledger) -> None:
    """How far the study is, why designs have no figures, and the best of each goal."""
    study = ledger.study
    rows = ledger.rows(figures=study.figures)
    click.echo(_progress(ledger, study, rows))
    told = reasons(rows)
    for outcome, reason, count in told[:REASONS]:
        click.echo(f"  {outcome} {count}: {reason}")
    if len(told) > REASONS:
        rest = sum(count for _, _, count in told[REASONS:])
        click.echo(f"  and {rest} more; --where 'outcome != \"done\"' lists them")
    bests = best_rows(study, rows)
    if not bests:
        click.echo("no design has a figure of a goal yet")
    for best in bests:
        missed = "" if best.holds else f"; misses {', '.join(missed_limits(study, best.row))}"
        click.echo(
            f"{best.sense} {best.figure}: {_with_error(best.row, best.figure)}, design "
            f"{best.row.number} ({stated_values(best.row)}){missed}"
        )
    if any(not best.holds for best in bests):
        click.echo("no design holds every limit yet: these are the best of all")


def _progress(ledger: Ledger, study: KeptStudy, rows: Sequence[Row]) -> str:
    counts = ledger.outcomes()
    planned = ledger.noted("planned")
    of = f" of {planned}" if planned else ""
    holding = sum(1 for row in rows if row.passes)
    parts = [f"{counts[name]} {name}" for name in ("done", "rejected", "failed") if name in counts]
    limits = f", {holding} hold every limit" if rows else ""
    running = "; going on now" if ledger.is_written else ""
    listed = f" ({', '.join(parts)}{limits})" if parts else ""
    return f"{study.name}: {len(rows)}{of} designs{listed}{running}"


def stated_values(row: Row) -> str:
    """The row's keys and values in one line."""
    return ", ".join(f"{key} = {_keyed(value)}" for key, value in row.values.items())


def print_rows(study: KeptStudy, columns: Columns, rows: Sequence[Row], count: int) -> None:
    """Rows as a table: keys, figures of goals and limits, reason."""
    figures = [name for name in study.figures if name in columns.figures]
    names = ["number", "outcome", "passes", *columns.keys, *figures]
    cells = [[_shown(row, name) for name in names] for row in rows]
    heads = ["design" if name == "number" else name for name in names]
    for line in _aligned(
        [[*heads, "reason"], *([*c, r.reason] for c, r in zip(cells, rows, strict=True))]
    ):
        click.echo(line)
    if count > len(rows):
        click.echo(f"{len(rows)} of {count} designs; --limit {count} lists all")
    else:
        click.echo(f"{count} designs" if count != 1 else "1 design")


def print_comparison(columns: Columns, first: Row, second: Row) -> None:
    """Two rows beside each other."""
    lines = [["", f"design {first.number}", f"design {second.number}", "change", "beyond errors"]]
    lines.append(["outcome", first.outcome, second.outcome, "", ""])
    lines.append(["passes", _flag(first.passes), _flag(second.passes), "", ""])
    for one in differences(columns, first, second):
        beyond = {True: "yes", False: "no", None: ""}[one.is_beyond]
        lines.append(
            [
                one.name,
                _compared(first, one.name),
                _compared(second, one.name),
                _change(one.first, one.second),
                beyond,
            ]
        )
    for line in _aligned(lines):
        click.echo(line)
    for row in (first, second):
        if row.reason:
            click.echo(f"design {row.number}: {row.reason}")


def _aligned(lines: Sequence[Sequence[str]]) -> Iterator[str]:
    """Lines with columns as wide as their widest cell; texts that are numbers end on the right."""
    widths = [max(len(line[k]) for line in lines) for k in range(len(lines[0]))]
    right = [all(_is_number(line[k]) for line in lines[1:]) for k in range(len(lines[0]))]
    for line in lines:
        cells = [
            cell.rjust(width) if is_right else cell.ljust(width)
            for cell, width, is_right in zip(line, widths, right, strict=True)
        ]
        yield "  ".join(cells).rstrip()


def _is_number(text: str) -> bool:
    return not text or text[0] in "+-.0123456789"


def _shown(row: Row, name: str) -> str:
    value = value_of(row, name)
    if name in row.values:
        return _keyed(value)
    return _flag(value) if name == "passes" else "" if value is None else _plain(value)


def _flag(value: object) -> str:
    return "" if value is None else "yes" if value else "no"


def _keyed(value: object) -> str:
    """A key's value as a designer writes it."""
    return f"{value:.6g}" if isinstance(value, float) else str(value)


def _plain(value: object) -> str:
    return number(value) if isinstance(value, float) else str(value)


def _with_error(row: Row, figure: str) -> str:
    return _measured(row.figures[figure], row.errors.get(figure))


def _compared(row: Row, name: str) -> str:
    if name in row.values:
        return _keyed(row.values[name])
    return _with_error(row, name) if name in row.figures else ""


def _measured(value: object, error: float | None) -> str:
    if value is None:
        return ""
    return _plain(value) if error is None else f"{_plain(value)} +- {error:.2g}"


def _change(first: object, second: object) -> str:
    if isinstance(first, str) or isinstance(second, str):
        return "" if first == second else "other"
    if not isinstance(first, float | int) or not isinstance(second, float | int) or first == second:
        return ""
    return f"{100.0 * (second - first) / abs(first):+.2f} %" if first else f"{second - first:+.4g}"
