"""Views of a stator's drawing: the whole lamination, one slot between its teeth, and its mouth."""

import cmath
import math
from collections.abc import Sequence

from lamwright.geometry.curves import Edge, Point, turned_edge

from .sheet_clip import in_circle, in_window
from .sheet_details import CIRCLE, DetailMark, circles, letters, scale_text
from .sheet_details import SCALES as DETAIL_SCALES
from .sheet_dimensions import (
    across,
    angular,
    extension,
    leaders,
    line_profile,
    number,
    with_limit,
)
from .sheet_fits import limits_of
from .sheet_ink import (
    CENTRE,
    NARROW,
    TITLE,
    WIDE,
    Ink,
    Picture,
    Stroke,
    Word,
    placed,
    ring,
    segment,
)
from .sheet_job import MM, SheetJob
from .sheet_key import outside_widths
from .sheet_labels import Board, NoRoomError
from .sheet_slots import SAME, UP, StatorMeasure
from .sheet_whole import AXIS_PAST, datum_leader, outer_size

LETTER = "M"  # of the mouth's detail
FIRST_ARC = 7.0  # mm from the outer rim to the pitch
COLUMN = 9.0  # mm from the view to depth and yoke
MOUTH_SHARE = 0.75  # of the opening, that a mouth's detail reaches to both sides
BRIDGES = 4.0  # bridges that the detail of a closed slot reaches
TAILS = (3.0, 6.0, 10.0, 15.0, 21.0, 28.0, 36.0)


def slot_reach(measured: StatorMeasure) -> float:
    """Width in m of what the view of a slot shows: to the middles of its neighbours."""
    return 2.0 * measured.outer * math.sin(min(measured.pitch, 0.5 * math.pi))


def stator_view(job: SheetJob, measured: StatorMeasure, scale: float) -> Picture:
    """The whole lamination at `scale` (mm of paper for one mm), its axis at 0, slot 1 up."""
    factor = scale / MM * 1j * cmath.exp(-0.5j * measured.pitch)
    board = Board(Stroke(placed(c.path.edges, factor), WIDE) for c in job.contours)
    radius, bore = scale * measured.outer / MM, scale * measured.bore / MM
    reach = radius + AXIS_PAST
    board.add([segment(-reach + 0j, reach + 0j, CENTRE), segment(-1j * reach, 1j * reach, CENTRE)])
    board.add([Word("slot 1", 1j * (reach + 1.2), align="middle")])
    outer_size(board, 2.0 * measured.outer / MM, job.options.stator_outer_fit, radius)
    size, fit = 2.0 * measured.bore / MM, job.options.stator_bore_fit
    text, limits = f"\u2300{number(size)} {fit}", limits_of(size, fit)
    # At the middle of a tooth: in the bore where there is room, else beyond the rim.
    teeth = [UP + (k + 0.5) * measured.pitch for k in range(measured.count)]
    teeth.sort(key=lambda way: abs(cmath.phase(cmath.exp(1j * (way - 0.7 * math.pi)))))
    inside = [(bore, share * bore) for share in (0.55, 0.7, 0.4, 0.85)]
    outside = [(bore, radius + far) for far in (8.0, 12.0, 16.0, 22.0, 30.0)]
    board.put(
        (
            datum_leader(cmath.rect(at, way), cmath.rect(knee, way), text, limits)
            for at, knee in (*inside, *outside)
            for way in teeth
        ),
        text,
    )
    return _named(board, f"Stator lamination ({scale_text(scale)})")


def slot_view(job: SheetJob, measured: StatorMeasure, scale: float) -> Picture:
    """One slot between its teeth at `scale`, from the bore to the outer rim."""
    factor, slot, pitch = scale / MM, measured.slot, measured.pitch
    window = min(pitch, 0.5 * math.pi)
    edges = in_window(_upright(job, measured), UP, window)
    board = Board(Stroke(placed((edge,), factor), WIDE) for edge in edges)
    outer, bore = measured.outer * factor, measured.bore * factor
    for k in (-1, 0, 1):
        way = cmath.rect(1.0, UP + k * pitch)
        past = FIRST_ARC + 1.5 if k < 1 else 3.0
        board.add([segment((bore - 3.0) * way, (outer + past) * way, CENTRE)])
    mark = mouth_mark(measured)
    if mark is not None:
        circles(board, [mark], factor)
    pitch_text = f"{number(math.degrees(pitch))}\u00b0"
    board.put(angular(0j, outer + FIRST_ARC, UP, UP - pitch, pitch_text), pitch_text)
    _depths(board, job, measured, factor)
    _between(board, measured.tooth, factor, with_limit(measured.tooth_width / MM, job.width_limit))
    if slot.mouth is not None and mark is None:
        first, last = (p * factor for p in slot.mouth)
        text = with_limit(abs(last - first) / factor / MM, job.width_limit)
        board.put(outside_widths(first, last, 1j, text), text)
    if not slot.is_open and abs(slot.widest[0].imag - slot.widest[1].imag) < SAME:
        _between(board, slot.widest, factor, with_limit(slot.width / MM, job.width_limit))
    over = f"{measured.count}\u00d7 slot"
    sides = [e for e in slot.wall if e.length * factor > 2.0]
    tips = [e.point(s) * factor for e in sides for s in (0.5, 0.3, 0.7)]
    cells = [number(job.width_limit), "A"]
    board.put((inks for tip in tips for inks in line_profile(tip, over, cells)), over)
    _radii(board, slot.wall, slot.radii, factor, 0j, mark)
    if mark is not None:
        letters(board, [mark], factor)
    return _named(board, f"Slots 1 to {measured.count} alike ({scale_text(scale)})")


def mouth_mark(measured: StatorMeasure) -> DetailMark | None:
    """Where the mouth's detail lies, upright; None of a slot nowhere wider than its mouth."""
    slot = measured.slot
    if slot.is_open:
        return None
    if slot.bridge is not None:
        need = BRIDGES * abs(slot.bridge[1] - slot.bridge[0])
        centre = 0.5 * (slot.bridge[0] + slot.bridge[1])
    else:
        lip = slot.lip or 0.0
        need = max(MOUTH_SHARE * (slot.opening or 0.0), 1.3 * lip)
        centre = 1j * (measured.bore + 0.5 * lip)
    scale = next((s for s in DETAIL_SCALES if CIRCLE / s * MM >= need), DETAIL_SCALES[-1])
    return DetailMark(LETTER, centre, CIRCLE / scale * MM)


def mouth_detail(job: SheetJob, measured: StatorMeasure) -> Picture | None:
    """The mouth or bridge enlarged, None where `mouth_mark` gives none."""
    mark, slot = mouth_mark(measured), measured.slot
    if mark is None:
        return None
    factor = CIRCLE / mark.radius
    shift = -mark.centre * factor
    edges = in_circle(_upright(job, measured), mark.centre, mark.radius * (1.0 - 1e-6))
    board = Board(Stroke(placed((edge,), factor, shift), WIDE) for edge in edges)
    board.add([ring(0j, CIRCLE, NARROW)])
    limit = job.width_limit
    if slot.bridge is not None:
        text = with_limit(abs(slot.bridge[1] - slot.bridge[0]) / MM, limit)
        _between(board, slot.bridge, factor, text, shift)
    elif slot.mouth is not None:
        first, last = (p * factor + shift for p in slot.mouth)
        text = with_limit(abs(slot.mouth[1] - slot.mouth[0]) / MM, limit)
        board.put(outside_widths(first, last, 1j, text), text)
        if slot.lip is not None:
            text = f"lip {with_limit(slot.lip / MM, limit)}"
            tips = [(p + share * 1j * slot.lip) * factor + shift
                    for p in slot.mouth for share in (0.5, 0.3, 0.7)]  # fmt: skip
            board.put((inks for tip in tips for inks in leaders(tip, [text])), text)
    _radii(board, edges, slot.radii, factor, shift, None)
    name = f"{LETTER} ({scale_text(factor * MM)})"
    board.add([Word(name, complex(0.0, board.picture.box[1].imag + 2.5), TITLE, "middle")])
    return board.picture


def _depths(board: Board, job: SheetJob, measured: StatorMeasure, factor: float) -> None:
    """Depth of the slot on its middle, and the yoke behind it, on the left."""
    slot, limit = measured.slot, job.width_limit
    x = board.picture.box[0].real - COLUMN
    bore, bottom = measured.bore * factor, slot.bottom.imag * factor
    levels = [bore, bottom]
    is_chain = abs(measured.outer - slot.bottom.imag - measured.yoke) < SAME
    if is_chain:
        levels.append(measured.outer * factor)
    board.add(extension(1j * y, complex(x, y)) for y in levels)
    depth = with_limit(measured.depth / MM, limit)
    board.put([across(complex(x, bore), complex(x, bottom), depth, side=s, tail=t)
               for t in TAILS for s in (-1.0, 1.0)], depth)  # fmt: skip
    yoke = with_limit(measured.yoke / MM, limit)
    if is_chain:
        ends = complex(x, bottom), complex(x, levels[2])
        board.put([across(*ends, yoke, side=1.0, tail=t) for t in TAILS], yoke)
        return
    far = slot.farthest
    _between(board, (far, far / abs(far) * measured.outer), factor, yoke)


def _between(
    board: Board, ends: tuple[Point, Point], factor: float, text: str, shift: Point = 0j
) -> None:
    """A width between two points, its text between them or on a shelf past either."""
    start, end = (p * factor + shift for p in ends)
    board.put(
        [across(start, end, text, side=side, tail=t) for t in TAILS for side in (1.0, -1.0)], text
    )


def _radii(
    board: Board,
    edges: Sequence[Edge],
    radii: Sequence[float],
    factor: float,
    shift: Point,
    mark: DetailMark | None,
) -> None:
    """Radii of the arcs shown; those in the detail's circle are told there, all in the table."""
    for radius in radii:
        arcs = [e for e in edges if not e.is_line and abs(e.radius - radius) < 10.0 * SAME]
        if mark is not None:
            arcs = [e for e in arcs if abs(e.point(0.5) - mark.centre) > mark.radius]
        tips = [e.point(s) * factor + shift for e in arcs for s in (0.5, 0.3, 0.7)]
        text = f"R{number(radius / MM)}"
        try:
            board.put((inks for tip in tips for inks in leaders(tip, [text])), text)
        except NoRoomError:
            continue  # as the table has it


def _named(board: Board, name: str) -> Picture:
    low, high = board.picture.box
    inks: list[Ink] = [
        Word(name, complex(0.5 * (low.real + high.real), high.imag + 4.0), TITLE, "middle")
    ]
    board.add(inks)
    return board.picture


def _upright(job: SheetJob, measured: StatorMeasure) -> list[Edge]:
    """The whole lamination with slot 1, half a pitch from the x axis, upright."""
    turn = UP - 0.5 * measured.pitch
    return [turned_edge(edge, turn) for c in job.contours for edge in c.path.edges]
