"""The view of one pole: barriers on the q axis, end angles, holes, notches, letters of details.

On the left stand, from rim to bore, each barrier's outer side as its distance from the shaft axis
(theoretically exact, boxed: the barriers' contours have a profile tolerance) and its thickness; at
the rim the angles of the barriers' ends off the q axis, on the right half alone where both are
mirror images.
"""

import cmath
import math
from collections.abc import Sequence
from dataclasses import dataclass

from lamwright.geometry.curves import Edge

from .sheet_clip import in_window
from .sheet_details import DetailMark, circles, letters
from .sheet_dimensions import (
    angular,
    boxed,
    extension,
    leaders,
    line_profile,
    narrow_span,
    number,
    spread,
    with_limit,
)
from .sheet_ink import (
    CENTRE,
    NARROW,
    PHANTOM,
    TITLE,
    WIDE,
    Ink,
    Picture,
    Stroke,
    Word,
    bow,
    placed,
    polyline,
    segment,
)
from .sheet_job import MM, SheetJob
from .sheet_labels import Board, NoRoomError
from .sheet_measures import AxisCut, PoleMeasure, RibMeasure
from .sheet_rims import Groove, HoleGroup, NotchGroup, RimMeasure

STRIP = 2.0  # mm of the neighbouring poles that are shown
UP = math.pi / 2.0
FIRST_ARC = 8.0  # mm from the rim to the first end angle
ARC_STEP = 7.5  # mm to the next
PITCH = 5.4  # mm between the labels on the left
COLUMN = 9.0  # mm from the outline to the thickness dimensions
JOG = 8.0  # mm further to the labels
ANGLE_DIGITS = 2
OFF_AXIS = (0.0, -3.0, 3.0, -5.0, 5.0, -8.0, 8.0)  # mm beside a d axis
ON_AXIS = 1e-6  # rad
LONG = 1e-3  # m, an edge that a leader may point at
WIDE_AS_STEP = 10.0  # depths, a wider notch is a step of the rim


@dataclass(frozen=True, slots=True)
class Pole:
    """What a pole's view shows."""

    measure: PoleMeasure
    outlines: Sequence[Edge]  # of the whole lamination, upright for this pole, m
    rim: RimMeasure
    bore: float  # radius, m
    holes: Sequence[HoleGroup]
    notches: Sequence[NotchGroup]
    marks: Sequence[DetailMark]


def pole_view(job: SheetJob, pole: Pole, scale: float, name: str) -> Picture:
    """One pole at `scale`, its q axis up, the shaft axis at 0."""
    factor = scale / MM
    rim = scale * pole.rim.radius / MM
    bore = scale * pole.bore / MM
    pitch = job.section.pole_angle
    half = min(0.5 * pitch + STRIP / rim, math.pi * 0.75)
    edges = in_window(pole.outlines, UP, half)
    board = Board(Stroke(placed((edge,), factor), WIDE) for edge in edges)
    board.add(_sides(rim, bore, half))
    board.add(_axes(rim, bore, 0.5 * pitch))
    if not pole.rim.is_round:
        board.add([bow(0j, rim, UP + half, UP - half, PHANTOM)])
    left = min(p.real for edge in edges for p in (edge.start, edge.end)) * factor
    left = min(left, min(ink.edges[0].point(0.5).real for ink in _strokes(board)))
    _cuts(board, job, pole.measure.cuts, factor, left)
    circles(board, pole.marks, complex(factor))
    board = _end_angles(board, pole.measure, factor, rim)
    letters(board, pole.marks, complex(factor))
    _holes(board, pole.holes, factor, pitch, half)
    _notches(board, pole, factor, pitch)
    _rim(board, pole, factor)
    _profile(board, job, pole.measure, factor)
    _d_letters(board, rim, 0.5 * pitch)
    low, high = board.picture.box
    middle = complex(0.5 * (low.real + high.real), high.imag + 4.0)
    board.add([Word(name, middle, TITLE, "middle")])
    return board.picture


def _strokes(board: Board) -> list[Stroke]:
    return [ink for ink in board.inks if isinstance(ink, Stroke)]


def _sides(rim: float, bore: float, half: float) -> list[Ink]:
    """Break lines on both sides, each with a zigzag."""
    inks: list[Ink] = []
    for side in (1.0, -1.0):
        way = cmath.rect(1.0, UP + side * half)
        middle, kink = 0.5 * (rim + bore), 1.2
        points = [
            (bore - 1.5) * way,
            (middle - 1.0) * way,
            (middle - 0.4 + 1j * kink) * way,
            (middle + 0.4 - 1j * kink) * way,
            (middle + 1.0) * way,
            (rim + 1.5) * way,
        ]
        inks.append(polyline(points, NARROW))
    return inks


def _axes(rim: float, bore: float, half: float) -> list[Ink]:
    """Centre lines of q and d axes with their letters."""
    start = max(bore - 6.0, 0.0)
    inks: list[Ink] = [segment(1j * start, 1j * (rim + 4.0), CENTRE)]
    for side in (1.0, -1.0):
        way = cmath.rect(1.0, UP + side * half)
        inks.append(segment(start * way, (rim + 4.0) * way, CENTRE))
    inks.append(Word("q", 1j * start - 3.7j, align="middle"))
    return inks


def _profile(board: Board, job: SheetJob, pole: PoleMeasure, factor: float) -> None:
    """The barriers' line profile on a leader to a barrier's right half, inner barriers first."""
    cavities = sorted(pole.cavities, key=lambda cavity: -cavity.barrier)
    edges = [edge for cavity in cavities for edge in cavity.path.edges]
    tips = [e.point(share) * factor for e in edges for share in (0.7, 0.3) if e.length > LONG]
    cells = (number(job.width_limit), "A")
    on_right = (tip for tip in tips if tip.real > 0.0)
    text = "all barriers"
    frames = (inks for tip in on_right for inks in line_profile(tip, text, cells))
    # All but the leader stands clear of lines, the symbol too.
    clear = (inks for inks in frames if board.is_clear(*Picture(tuple(inks[2:])).box))
    board.put(clear, text)


def _d_letters(board: Board, rim: float, half: float) -> None:
    """The letters of the d axes beyond the rim, where there is room."""
    for side in (1.0, -1.0):
        way = cmath.rect(1.0, UP + side * half)
        places = [(rim + out + 1j * turn) * way for out in (6.5, 9.0, 12.0) for turn in OFF_AXIS]
        board.put(([Word("d", at - 1.25j, align="middle")] for at in places), "d")


def _cuts(board: Board, job: SheetJob, cuts: Sequence[AxisCut], factor: float, left: float) -> None:
    """Distances and thicknesses along the q axis, in two columns left of the outline."""
    first, second = left - COLUMN, left - COLUMN - JOG
    wanted = []
    for cut in cuts:
        wanted += [cut.outer * factor + 1.0, 0.5 * (cut.outer + cut.inner) * factor - 1.0]
    heights = spread(wanted, PITCH)
    column = min(first - 3.0, second)
    for k, cut in enumerate(cuts):
        top, bottom = (complex(-cut.beside, y) * factor for y in (cut.outer, cut.inner))
        beside = f" ({number(cut.beside / MM)} off q)" if cut.beside else ""
        at_top, at_bottom = complex(first, top.imag), complex(first, bottom.imag)
        board.add([segment(top - 0.8, at_top - 1.5), extension(bottom, at_bottom)])
        board.add(narrow_span(at_top, at_bottom))
        word = Word(number(cut.outer / MM) + beside, 0j)
        at = complex(column - JOG - word.width - 1.5, heights[2 * k] - 1.25)
        placed_word = Word(word.text, at)
        end = complex(column - JOG, heights[2 * k])
        jog = polyline((at_top - 1.5, complex(column - 1.0, top.imag), end + 0.4, end))
        board.add([jog, *boxed(placed_word)])
        text = with_limit(cut.thickness / MM, job.width_limit)
        start = 0.5 * (at_top + at_bottom)
        end = complex(column - JOG, heights[2 * k + 1])
        word = Word(text, complex(end.real - 0.8, end.imag - 1.25), align="right")
        board.add([polyline((start, complex(column - 1.0, start.imag), end + 0.4, end)), word])


def _end_angles(board: Board, pole: PoleMeasure, factor: float, rim: float) -> Board:
    """The board with arcs outside the rim from the q axis to the ends.

    The smallest angle lies nearest to the rim; where texts then meet extension lines, farthest.
    """
    ribs = [rib for rib in pole.ribs if rib.kind == "tangential"]
    sides = [[rib for rib in ribs if rib.end_angle * side > 0.0] for side in (1.0, -1.0)]
    if pole.is_symmetric:
        sides = sides[:1]
    most = max(len(own) for own in sides)
    if most:
        top = rim + FIRST_ARC + (most - 1) * ARC_STEP + 1.5
        board.add([segment(1j * (rim + 4.0), 1j * top, CENTRE)])
    try:
        return _with_arcs(board.copy(), sides, factor, rim, is_rising=True)
    except NoRoomError:
        return _with_arcs(board, sides, factor, rim, is_rising=False)


def _with_arcs(
    board: Board,
    sides: Sequence[Sequence[RibMeasure]],
    factor: float,
    rim: float,
    *,
    is_rising: bool,
) -> Board:
    for own in sides:
        order = sorted(own, key=lambda rib: abs(rib.end_angle), reverse=not is_rising)
        for k, rib in enumerate(order):
            radius = rim + FIRST_ARC + k * ARC_STEP
            last = UP - rib.end_angle
            way = cmath.rect(1.0, last)
            text = f"{number(math.degrees(abs(rib.end_angle)), ANGLE_DIGITS)}\u00b0"
            line = segment((abs(rib.start) * factor + 0.8) * way, (radius + 1.5) * way)
            # Of falling ones each line to an end crosses all arcs before it, but not past them.
            arcs = angular(0j, radius, UP, last, text, is_past=not is_rising)
            board.put(([line, *inks] for inks in arcs), text)
    return board


def _holes(
    board: Board, groups: Sequence[HoleGroup], factor: float, pitch: float, half: float
) -> None:
    for group in groups:
        size = f"{group.count}\u00d7 \u2300{number(group.diameter / MM)}"
        if group.span:
            size = (
                f"{group.count}\u00d7 slot {number(group.diameter / MM)} wide, ends"
                f" {number(math.degrees(group.span), ANGLE_DIGITS)}\u00b0 apart"
            )
        circle = f"on \u2300{number(2.0 * group.place / MM)}, {_place(group.off_axis, pitch)}"
        arcs = [e for e in group.first.edges if not e.is_line]
        tips = [edge.point(share) * factor for edge in arcs for share in (0.5, 0.25, 0.75)]
        tips = [tip for tip in tips if abs(cmath.phase(tip / 1j)) < half] or tips
        tips.sort(key=lambda tip: -tip.real)
        candidates = (inks for tip in tips for inks in leaders(tip, [size, circle]))
        board.put(candidates, size)


def _notches(board: Board, pole: Pole, factor: float, pitch: float) -> None:
    for group in pole.notches:
        groove = group.groove
        sizes = (
            f"{group.count}\u00d7 {_kind(groove)} {number(groove.mouth / MM)} wide,"
            f" {number(groove.depth / MM)} deep"
        )
        radii = [f"R{number(r / MM)}" for r in groove.radii]
        texts = [sizes, ", ".join([*radii, _place(group.off_axis, pitch)])]
        tips = [
            edge.point(0.5) * cmath.rect(1.0, UP - side * group.off_axis) * factor
            for side in (1.0, -1.0)
            for edge in groove.edges
        ]
        board.put((inks for tip in tips for inks in leaders(tip, texts)), sizes)


def _kind(groove: Groove) -> str:
    return "step" if groove.mouth > WIDE_AS_STEP * groove.depth else "notch"


def _place(off_axis: float, pitch: float) -> str:
    """Where something lies that is `off_axis` rad from the q axis."""
    if off_axis < ON_AXIS:
        return "on q axis"
    if abs(off_axis - 0.5 * pitch) < ON_AXIS:
        return "on d axis"
    return f"{number(math.degrees(off_axis), ANGLE_DIGITS)}\u00b0 from q axis"


def _rim(board: Board, pole: Pole, factor: float) -> None:
    """The rim's radius on the q axis where it is no circle."""
    if pole.rim.is_round:
        return
    tip = 1j * pole.rim.on_q * factor
    radii = ", ".join(f"R{number(r / MM)}" for r in pole.rim.radii)
    texts = [f"rim on q axis {number(pole.rim.on_q / MM)} from axis", f"rim of arcs {radii}"]
    # Beside the q axis, whose own labels stand on the left.
    arcs = [e for e in pole.outlines if abs(abs(e.start) - pole.rim.on_q) < 1e-4]
    tips = [tip, *(edge.point(0.5) * factor for edge in arcs)]
    board.put((inks for one in tips for inks in leaders(one, texts)), texts[0])
