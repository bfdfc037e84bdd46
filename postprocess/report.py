"""A report as values: what stands in it in order, without a word on how it is set.

`report_html` and `report_pdf` set the same value, so that both say the same.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

Mark = Literal["", "good", "bad", "wary"]  # what a cell says at a glance, beside its words


@dataclass(frozen=True, slots=True)
class Cell:
    """A cell of a table."""

    text: str
    mark: Mark = ""
    key: str = ""  # where the number stands in the JSON file, as `ribs/0/peak_mpa`
    is_number: bool = False  # set to the right


@dataclass(frozen=True, slots=True)
class Paragraph:
    """Running text."""

    text: str


@dataclass(frozen=True, slots=True)
class Lines:
    """Items of a list."""

    items: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Listing:
    """Text to be read as it stands, such as a file."""

    title: str
    text: str


@dataclass(frozen=True, slots=True)
class Grid:
    """A table with a head."""

    columns: tuple[str, ...]
    rows: tuple[tuple[Cell, ...], ...]
    note: str = ""


@dataclass(frozen=True, slots=True)
class Picture:
    """A figure that stands beside the report as `name`.svg and `name`.png."""

    name: str
    caption: str


Block = Paragraph | Lines | Listing | Grid | Picture


@dataclass(frozen=True, slots=True)
class Section:
    """A part of the report with a heading."""

    title: str
    blocks: tuple[Block, ...]


@dataclass(frozen=True, slots=True)
class Report:
    """A whole report."""

    title: str
    subtitle: str
    outcome: str  # one line, read first
    mark: Mark
    sections: tuple[Section, ...]
    closing: str  # stands at the foot of every page


def words(text: str, mark: Mark = "") -> Cell:
    """A cell with words."""
    return Cell(text, mark)


def numeral(text: str, key: str = "", mark: Mark = "") -> Cell:
    """A cell with a number."""
    return Cell(text, mark, key, is_number=True)


def word_rows(rows: Sequence[Sequence[str]]) -> tuple[tuple[Cell, ...], ...]:
    """Rows of words alone."""
    return tuple(tuple(Cell(text) for text in row) for row in rows)
