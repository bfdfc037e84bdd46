"""What `ledger` shows on the terminal: plain lines that also read well in a file."""

import sys
from collections.abc import Callable, Iterator, Sequence
from operator import itemgetter
from types import NoneType
from typing import Any, cast

import click

from lamwright.postprocess.quantities import DIGITS, PLAIN_BELOW, PLAIN_FROM, error_number, number

from .imports import collector_at_rest
from .ledger import Ledger
from .ledger_rows import Columns, Row
from .ledger_study import KeptStudy
from .ledger_tables import best_of, differences, missed_limits, told_reasons

_FIRST_SIGN = itemgetter(slice(0, 1))
_NUMERIC = {"", *"+-.0123456789"}  # the first signs of numbers, and no text
FEW = 100  # rows; where half of the first differ, most do
REASONS = 6  # classes of reasons that are told


def print_progress(ledger: Ledger) -> None:
    """How far the study is, why designs have no figures, and the best of each goal."""
    # Only what is shown is read: of 100 000 rows in 0.3 s, where all took 1.7.
    study = ledger.study
    click.echo(_progress(ledger, study))
    told = told_reasons(ledger.reasons())
    for outcome, reason, count in told[:REASONS]:
        click.echo(f"  {outcome} {count}: {reason}")
    if len(told) > REASONS:
        rest = sum(count for _, _, count in told[REASONS:])
        click.echo(f"  and {rest} more; --where 'outcome != \"done\"' lists them")
    bests = best_of(ledger)
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


def _progress(ledger: Ledger, study: KeptStudy) -> str:
    counts = ledger.outcomes()
    planned = ledger.noted("planned")
    of = f" of {planned}" if planned else ""
    parts = [f"{counts[name]} {name}" for name in ("done", "rejected", "failed") if name in counts]
    limits = f", {ledger.holding()} hold every limit" if counts else ""
    running = "; going on now" if ledger.is_written else ""
    listed = f" ({', '.join(parts)}{limits})" if parts else ""
    return f"{study.name}: {sum(counts.values())}{of} designs{listed}{running}"


def stated_values(row: Row) -> str:
    """The row's keys and values in one line."""
    return ", ".join(f"{key} = {_keyed(value)}" for key, value in row.values.items())


def print_rows(ledger: Ledger, where: str | None, sort: str, most: int) -> None:
    """Rows as a table: keys, figures of goals and limits, reason.

    Args:
        ledger: that holds them.
        where: a condition, or None for all.
        sort: name of a column, a minus before it for the other order.
        most: how many are listed.
    """
    columns, count = ledger.columns, ledger.count_where(where)
    figures = [name for name in ledger.study.figures if name in columns.figures]
    names = ["number", "outcome", "passes", *columns.keys, *figures, "reason"]
    keys, plain = dict.fromkeys(columns.keys, _keyed), dict.fromkeys(figures, _plain)
    shown = {"passes": _flag, **keys, **plain}
    texts, heads = [shown.get(name, str) for name in names], ["design", *names[1:]]
    with collector_at_rest():  # its search takes a tenth of the time of many rows
        rows = ledger.cells(names, where, sort, most)
        # By columns: 100 000 rows in 0.5 s, where row by row took 2.7.
        by_column = zip(texts, zip(*rows, strict=True), strict=False)
        cells = [_column(values, text) for text, values in by_column]
        lines = _columns(heads, cells or [[] for _ in heads])
        # Not by `echo`, which would search 10 MB for colours.
        sys.stdout.write("\n".join(lines) + "\n")
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
    return _columns(lines[0], list(zip(*lines[1:], strict=True)) or [()] * len(lines[0]))


def _columns(heads: Sequence[str], cells: Sequence[Sequence[str]]) -> Iterator[str]:
    """Lines of columns, each as wide as its widest cell."""
    parts = []
    for head, column in zip(heads, cells, strict=True):
        width = max(len(head), max(map(len, column), default=0))
        is_right = set(map(_FIRST_SIGN, column)) <= _NUMERIC
        parts.append(f"%{'' if is_right else '-'}{width}s")
    line = "  ".join(parts)
    return map(str.rstrip, map(line.__mod__, (tuple(heads), *zip(*cells, strict=True))))


def _column(values: Sequence[object], text: Callable[[Any], str]) -> Sequence[str]:
    """Texts of a column, empty for None; numbers all in one go where they are of one form."""
    kinds = set(map(type, values))
    if len(kinds - {NoneType}) == 1 and len(set(values[:FEW])) < FEW // 2:
        known = {value: "" if value is None else text(value) for value in set(values)}
        return [known[value] for value in values]
    if NoneType in kinds:
        given = iter(_column([value for value in values if value is not None], text))
        return ["" if value is None else next(given) for value in values]
    if kinds == {float} and text in (_keyed, _plain):
        numbers = cast("Sequence[float]", values)
        form = "%.6g\n" if text is _keyed else f"%#.{DIGITS}g\n"
        texts = (form * len(numbers) % tuple(numbers)).splitlines()
        if text is _plain:
            others = [
                k for k, one in enumerate(numbers) if not PLAIN_FROM <= abs(one) < PLAIN_BELOW
            ]
            for k in others:
                texts[k] = _plain(numbers[k])
        return texts
    return list(map(text, values))


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
    return _plain(value) if error is None else f"{_plain(value)} +- {error_number(error)}"


def _change(first: object, second: object) -> str:
    if isinstance(first, str) or isinstance(second, str):
        return "" if first == second else "other"
    if not isinstance(first, float | int) or not isinstance(second, float | int) or first == second:
        return ""
    return f"{100.0 * (second - first) / abs(first):+.2f} %" if first else f"{second - first:+.4g}"
