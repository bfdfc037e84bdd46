"""What a drawing sheet is made of: strokes, fills and words, in mm of paper as complex x + iy.

Line widths and types by ISO 128 (line group 0.5: wide 0.5 mm, narrow 0.25 mm), arrows and text
heights by ISO 129-1 and ISO 3098 (m). Arcs stay arcs; the writers turn them into what their format
has. A height is that of capital letters.
"""

import cmath
import functools
import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace
from typing import Literal

from lamwright.geometry.curves import Edge, Point, line

from .sheet_font import ink_box, width_of

Align = Literal["left", "middle", "right"]

TEXT = 2.5  # mm, height of dimensions and notes
TITLE = 3.5  # mm, of names and headings
ARROW = 2.5  # mm long
ARROW_HALF = math.radians(10.0)  # half the angle of a filled arrow


@dataclass(frozen=True, slots=True)
class Pen:
    """Width in mm; lengths of dash, gap, dash, gap in mm, none for a continuous line."""

    width: float
    dashes: tuple[float, ...] = ()


WIDE = Pen(0.5)  # outlines (01.2)
NARROW = Pen(0.25)  # dimensions, leaders, break lines (01.1)
CENTRE = Pen(0.25, (6.0, 0.75, 0.3, 0.75))  # centre lines (04.1)
PHANTOM = Pen(0.25, (6.0, 0.75, 0.3, 0.75, 0.3, 0.75))  # neighbours, circumscribed (05.1)
FRAME = Pen(0.7)  # of the drawing space (ISO 5457)
RULE = Pen(0.35)  # of tables


@dataclass(frozen=True, slots=True)
class Stroke:
    """A chain of edges drawn with a pen."""

    edges: tuple[Edge, ...]
    pen: Pen = NARROW


@dataclass(frozen=True, slots=True)
class Fill:
    """A filled polygon."""

    points: tuple[Point, ...]


@dataclass(frozen=True, slots=True)
class Word:
    """One line of text; `at` is on its base line, `angle` in rad."""

    text: str
    at: Point
    height: float = TEXT
    align: Align = "left"
    angle: float = 0.0
    is_bold: bool = False

    @property
    def width(self) -> float:
        """Width in mm."""
        return width_of(self.text, self.height, self.is_bold)

    @property
    def start(self) -> Point:
        """Where the base line begins."""
        share = {"left": 0.0, "middle": 0.5, "right": 1.0}[self.align]
        return self.at - share * self.width * cmath.exp(1j * self.angle)

    @property
    def corners(self) -> tuple[Point, ...]:
        """Corners of the box round the letters' ink, counter-clockwise."""
        low, high = ink_box(self.text, self.height, self.is_bold)
        turn = cmath.exp(1j * self.angle)
        own = (low, complex(high.real, low.imag), high, complex(low.real, high.imag))
        return tuple(self.start + corner * turn for corner in own)


Ink = Stroke | Fill | Word


@dataclass(frozen=True, eq=False)
class Picture:
    """Ink in one frame; compared by identity."""

    inks: tuple[Ink, ...] = ()

    def __add__(self, other: "Picture") -> "Picture":
        """Both, the other on top."""
        return Picture((*self.inks, *other.inks))

    @property
    def box(self) -> tuple[Point, Point]:
        """Lower left and upper right corner of all ink, in mm."""
        return _box(self)

    @property
    def size(self) -> Point:
        """Width and height of the box as x + iy."""
        low, high = self.box
        return high - low

    def moved(self, shift: Point) -> "Picture":
        """The picture at another place."""
        return Picture(tuple(_moved(ink, shift) for ink in self.inks))

    @property
    def words(self) -> tuple[Word, ...]:
        """All text."""
        return tuple(ink for ink in self.inks if isinstance(ink, Word))

    @property
    def strokes(self) -> tuple[Stroke, ...]:
        """All lines."""
        return tuple(ink for ink in self.inks if isinstance(ink, Stroke))


@functools.lru_cache(maxsize=64)
def _box(picture: Picture) -> tuple[Point, Point]:
    points = [point for ink in picture.inks for point in _extremes(ink)]
    low = complex(min(p.real for p in points), min(p.imag for p in points))
    return low, complex(max(p.real for p in points), max(p.imag for p in points))


def placed(edges: Iterable[Edge], factor: complex, shift: Point = 0j) -> tuple[Edge, ...]:
    """Edges (m) on paper: turned and scaled by a complex factor (mm/m), then moved (mm)."""
    return tuple(Edge(e.start * factor + shift, e.end * factor + shift, e.bulge) for e in edges)


def segment(start: Point, end: Point, pen: Pen = NARROW) -> Stroke:
    """A straight stroke."""
    return Stroke((line(start, end),), pen)


def polyline(points: Sequence[Point], pen: Pen = NARROW, *, is_closed: bool = False) -> Stroke:
    """A chain of straight strokes."""
    ends = [*points[1:], points[0]] if is_closed else points[1:]
    return Stroke(tuple(line(p, q) for p, q in zip(points, ends, strict=False)), pen)


def rectangle(low: Point, high: Point, pen: Pen = NARROW) -> Stroke:
    """A box."""
    corners = (low, complex(high.real, low.imag), high, complex(low.real, high.imag))
    return polyline(corners, pen, is_closed=True)


def ring(centre: Point, radius: float, pen: Pen = NARROW) -> Stroke:
    """A circle."""
    left, right = centre - radius, centre + radius
    return Stroke((Edge(right, left, 1.0), Edge(left, right, 1.0)), pen)


def bow(centre: Point, radius: float, first: float, last: float, pen: Pen = NARROW) -> Stroke:
    """An arc about `centre` from angle `first` to `last` in rad, clockwise where last < first."""
    bulge = math.tan((last - first) / 4.0)
    start, end = (centre + cmath.rect(radius, angle) for angle in (first, last))
    return Stroke((Edge(start, end, bulge),), pen)


def arrow(tip: Point, direction: complex, length: float = ARROW) -> Fill:
    """A filled arrow whose tip points along `direction`."""
    back = -direction / abs(direction) * length
    half = 1j * back * math.tan(ARROW_HALF)
    return Fill((tip, tip + back + half, tip + back - half))


def _moved(ink: Ink, shift: Point) -> Ink:
    if isinstance(ink, Word):
        return replace(ink, at=ink.at + shift)
    if isinstance(ink, Fill):
        return Fill(tuple(point + shift for point in ink.points))
    return Stroke(placed(ink.edges, 1.0, shift), ink.pen)


def _extremes(ink: Ink) -> list[Point]:
    if isinstance(ink, Word):
        return list(ink.corners)
    if isinstance(ink, Fill):
        return list(ink.points)
    return [point for edge in ink.edges for point in edge_extremes(edge)]


def edge_extremes(edge: Edge) -> list[Point]:
    """Ends of an edge, and an arc's outermost points to the four sides."""
    points = [edge.start, edge.end]
    if edge.is_line:
        return points
    centre, radius = edge.centre, edge.radius
    first = cmath.phase(edge.start - centre)
    low, high = sorted((first, first + edge.sweep))
    quarter = 0.5 * math.pi
    turns = range(math.ceil(low / quarter), math.floor(high / quarter) + 1)
    return points + [centre + radius * 1j ** (turn % 4) for turn in turns]
