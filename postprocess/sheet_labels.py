"""Room for text: nothing is written over a line or over other text.

A board holds the ink of one view. New ink comes as a list of candidates, the nicest first; the
first one whose words touch no line and no other word, and whose lines touch no word, is taken.
"""

import cmath
import math
from collections.abc import Iterable, Sequence
from itertools import combinations, pairwise

import numpy as np
import numpy.typing as npt

from lamwright.geometry.curves import Edge, Point
from lamwright.geometry.errors import LamwrightError

from .sheet_ink import Fill, Ink, Picture, Stroke, Word

ComplexArray = npt.NDArray[np.complex128]

CLEAR = 0.8  # mm round a word
SAG = 0.05  # mm, of a chord under its arc
TOUCH = 0.05  # mm that a found overlap must reach


class NoRoomError(LamwrightError):
    """A label finds no place in its view."""


class Board:
    """The ink of one view, and what new ink may not touch."""

    def __init__(self, inks: Iterable[Ink] = ()) -> None:
        """A board with some ink that is drawn without looking."""
        self.inks: list[Ink] = []
        self._chords: list[ComplexArray] = []
        self._stacked: ComplexArray | None = None
        self._words: list[Word] = []
        self.add(inks)

    def copy(self) -> "Board":
        """A board with the same ink, to try on."""
        other = Board()
        other.inks, other._words = [*self.inks], [*self._words]
        other._chords, other._stacked = [*self._chords], self._stacked
        return other

    def add(self, inks: Iterable[Ink]) -> None:
        """Draw without looking."""
        for ink in inks:
            self.inks.append(ink)
            if isinstance(ink, Word):
                self._words.append(ink)
            else:
                self._chords.append(chords(ink))
                self._stacked = None

    def is_free(self, inks: Sequence[Ink]) -> bool:
        """Whether new ink leaves all words legible, its own too."""
        words = [ink for ink in inks if isinstance(ink, Word)]
        lines = [chords(ink) for ink in inks if not isinstance(ink, Word)]
        own = np.concatenate(lines) if lines else np.zeros((0, 2), dtype=complex)
        for word in words:
            if touches(word, self._lines, CLEAR) or touches(word, own, TOUCH):
                return False
            if any(overlap(word, other, CLEAR) for other in self._words):
                return False
        return not any(touches(other, own, CLEAR) for other in self._words)

    def is_clear(self, low: Point, high: Point) -> bool:
        """Whether no line comes into the rectangle between two corners."""
        return not _crosses((0.5 * (low + high), 0.5 * (high - low), 1.0), self._lines, 0.0)

    def put(self, candidates: Iterable[Sequence[Ink]], what: str) -> None:
        """Draw the first candidate that is free.

        Raises:
            NoRoomError: none is.
        """
        for inks in candidates:
            if self.is_free(inks):
                self.add(inks)
                return
        raise NoRoomError(f"drawing: no room for {what!r}; a larger paper is needed")

    @property
    def picture(self) -> Picture:
        """All that was drawn."""
        return Picture(tuple(self.inks))

    @property
    def _lines(self) -> ComplexArray:
        if self._stacked is None:
            empty = np.zeros((0, 2), dtype=complex)
            self._stacked = np.concatenate([empty, *self._chords])
        return self._stacked


def chords(ink: Stroke | Fill) -> ComplexArray:
    """Start and end (n, 2) of the chords that stand for a stroke or a fill's border."""
    if isinstance(ink, Fill):
        ends = (*ink.points[1:], ink.points[0])
        return np.array(list(zip(ink.points, ends, strict=True)), dtype=complex)
    pieces = [pair for edge in ink.edges for pair in _chords_of(edge)]
    return np.array(pieces, dtype=complex).reshape(-1, 2)


def touches(word: Word, lines: ComplexArray, room: float) -> bool:
    """Whether any chord (n, 2) comes within `room` mm of a word's box."""
    return _crosses(_box(word), lines, room)


def _crosses(box: tuple[Point, Point, complex], lines: ComplexArray, room: float) -> bool:
    if not len(lines):
        return False
    middle, half, turn = box
    own = (lines - middle) / turn
    size = half + complex(room, room)
    first, last = own[:, 0], own[:, 1]
    apart = (np.minimum(first.real, last.real) > size.real) | (
        np.maximum(first.real, last.real) < -size.real
    )
    apart |= (np.minimum(first.imag, last.imag) > size.imag) | (
        np.maximum(first.imag, last.imag) < -size.imag
    )
    # The box lies to one side of a chord: its corner's reach along the chord's normal.
    normal = 1j * (last - first)
    reach = np.abs(normal.real) * size.real + np.abs(normal.imag) * size.imag
    apart |= np.abs((first * normal.conj()).real) > reach
    return bool(np.any(~apart))


def overlap(first: Word, second: Word, room: float) -> bool:
    """Whether two words' boxes come within `room` mm of each other."""
    if abs(first.at - second.at) > first.width + second.width + 2.0 * (
        first.height + second.height
    ):
        return False
    for one in (first, second):
        _, _, turn = _box(one)
        a = np.array(first.corners) / turn
        b = np.array(second.corners) / turn
        for p, q in ((a.real, b.real), (a.imag, b.imag)):
            if p.max() + room < q.min() or q.max() + room < p.min():
                return False
    return True


def faults(picture: Picture) -> list[str]:
    """Every word of a sheet that touches a line or another word, each as one line."""
    lines = [(chords(ink), ink) for ink in picture.inks if not isinstance(ink, Word)]
    stacked = np.concatenate([one for one, _ in lines])
    found = [
        f"{word.text!r} at {word.at:.1f} touches a line"
        for word in picture.words
        if touches(word, stacked, -TOUCH)
    ]
    return found + [
        f"{one.text!r} at {one.at:.1f} touches {other.text!r}"
        for one, other in combinations(picture.words, 2)
        if overlap(one, other, -TOUCH)
    ]


def _box(word: Word) -> tuple[Point, Point, complex]:
    """Middle, half sizes and turn of a word's box."""
    corners = word.corners
    turn = cmath.exp(1j * word.angle)
    return 0.5 * (corners[0] + corners[2]), 0.5 * (corners[2] - corners[0]) / turn, turn


def _chords_of(edge: Edge) -> list[tuple[Point, Point]]:
    if edge.is_line:
        return [(edge.start, edge.end)]
    step = 2.0 * math.acos(max(1.0 - SAG / edge.radius, 0.0))
    count = max(1, math.ceil(abs(edge.sweep) / max(step, 0.05)))
    points = [edge.point(k / count) for k in range(count + 1)]
    return list(pairwise(points))
