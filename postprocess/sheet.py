"""The drawing for the lamination supplier: one sheet, PDF and SVG, at true scale.

The paper is the smallest of A4 to A2 on which all views find room at scales of ISO 5455 (m) large
enough to read; on it the pole's view, then the whole lamination, are as large as fits. Everything
printed as a dimension is measured on the contours as cut. There is no clock and no chance in a
drawing: the same job gives the same bytes.
"""

import cmath
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from itertools import pairwise
from pathlib import Path

from lamwright.geometry.curves import Edge, turned_edge
from lamwright.geometry.errors import LamwrightError

from .sheet_clip import turn_of
from .sheet_details import (
    DetailMark,
    RibKind,
    detail_mark,
    detail_scale,
    rib_detail,
    rib_kinds,
    scale_text,
)
from .sheet_frame import BLOCK_HEIGHT, BLOCK_WIDTH, Paper, frame, papers, title_block
from .sheet_ink import Picture
from .sheet_job import MM, SheetJob
from .sheet_labels import NoRoomError
from .sheet_layout import Block, Room, packed
from .sheet_measures import PoleMeasure, pole_measures
from .sheet_pdf import write_pdf
from .sheet_pole import Pole, pole_view
from .sheet_rims import BoreMeasure, HoleGroup, RimMeasure, bore_measure, hole_groups, rim_measure
from .sheet_svg import write_svg
from .sheet_tables import barrier_table, caution, notes, rib_table, stack_table
from .sheet_whole import Whole, whole_view

SCALES = (20.0, 10.0, 5.0, 2.0, 1.0, 0.5, 0.2, 0.1)  # ISO 5455
LEAST_CHORD = 70.0  # mm of paper that a pole's view should be wide at least
LEAST_BARRIER = 3.0  # mm of paper that the thinnest barrier should be
LEAST_WHOLE = 55.0  # mm of paper, of the whole lamination's diameter


@dataclass(frozen=True, slots=True)
class Measured:
    """All that was measured."""

    poles: tuple[PoleMeasure, ...]
    kinds: tuple[RibKind, ...]
    bore: BoreMeasure
    rim: RimMeasure
    holes: tuple[HoleGroup, ...]


@dataclass(frozen=True, slots=True)
class Sheet:
    """A composed drawing."""

    paper: Paper
    picture: Picture
    whole_scale: float
    pole_scale: float


def drawing_sheet(job: SheetJob, path_pdf: Path, path_svg: Path) -> Sheet:
    """Write the drawing as PDF and SVG; each file appears whole or not at all.

    Args:
        job: what to draw.
        path_pdf: file to write; its folder must exist.
        path_svg: likewise.

    Raises:
        LamwrightError: the outline does not fit on the largest paper allowed, or an option is not
            known.
    """
    sheet = composed(job)
    title = f"{job.options.part_number} {job.options.title or 'Rotor lamination'}".strip()
    write_pdf(sheet.picture, sheet.paper.size, path_pdf, f"{title}: {job.design.name}")
    write_svg(sheet.picture, sheet.paper.size, path_svg)
    return sheet


def composed(job: SheetJob) -> Sheet:
    """The drawing on the smallest paper that has room.

    Raises:
        LamwrightError: none has.
    """
    measured = measure(job)
    sizes = papers(job.options.paper)
    details = _details(job, measured)
    for is_last in (False, True):
        for paper in sizes:
            found = _on_paper(job, measured, paper, details, is_last)
            if found is not None:
                return found
    names = " or ".join(paper.name for paper in sizes)
    raise LamwrightError(f"drawing: not all views fit on {names}; ask for a larger paper")


def measure(job: SheetJob) -> Measured:
    """All that the drawing tells, measured on the contours."""
    poles = pole_measures(job)
    return Measured(
        poles,
        rib_kinds(poles),
        bore_measure(job.contours),
        rim_measure(job.contours, job.section.pole_angle),
        hole_groups(poles),
    )


def _on_paper(
    job: SheetJob, measured: Measured, paper: Paper, details: Sequence[Picture], is_last: bool
) -> Sheet | None:
    space = Room(paper.low, paper.high)
    corner = complex(paper.high.real - BLOCK_WIDTH, paper.low.imag)
    block = Room(corner, corner + complex(BLOCK_WIDTH, BLOCK_HEIGHT))
    for pole_scale, whole_scale in _scales(job, measured, is_last):
        try:
            blocks = _blocks(job, measured, pole_scale, whole_scale, details)
        except NoRoomError:
            continue
        found = packed(blocks, space, [block])
        if found is None:
            continue
        title = title_block(job, [scale_text(whole_scale)], paper).moved(corner)
        picture = frame(paper)
        for one in (title, *found):
            picture = picture + one
        return Sheet(paper, picture, whole_scale, pole_scale)
    return None


def _scales(job: SheetJob, measured: Measured, is_last: bool) -> Iterator[tuple[float, float]]:
    """Scales of pole and whole lamination, the largest first; all the small ones if need be."""
    size = 2.0 * measured.rim.radius / MM
    chord = measured.rim.radius / MM * abs(1.0 - cmath.exp(1j * job.section.pole_angle))
    thin = min((cut.thickness for pole in measured.poles for cut in pole.cuts), default=MM) / MM
    for pole_scale in SCALES:
        is_small = pole_scale * chord < LEAST_CHORD or pole_scale * thin < LEAST_BARRIER
        if is_small and not is_last:
            continue
        for whole_scale in SCALES:
            if whole_scale > pole_scale or (whole_scale * size < LEAST_WHOLE and not is_last):
                continue
            yield pole_scale, whole_scale


def _blocks(
    job: SheetJob,
    measured: Measured,
    pole_scale: float,
    whole_scale: float,
    details: Sequence[Picture],
) -> list[Block]:
    blocks = []
    for number, pole in enumerate(measured.poles):
        shown = _pole(job, measured, number)
        name = f"{_name(pole)} ({scale_text(pole_scale)})"
        blocks.append(Block(pole_view(job, shown, pole_scale, name)))
    whole = Whole(measured.bore, measured.rim, measured.holes, None)
    name = f"Lamination ({scale_text(whole_scale)})"
    blocks.append(Block(whole_view(job, whole, whole_scale, name)))
    width = BLOCK_WIDTH - 8.0
    blocks += [
        Block(caution(job, width), is_right=True),
        Block(notes(job, width), is_right=True),
        Block(stack_table(job), is_right=True),
        Block(barrier_table(measured.poles, job.width_limit, measured.rim.radius), is_right=True),
        Block(rib_table(measured.kinds, job.width_limit), is_right=True),
    ]
    return [*blocks, *(Block(one) for one in details)]


def _details(job: SheetJob, measured: Measured) -> tuple[Picture, ...]:
    found = []
    for kind in measured.kinds:
        outlines = _upright(job, measured.poles[kind.pole])
        scale = scale_text(detail_scale(kind))
        found.append(rib_detail(kind, outlines, job.width_limit, scale))
    return tuple(found)


def _name(pole: PoleMeasure) -> str:
    numbers = pole.numbers
    if len(numbers) == 1:
        return f"Pole {numbers[0]}"
    step = numbers[1] - numbers[0]
    is_even = all(b - a == step for a, b in pairwise(numbers))
    if len(numbers) < 3 or not is_even:
        many = ", ".join(str(one) for one in numbers)
    elif step == 1:
        many = f"{numbers[0]} to {numbers[-1]}"
    else:
        many = f"{numbers[0]}, {numbers[1]} to {numbers[-1]}"
    return f"Pole, alike {many}"


def _pole(job: SheetJob, measured: Measured, number: int) -> Pole:
    pole = measured.poles[number]
    marks: list[DetailMark] = [detail_mark(k) for k in measured.kinds if k.pole == number]
    holes = measured.holes if number == 0 else ()
    return Pole(pole, _upright(job, pole), measured.rim, measured.bore.radius, holes, (), marks)


def _upright(job: SheetJob, pole: PoleMeasure) -> Sequence[Edge]:
    """The whole lamination's edges with this kind's first pole upright."""
    turn = cmath.phase(turn_of((pole.numbers[0] - 0.5) * job.section.pole_angle))
    return [turned_edge(edge, turn) for c in job.contours for edge in c.path.edges]
