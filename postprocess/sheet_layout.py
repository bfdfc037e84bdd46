"""Blocks on paper: views in rows on the left, details and tables in a column over the title block.

A row begins with its tallest block; beside it stand columns of lower ones. What is left of width
and height is shared out evenly.
"""

from collections.abc import Sequence
from dataclasses import dataclass

from lamwright.geometry.curves import Point

from .sheet_ink import Picture

GAP = 5.0  # mm, least between blocks and to the frame
TABLE_GAP = 5.0  # mm between tables


@dataclass(frozen=True, slots=True)
class Area:
    """A rectangle in mm."""

    low: Point
    high: Point

    @property
    def width(self) -> float:
        """In mm."""
        return self.high.real - self.low.real

    @property
    def height(self) -> float:
        """In mm."""
        return self.high.imag - self.low.imag


@dataclass(frozen=True, slots=True)
class Blocks:
    """What stands on a sheet, each list in the order of reading."""

    views: Sequence[Picture]
    details: Sequence[Picture]
    tables: Sequence[Picture]


Column = list[Picture]
Row = list[Column]


def arranged(blocks: Blocks, space: Area, title: Area) -> list[Picture] | None:
    """All blocks in their places; None where they find no room.

    Args:
        blocks: to place.
        space: the drawing space.
        title: the title block in its lower right corner.
    """
    over = complex(space.low.real, title.high.imag)
    if title.width >= space.width - GAP:
        everything = (*blocks.views, *blocks.details, *blocks.tables)
        return flowed(everything, Area(over, space.high))
    left = Area(space.low, complex(title.low.real, space.high.imag))
    right = Area(title.low + 1j * title.height, space.high)
    for moved in range(len(blocks.tables)):
        kept, others = blocks.tables[moved:], blocks.tables[:moved]
        height = sum(_size(t).imag + TABLE_GAP for t in kept) + GAP
        if height > right.height:
            continue
        top = Area(complex(right.low.real, right.low.imag + height), right.high)
        for count in range(len(blocks.details), -1, -1):
            above = flowed(blocks.details[:count], top) if count else []
            if above is None:
                continue
            rest = (*blocks.views, *blocks.details[count:], *others)
            beside = flowed(rest, left)
            if beside is not None:
                return [*above, *beside, *_stacked(kept, right)]
    return None


def flowed(pictures: Sequence[Picture], area: Area) -> list[Picture] | None:
    """Pictures in rows from the top, spread evenly over an area; None where they do not fit."""
    rows: list[Row] = []
    todo = list(pictures)
    while todo:
        row, todo = _row(todo, area.width)
        if row is None:
            return None
        rows.append(row)
    heights = [max(map(_height, row)) for row in rows]
    spare = area.height - sum(heights) - GAP * (len(rows) + 1)
    if spare < 0.0:
        return None
    step = GAP + spare / (len(rows) + 1)
    top, found = area.high.imag - step, []
    for row, height in zip(rows, heights, strict=True):
        found += _spread(row, height, area, top)
        top -= height + step
    return found


def _row(todo: list[Picture], width: float) -> tuple[Row | None, list[Picture]]:
    """The first blocks of a list that make one row, and the others."""
    lead, *others = todo
    height, used = _size(lead).imag, _size(lead).real + 2.0 * GAP
    if used > width:
        return None, todo
    row: Row = [[lead]]
    while True:
        column: Column = []
        for picture in others:
            is_low = _height([*column, picture]) <= height
            if is_low and used + _size(picture).real + GAP <= width:
                column.append(picture)
        if not column:
            return row, others
        row.append(column)
        used += max(_size(p).real for p in column) + GAP
        others = [picture for picture in others if picture not in column]


def _spread(row: Row, height: float, area: Area, top: float) -> list[Picture]:
    widths = [max(_size(p).real for p in column) for column in row]
    step = (area.width - sum(widths)) / (len(row) + 1)
    x, found = area.low.real + step, []
    for column, width in zip(row, widths, strict=True):
        gap = (height - _height(column) + GAP * (len(column) - 1)) / (len(column) + 1)
        # A single block stands level with the row's top, so that names are on one line.
        y = top - (0.0 if len(column) == 1 else gap)
        for picture in column:
            size = _size(picture)
            corner = complex(x + 0.5 * (width - size.real), y - size.imag)
            found.append(picture.moved(corner - picture.box[0]))
            y -= size.imag + gap
        x += width + step
    return found


def _stacked(tables: Sequence[Picture], area: Area) -> list[Picture]:
    """Tables one above the other from the bottom, flush left; the first on top."""
    found, y = [], area.low.imag + TABLE_GAP
    for table in reversed(tables):
        found.append(table.moved(complex(area.low.real + GAP, y) - table.box[0]))
        y += _size(table).imag + TABLE_GAP
    return found


def _height(column: Sequence[Picture]) -> float:
    return sum(_size(p).imag for p in column) + GAP * (len(column) - 1)


def _size(picture: Picture) -> Point:
    return picture.size
