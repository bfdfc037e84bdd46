"""Details: each different rib enlarged, marked by a letter in the views."""

import cmath
import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from lamwright.geometry.curves import Edge, Point

from .sheet_clip import in_circle
from .sheet_dimensions import across, leaders, number, with_limit
from .sheet_ink import NARROW, TITLE, WIDE, Ink, Picture, Stroke, Word, placed, ring, segment
from .sheet_job import MM
from .sheet_labels import Board, NoRoomError
from .sheet_measures import PoleMeasure, RibMeasure

SAME = 1e-6  # m, widths and radii that differ less are one
LETTERS = "ABCDEFGHJKLMNPRSTUVWXYZ"  # no I, O or Q, that look like figures (ISO 128, m)
CIRCLE = 19.0  # mm of paper, radius of a detail
SCALES = (100.0, 50.0, 20.0, 10.0, 5.0, 2.0, 1.0, 0.5, 0.2, 0.1)
MOST_RIB = 13.0  # mm of paper that a rib may be wide
LEAST_MARK = 2.0  # mm of paper, radius of a detail's circle in its view
LEAST_VIEW = 1.3  # widths of a rib that its detail reaches at least; one radius of its corners


@dataclass(frozen=True, slots=True)
class RibKind:
    """Ribs of one width and corners, wherever they are."""

    letter: str
    kind: str
    width: float
    radii: tuple[float, ...]
    barriers: tuple[int, ...]
    count: int  # in the lamination
    pole: int  # number in the list of kinds of poles, of the one drawn
    rib: RibMeasure  # the one drawn


@dataclass(frozen=True, slots=True)
class DetailMark:
    """A circle in a view and its letter; upright or of the lamination, in m."""

    letter: str
    centre: Point
    radius: float


def rib_kinds(poles: Sequence[PoleMeasure]) -> tuple[RibKind, ...]:
    """All different ribs, from the rim inward, those in tangential places first."""
    found: list[RibKind] = []
    for number_of_pole, pole in enumerate(poles):
        order = sorted(pole.ribs, key=lambda r: (r.kind == "radial", r.barrier, -r.end_angle))
        for rib in order:
            k = next((k for k, known in enumerate(found) if _is_like(known, rib)), None)
            if k is None:
                letter = LETTERS[len(found) % len(LETTERS)]
                found.append(
                    RibKind(
                        letter,
                        rib.kind,
                        rib.width,
                        rib.radii,
                        (rib.barrier,),
                        len(pole.numbers),
                        number_of_pole,
                        rib,
                    )
                )
                continue
            known = found[k]
            barriers = tuple(sorted({*known.barriers, rib.barrier}))
            found[k] = RibKind(
                known.letter,
                known.kind,
                known.width,
                known.radii,
                barriers,
                known.count + len(pole.numbers),
                known.pole,
                known.rib,
            )
    return tuple(found)


def _is_like(known: RibKind, rib: RibMeasure) -> bool:
    sizes = ((known.width, *known.radii), (rib.width, *rib.radii))
    return (
        known.kind == rib.kind
        and len(sizes[0]) == len(sizes[1])
        and all(abs(a - b) < SAME for a, b in zip(*sizes, strict=True))
    )


def detail_scale(kind: RibKind) -> float:
    """The greatest scale at which the rib and its corners are seen."""
    need = max((LEAST_VIEW * kind.width, *kind.radii))
    for scale in SCALES:
        fits = CIRCLE / scale * MM >= need and kind.width / MM * scale <= MOST_RIB
        if fits:
            return scale
    return SCALES[-1]


def detail_mark(kind: RibKind) -> DetailMark:
    """Where the rib's detail lies in its upright pole."""
    return DetailMark(kind.letter, kind.rib.middle, CIRCLE / detail_scale(kind) * MM)


def circles(board: Board, ones: Sequence[DetailMark], factor: complex) -> None:
    """Draw the circles of details in a view whose axis lies at 0: before any text."""
    board.add(ring(*_place(one, factor)) for one in ones)


def letters(board: Board, ones: Sequence[DetailMark], factor: complex) -> None:
    """Write the letters of details beside their circles."""
    for one in ones:
        board.put(_letters(one.letter, *_place(one, factor)), f"letter {one.letter}")


def _place(one: DetailMark, factor: complex) -> tuple[Point, float]:
    return one.centre * factor, max(one.radius * abs(factor), LEAST_MARK)


def _letters(letter: str, centre: Point, radius: float) -> Iterator[list[Ink]]:
    """Places of a circle's letter around it, farther ones with a line to it."""
    for reach in (3.2, 5.0, 8.0, 12.0, 17.0, 24.0, 32.0):
        for k in range(16):
            way = cmath.rect(1.0, math.pi / 4.0 + k * math.pi / 8.0)
            at = centre + (radius + reach) * way
            inks: list[Ink] = [Word(letter, at - 0.5j * TITLE, TITLE, "middle")]
            if reach > 4.0:
                inks.append(segment(centre + radius * way, at - 2.8 * way))
            yield inks


def rib_detail(kind: RibKind, outlines: Sequence[Edge], limit: float, letter_scale: str) -> Picture:
    """A rib enlarged, as it lies in its view, with its width and corner radii.

    Args:
        kind: which rib.
        outlines: edges of its pole, upright, m.
        limit: to both sides of the width, mm.
        letter_scale: as `20:1`.
    """
    scale = detail_scale(kind)
    factor, centre = scale / MM, kind.rib.middle
    window = CIRCLE / scale * MM
    edges = in_circle(outlines, centre, window * (1.0 - 1e-6))
    shift = -centre * factor
    board = Board([Stroke(placed((edge,), factor, shift), WIDE) for edge in edges])
    board.add([ring(0j, CIRCLE, NARROW)])
    start, end = (p * factor + shift for p in (kind.rib.start, kind.rib.end))
    text = with_limit(kind.width / MM, limit)
    widths = [
        across(start, end, text, side=side, tail=tail)
        for tail in (3.0, 6.0, 9.0, 12.0, 16.0, 20.0, 25.0)
        for side in (1.0, -1.0)
    ]
    board.put(widths, text)
    for radius in kind.radii:
        arcs = [e for e in edges if not e.is_line and abs(e.radius - radius) < SAME]
        tips = [edge.point(share) * factor + shift for edge in arcs for share in (0.5, 0.3, 0.7)]
        text = f"R{number(radius / MM)}"
        candidates = (inks for tip in tips for inks in leaders(tip, [text]))
        try:
            board.put(candidates, text)
        except NoRoomError:
            if arcs:
                raise
    low, high = board.picture.box
    title = Word(f"{kind.letter} ({letter_scale})", complex(0.0, high.imag + 2.5), TITLE, "middle")
    board.add([title])
    del low
    return board.picture


def scale_text(scale: float) -> str:
    """A scale as it is written: 20:1, 1:1, 1:2."""
    return f"{scale:g}:1" if scale >= 1.0 else f"1:{1.0 / scale:g}"
