"""The drawing for the lamination supplier: one sheet, PDF and SVG, at true scale.

The paper is the smallest of A4 to A2 on which all views find room at scales of ISO 5455 (m) large
enough to read; on it the pole's view, then the whole lamination, are as large as fits. Everything
printed as a dimension is measured on the contours as cut. There is no clock and no chance in a
drawing: the same job gives the same bytes.
"""

import cmath
import functools
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from itertools import pairwise
from pathlib import Path

from lamwright.geometry.curves import Edge, turned_edge

from .sheet_clip import turn_of
from .sheet_details import (
    LETTERS,
    RibKind,
    detail_mark,
    detail_scale,
    rib_detail,
    rib_kinds,
    scale_text,
)
from .sheet_fitting import SCALES, Scales, Sheet, fitted, shorter_side, whole_scales
from .sheet_frame import BLOCK_WIDTH, Paper
from .sheet_ink import Picture
from .sheet_job import MM, SheetJob
from .sheet_key import key_detail, key_mark
from .sheet_layout import GAP
from .sheet_measures import PoleMeasure, pole_measures
from .sheet_pdf import write_pdf
from .sheet_pole import Pole, pole_view
from .sheet_rims import (
    BoreMeasure,
    HoleGroup,
    NotchGroup,
    RimMeasure,
    bore_measure,
    hole_groups,
    notch_groups,
    rim_measure,
)
from .sheet_stack import stack_picture
from .sheet_stator import composed_stator
from .sheet_svg import write_svg
from .sheet_tables import barrier_table, caution, notes, radial_table, rib_table, stack_table
from .sheet_whole import Whole, whole_view

LEAST_CHORD = 80.0  # mm of paper that a pole's view should be wide at least
LEAST_BARRIER = 3.0  # mm of paper that the thinnest barrier should be


@dataclass(frozen=True, slots=True)
class Measured:
    """All that was measured."""

    poles: tuple[PoleMeasure, ...]
    kinds: tuple[RibKind, ...]
    bore: BoreMeasure
    rim: RimMeasure
    holes: tuple[HoleGroup, ...]
    notches: tuple[NotchGroup, ...]


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
    sheet = composed_stator(job) if job.part == "stator" else composed(job)
    title = f"{job.options.part_number} {job.title}".strip()
    write_pdf(sheet.picture, sheet.paper.size, path_pdf, f"{title}: {job.design.name}")
    write_svg(sheet.picture, sheet.paper.size, path_svg)
    return sheet


def measure(job: SheetJob) -> Measured:
    """All that the drawing tells, measured on the contours."""
    poles = pole_measures(job)
    rim = rim_measure(job.contours, job.section.pole_angle)
    return Measured(
        poles,
        rib_kinds(poles),
        bore_measure(job.contours),
        rim,
        hole_groups(poles),
        notch_groups(rim, job.section.pole_angle),
    )


def composed(job: SheetJob) -> Sheet:
    """The drawing on the smallest paper that has room.

    Raises:
        LamwrightError: none has.
    """
    measured = measure(job)
    poles = functools.cache(lambda scale: _pole_views(job, measured, scale))
    whole = functools.cache(lambda scale: (_whole_view(job, measured, scale),))
    return fitted(
        job,
        "drawing",
        lambda paper, is_last: _scales(job, measured, paper, is_last),
        lambda scales: (*poles(scales[0]), *whole(scales[1])),
        (_details(job, measured), _tables(job, measured)),
    )


def _scales(job: SheetJob, measured: Measured, paper: Paper, is_last: bool) -> Iterator[Scales]:
    """Scales of pole and whole lamination, the largest first; all the small ones if need be."""
    size = 2.0 * measured.rim.radius / MM
    chord = measured.rim.radius / MM * abs(1.0 - cmath.exp(1j * job.section.pole_angle))
    thin = min((cut.thickness for pole in measured.poles for cut in pole.cuts), default=MM) / MM
    for pole_scale in SCALES:
        is_small = pole_scale * chord < LEAST_CHORD or pole_scale * thin < LEAST_BARRIER
        if pole_scale * chord > 1.2 * shorter_side(paper) or (is_small and not is_last):
            continue
        for whole_scale in whole_scales(size, pole_scale, paper, is_last):
            yield pole_scale, whole_scale


def _pole_views(job: SheetJob, measured: Measured, scale: float) -> tuple[Picture, ...]:
    found = []
    for number, pole in enumerate(measured.poles):
        shown = Pole(
            pole,
            _upright(job, pole),
            measured.rim,
            measured.bore.radius,
            measured.holes if number == 0 else (),
            measured.notches if number == 0 else (),
            [detail_mark(kind) for kind in measured.kinds if kind.pole == number],
        )
        found.append(pole_view(job, shown, scale, f"{_name(pole)} ({scale_text(scale)})"))
    return tuple(found)


def _whole_view(job: SheetJob, measured: Measured, scale: float) -> Picture:
    where = key_mark(measured.bore, _key_letter(measured))
    whole = Whole(measured.bore, measured.rim, measured.holes, where)
    return whole_view(job, whole, scale, f"Lamination ({scale_text(scale)})")


def _key_letter(measured: Measured) -> str:
    return LETTERS[len(measured.kinds) % len(LETTERS)]


def _tables(job: SheetJob, measured: Measured) -> list[Picture]:
    width = BLOCK_WIDTH - 2.0 * GAP
    limit = job.width_limit
    radial = radial_table(measured.poles)
    return [
        rib_table(measured.kinds, limit),
        *(() if radial is None else (radial,)),
        barrier_table(measured.poles, limit, measured.rim.radius),
        stack_picture(job, stack_table(job), measured.rim.radius),
        notes(job, width),
        caution(job, width),
    ]


def _details(job: SheetJob, measured: Measured) -> list[Picture]:
    found = []
    for kind in measured.kinds:
        outlines = _upright(job, measured.poles[kind.pole])
        scale = scale_text(detail_scale(kind))
        found.append(rib_detail(kind, outlines, job.width_limit, scale))
    where = key_mark(measured.bore, _key_letter(measured))
    if where is not None:
        bore = next(c.path.edges for c in job.contours if c.layer == "BORE")
        found.append(key_detail(job, measured.bore, bore, where))
    return found


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
    return f"Poles {many} alike"


def _upright(job: SheetJob, pole: PoleMeasure) -> Sequence[Edge]:
    """The whole lamination's edges with this kind's first pole upright."""
    turn = cmath.phase(turn_of((pole.numbers[0] - 0.5) * job.section.pole_angle))
    return [turned_edge(edge, turn) for c in job.contours for edge in c.path.edges]
