"""Reports read as by a person who compares each printed number with the JSON file beside it."""

import re
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from decimal import Decimal
from html.parser import HTMLParser
from pathlib import Path

import pypdf

# A number as a cell prints it: the mark of an estimate or a limit's sign before, the unit after.
NUMBER = re.compile(r"(?:~ |>= |<= )?(-?\d+(?:\.\d+)?(?:e[+-]\d+)?)(?: .*)?")
ERROR_DIGITS = 2
SHARE = "of the mean, %"  # the one column that is worked out, from the two numbers beside it


@dataclass(frozen=True)
class Cell:
    """A cell as it is printed, and where its number stands in the JSON file."""

    text: str
    key: str


@dataclass(frozen=True)
class Table:
    """A table as it is printed."""

    heads: tuple[str, ...]
    rows: tuple[tuple[Cell, ...], ...]


class _Reader(HTMLParser):
    def __init__(self, page: str) -> None:
        super().__init__()
        self.tables: list[list[tuple[bool, list[Cell]]]] = []
        self.outcome = ""
        self._key: str | None = None
        self._in_outcome = False
        self._is_head = False
        self.feed(page)

    def handle_starttag(self, tag, attrs):
        marks = dict(attrs)
        if tag == "table":
            self.tables.append([])
        elif tag == "tr":
            self.tables[-1].append((False, []))
        elif tag in ("td", "th"):
            self._key, self._is_head = marks.get("data-key") or "", tag == "th"
            row = self.tables[-1][-1][1]
            self.tables[-1][-1] = (self._is_head, [*row, Cell("", self._key)])
        self._in_outcome = "outcome" in (marks.get("class") or "").split()

    def handle_endtag(self, tag):
        if tag in ("td", "th"):
            self._key = None
        self._in_outcome = False

    def handle_data(self, data):
        if self._key is not None:
            row = self.tables[-1][-1][1]
            row[-1] = Cell(row[-1].text + data, self._key)
        elif self._in_outcome:
            self.outcome += data


def tables_of(page: str) -> list[Table]:
    """Every table of an HTML report."""
    found = []
    for rows in _Reader(page).tables:
        (_, heads), *body = rows
        found.append(Table(tuple(c.text for c in heads), tuple(tuple(row) for _, row in body)))
    return found


def outcome_of(page: str) -> str:
    """The line that is read first."""
    return _Reader(page).outcome.strip()


def is_printed(text: str, value: float, digits: int = 0) -> bool:
    """Whether a number in print is the value rounded to the last printed digit.

    Args:
        text: as printed; "0" is 0 alone, 0.00 what rounds to it.
        value: in the file.
        digits: that count, of a whole number with zeros at its end: 110 for 108; by default all.
    """
    shown = Decimal(text)
    last = int(shown.as_tuple().exponent)
    if digits and shown:
        last = max(last, shown.adjusted() - digits + 1)
    rounding = Decimal("0.5000001").scaleb(last) if shown or last < 0 else Decimal(0)
    return abs(shown - Decimal(value)) <= rounding


def standing_at(place: str, *records: Mapping) -> object:
    """What stands at a place as `ribs/0/peak_mpa` in the first record that has it."""
    for record in records:
        value: object = record
        for part in place.split("/"):
            if isinstance(value, Mapping):
                value = value.get(part)
            elif isinstance(value, Sequence) and not isinstance(value, str):
                value = value[int(part)]
        if value is not None:
            return value
    raise AssertionError(f"{place}: stands in no JSON file")


def check_numbers(
    page: str,
    *records: Mapping,
    spare: Iterable[str] = ("version",),
    whole: Iterable[str] = (),
) -> set[str]:
    """Hold every number in the tables to the files; returns the places that were looked up.

    Args:
        page: of the HTML report.
        records: of the JSON files, the first rules.
        spare: heads of tables whose numbers are none of these.
        whole: heads of columns that count or number designs, which need no place.
    """
    seen: set[str] = set()
    for table in tables_of(page):
        if set(table.heads) & set(spare):
            continue
        for row in table.rows:
            seen |= _checked(table, row, records, set(whole))
    return seen


def _checked(
    table: Table, row: Sequence[Cell], records: Sequence[Mapping], whole: set[str]
) -> set[str]:
    """The places of one row, each looked up."""
    places: set[str] = set()
    for head, cell in zip(table.heads, row, strict=True):
        number = NUMBER.fullmatch(cell.text)
        if cell.key:
            value = standing_at(cell.key, *records)
            assert number, (cell, "a number")
            assert isinstance(value, float | int), (cell, value)
            digits = ERROR_DIGITS if cell.key.endswith("_error") else 0
            assert is_printed(number[1], value, digits), (cell, value)
            places.add(cell.key)
        elif head == SHARE:
            amplitude = standing_at(row[1].key, *records)
            torque = standing_at("torque_nm", *records)
            assert number, (cell, "a number")
            assert is_printed(number[1], 100.0 * amplitude / torque), (row, amplitude, torque)
        elif head not in whole:
            assert not number, (head, cell, "a number without a place")
    return places


def pdf_text(path: Path) -> str:
    """All text of a PDF without white space, page after page."""
    pages = (page.extract_text() for page in pypdf.PdfReader(path).pages)
    return "".join("".join(text.split()) for text in pages)


def check_pdf(path: Path, page: str) -> int:
    """Hold the PDF to the HTML report: every row of every table, in order; returns how many."""
    text, at, count = pdf_text(path), 0, 0
    assert "".join(outcome_of(page).split()) in text
    for table in tables_of(page):
        for row in table.rows:
            told = "".join("".join(cell.text.split()) for cell in row)
            found = text.find(told, at)
            assert found >= 0, (table.heads, told, text[at : at + 300])
            at, count = found + len(told), count + 1
    return count
