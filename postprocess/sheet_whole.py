"""The view of the whole lamination: outer diameter, bore with its fit and datum, holes, poles."""

import cmath
import math
from collections.abc import Sequence
from dataclasses import dataclass

from lamwright.geometry.curves import Point

from .sheet_details import DetailMark, circles, letters
from .sheet_dimensions import across, extension, leader, number
from .sheet_fits import Limits, limits_of
from .sheet_ink import (
    CENTRE,
    PHANTOM,
    TITLE,
    WIDE,
    Fill,
    Ink,
    Picture,
    Stroke,
    Word,
    placed,
    rectangle,
    ring,
    segment,
)
from .sheet_job import MM, SheetJob
from .sheet_labels import Board
from .sheet_rims import BoreMeasure, HoleGroup, RimMeasure

AXIS_PAST = 5.0  # mm that centre lines go past the rim
LEVEL = 13.0  # mm from the rim to the outer diameter's dimension line
QUARTER = math.pi / 2.0
LEAST_OFF = 0.14  # rad from a leader to a centre line
DATUM = 5.0  # mm, side of a datum's box


@dataclass(frozen=True, slots=True)
class Whole:
    """What the whole view shows."""

    bore: BoreMeasure
    rim: RimMeasure
    holes: Sequence[HoleGroup]
    key_mark: DetailMark | None  # of the keyway's detail, in the lamination's frame


def whole_view(job: SheetJob, shown: Whole, scale: float, name: str) -> Picture:
    """The lamination at `scale` (mm of paper for one mm), its axis at 0, first q axis up."""
    factor = scale / MM * 1j * cmath.exp(-0.5j * job.section.pole_angle)
    board = Board(Stroke(placed(c.path.edges, factor), WIDE) for c in job.contours)
    radius = scale * shown.rim.radius / MM
    reach = radius + AXIS_PAST
    board.add([segment(-reach + 0j, reach + 0j, CENTRE), segment(-1j * reach, 1j * reach, CENTRE)])
    board.add(ring(0j, scale * group.place / MM, CENTRE) for group in shown.holes)
    if not shown.rim.is_round:
        board.add([ring(0j, radius, PHANTOM)])
    board.add([Word("q1", 1j * (reach + 1.2), align="middle")])
    outer_size(board, 2.0 * shown.rim.radius / MM, job.options.outer_fit, radius)
    if shown.key_mark is not None:
        circles(board, [shown.key_mark], factor)
        letters(board, [shown.key_mark], factor)
    _bore(board, job, shown.bore, scale, radius)
    low, high = board.picture.box
    middle = complex(0.5 * (low.real + high.real), high.imag + 4.0)
    board.add([Word(name, middle, TITLE, "middle")])
    return board.picture


def outer_size(board: Board, size: float, fit: str, radius: float) -> None:
    """The outer diameter in mm below a view whose rim has `radius` mm of paper."""
    limits = limits_of(size, fit) if fit else None
    text = f"\u2300{number(size)}{f' {fit}' if fit else ''}"
    left, right = complex(-radius, -radius - LEVEL), complex(radius, -radius - LEVEL)
    board.add(
        [
            extension(complex(-radius, 0.0), left),
            extension(complex(radius, 0.0), right),
            *across(left, right, text, limits=limits),
        ]
    )


def _bore(board: Board, job: SheetJob, bore: BoreMeasure, scale: float, rim: float) -> None:
    """The bore's size on a leader along a d axis, where it crosses no barrier, with datum A."""
    radius, size = scale * bore.radius / MM, 2.0 * bore.radius / MM
    limits = limits_of(size, job.options.bore_fit)
    text = f"\u2300{number(size)} {job.options.bore_fit}"
    pitch = job.section.pole_angle
    ways = [_off_centre_line(math.pi / 2.0 + (k + 0.5) * pitch) for k in (-1, -2, 0, 1, -3, 2)]
    candidates = [
        datum_leader(cmath.rect(radius, way), cmath.rect(rim + far, way), text, limits)
        for far in (8.0, 12.0, 16.0, 22.0, 30.0)
        for way in ways
    ]
    board.put(candidates, text)


def _off_centre_line(way: float) -> float:
    """A direction clear of the upright and the level centre line."""
    off = (way + QUARTER / 2.0) % QUARTER - QUARTER / 2.0
    return way + LEAST_OFF if abs(off) < LEAST_OFF else way


def datum_leader(tip: Point, knee: Point, text: str, limits: Limits) -> list[Ink]:
    """A diameter's leader with datum A on its shelf."""
    inks = leader(tip, knee, [text], limits)
    side = 1.0 if knee.real >= tip.real else -1.0
    # The datum's triangle stands on the shelf, its box below.
    foot = knee + side * 6.0
    box = foot - 1j * (2.2 + 2.0 + DATUM) - 0.5 * DATUM
    triangle = Fill((foot - 1.5, foot + 1.5, foot - 2.2j))
    stem = segment(foot - 2.2j, foot - 4.2j)
    frame = rectangle(box, box + DATUM * (1 + 1j))
    letter = Word("A", box + 0.5 * DATUM + 1j * 0.25 * DATUM, align="middle")
    return [*inks, triangle, stem, frame, letter]
