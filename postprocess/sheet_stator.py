"""The stator lamination's drawing: whole view, one slot, its mouth, sizes, stack, notes, cautions.

Composed like the rotor's (see `sheet`): everything printed is measured on the contours as cut.
"""

import functools
from collections.abc import Iterator

from .sheet_dimensions import number, with_limit
from .sheet_fitting import SCALES, Scales, Sheet, fitted, whole_scales
from .sheet_frame import BLOCK_WIDTH, Paper
from .sheet_ink import Picture
from .sheet_job import MM, SheetJob
from .sheet_layout import GAP
from .sheet_slot import mouth_detail, slot_reach, slot_view, stator_view
from .sheet_slots import StatorMeasure, stator_measure
from .sheet_stack import stack_picture
from .sheet_tables import caution, numbered, sheet_notes, stack_table, table

LEAST_SLOT = 8.0  # mm of paper that a slot should be wide at least
MOST_SLOT = 0.55  # of the paper's width, of the view of one slot
CAUTION = (
    "CAUTION: the bore makes the air gap, and a rotor that rubs can burst or burn. This drawing"
    " supports, and never replaces, a qualified engineer's judgement, the supplier's material"
    " certificate, a check of bore and gap as assembled, and local codes and standards. Cut edges"
    " are sharp."
)


def composed_stator(job: SheetJob) -> Sheet:
    """The drawing on the smallest paper that has room.

    Raises:
        LamwrightError: none has, or a fit is not known.
    """
    measured = stator_measure(job.contours)
    width = BLOCK_WIDTH - 2.0 * GAP
    mouth = mouth_detail(job, measured)
    details = () if mouth is None else (mouth,)
    tables = [
        size_table(job, measured),
        stack_picture(job, stack_table(job), measured.outer),
        numbered((*_notes(job, measured), *job.options.remarks), width),
        caution(job, width, CAUTION),
    ]
    slot = functools.cache(lambda scale: slot_view(job, measured, scale))
    whole = functools.cache(lambda scale: stator_view(job, measured, scale))
    return fitted(
        job,
        "stator drawing",
        lambda paper, is_last: _scales(measured, paper, is_last),
        lambda scales: (slot(scales[0]), whole(scales[1])),
        (details, tables),
    )


def _scales(measured: StatorMeasure, paper: Paper, is_last: bool) -> Iterator[Scales]:
    """Scales of one slot and of the whole lamination, the largest first."""
    size = 2.0 * measured.outer / MM
    view = slot_reach(measured) / MM
    for slot_scale in SCALES:
        is_small = slot_scale * measured.slot.width / MM < LEAST_SLOT
        if slot_scale * view > MOST_SLOT * paper.width or (is_small and not is_last):
            continue
        for whole_scale in whole_scales(size, slot_scale, paper, is_last):
            yield slot_scale, whole_scale


def size_table(job: SheetJob, measured: StatorMeasure) -> Picture:
    """Every size of a slot with its limits, as it is gauged."""
    slot, limit = measured.slot, job.width_limit

    def sized(value: float) -> str:
        return with_limit(value / MM, limit)

    opening = slot.opening
    rows = [
        ("Slots, equally spaced", str(measured.count)),
        ("Slot pitch, exact", f"{number(360.0 / measured.count)}\u00b0"),
        ("Slot opening at the bore", "closed" if opening is None else sized(opening)),
        *((("Straight lip, depth", sized(slot.lip)),) if slot.lip is not None else ()),
        *(
            (("Bridge at the bore, least", sized(abs(slot.bridge[1] - slot.bridge[0]))),)
            if slot.bridge is not None
            else ()
        ),
        ("Slot, greatest width", sized(slot.width)),
        ("Slot depth on its middle, from bore", sized(measured.depth)),
        ("Tooth, least width", sized(measured.tooth_width)),
        ("Yoke behind a slot, least", sized(measured.yoke)),
        ("Radii R of a slot", ", ".join(number(r / MM) for r in slot.radii) or "none"),
    ]
    return table("SLOTS, TEETH AND YOKE, mm", ("What is measured", "Size"), rows)


def _notes(job: SheetJob, measured: StatorMeasure) -> Iterator[str]:
    yield "Dimensions in mm, after cutting, at 20 \u00b0C. Tolerancing ISO 8015, fits ISO 286."
    limit = number(job.width_limit)
    yield (
        f"The slot pitch is theoretically exact: contours of all slots have a line profile of"
        f" {limit} to datum A, the bore (\u00b1{number(0.5 * job.width_limit)} either side)."
    )
    yield "Slots, teeth and yoke are measured between cut edges of one sheet, not of the stack."
    if not job.options.stator_outer_fit:
        yield (
            "Fit of the outer diameter and its run-out to datum A: not given; agree with the frame."
        )
    yield from sheet_notes(job.options)
    yield (
        f"{measured.count} slots; slot 1 is the first after the tooth whose middle lies on the x"
        " axis of the DXF. The DXF of the same design hash is the exact contour, also where"
        " nothing is dimensioned here."
    )
