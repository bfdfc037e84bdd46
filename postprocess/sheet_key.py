"""The keyway's detail: width with its fit, depth and what can be gauged across the bore."""

import cmath
from collections.abc import Sequence

from lamwright.geometry.curves import Edge

from .sheet_clip import in_circle
from .sheet_details import CIRCLE, SCALES, DetailMark, scale_text
from .sheet_dimensions import across, extension, leaders, number
from .sheet_fits import Limits, limits_of
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
from .sheet_labels import Board
from .sheet_rims import BoreMeasure, Groove

FILLED = 0.72  # of the detail's circle that the keyway may reach
LEVELS = (7.0, 10.0, 13.0, 16.0, 24.0, 28.0)  # mm from the mouth to the width's dimension line


def key_scale(groove: Groove) -> float:
    """The greatest scale at which the keyway fits in its circle."""
    reach = 0.5 * abs(complex(groove.depth, groove.width)) / MM
    return next((s for s in SCALES if reach * s <= FILLED * CIRCLE), SCALES[-1])


def key_mark(bore: BoreMeasure, letter: str) -> DetailMark | None:
    """Where the first keyway's detail lies, in the lamination's frame; None without a keyway."""
    if not bore.keyways:
        return None
    groove = bore.keyways[0]
    centre = cmath.rect(bore.radius + 0.5 * groove.depth, groove.angle)
    return DetailMark(letter, centre, CIRCLE / key_scale(groove) * MM)


def key_detail(
    job: SheetJob, bore: BoreMeasure, outlines: Sequence[Edge], where: DetailMark
) -> Picture:
    """The first keyway enlarged, as it lies in the view of the whole lamination.

    Args:
        job: for the fit and the poles.
        bore: with at least one keyway.
        outlines: edges of the bore, m.
        where: the detail's place and letter.
    """
    groove = bore.keyways[0]
    scale = key_scale(groove)
    factor = scale / MM * 1j * cmath.exp(-0.5j * job.section.pole_angle)
    shift = -where.centre * factor
    edges = in_circle(outlines, where.centre, where.radius * (1.0 - 1e-6))
    board = Board(Stroke(placed((edge,), factor, shift), WIDE) for edge in edges)
    board.add([ring(0j, CIRCLE, NARROW)])
    turn = cmath.exp(1j * groove.angle)
    out = turn * factor / abs(factor)  # away from the shaft axis
    board.add([segment(-(CIRCLE + 3.0) * out, (CIRCLE + 3.0) * out, CENTRE)])
    _width(board, job, groove, (turn * factor, shift), out)
    bottom = max((e.point(0.5) for e in groove.edges), key=lambda p: p.real)
    tips = [complex(bottom.real, side * 0.25 * groove.width) for side in (-1.0, 1.0, -1.4, 1.4)]
    texts = _texts(bore, groove)
    at_tips = (tip * turn * factor + shift for tip in tips)
    board.put((inks for tip in at_tips for inks in leaders(tip, texts)), texts[0])
    count = len(bore.keyways)
    many = f"{count}\u00d7 keyway" if count > 1 else "keyway"
    name = f"{where.letter} ({scale_text(scale)})  {many}"
    board.add([Word(name, complex(0.0, board.picture.box[1].imag + 2.5), TITLE, "middle")])
    return board.picture


def _width(
    board: Board, job: SheetJob, groove: Groove, frame: tuple[complex, complex], out: complex
) -> None:
    """The width at the mouth, its dimension line in the bore."""
    factor, shift = frame
    size = groove.mouth / MM
    fit = job.options.key_fit
    limits = limits_of(size, fit)
    if abs(limits.upper + limits.lower) < 1e-9:  # equal to both sides
        text, shown = f"{number(size)} {fit} \u00b1{number(limits.upper, 4)}", None
    else:
        text, shown = f"{number(size)} {fit}", limits
    ends = [groove.edges[0].start, groove.edges[-1].end]
    ends.sort(key=lambda p: (p * factor).real)
    first, last = (p * factor + shift for p in ends)
    board.put(outside_widths(first, last, out, text, shown), text)


def outside_widths(
    first: complex, last: complex, out: complex, text: str, limits: Limits | None = None
) -> list[list[Ink]]:
    """Candidates of a mouth's width, its dimension line against `out` of it."""
    return [
        [
            extension(first, first - level * out),
            extension(last, last - level * out),
            *across(
                first - level * out, last - level * out, text, limits=limits, side=side, tail=t
            ),
        ]
        for t in (3.0, 8.0, 14.0, 22.0)
        for level in LEVELS
        for side in (1.0, -1.0)
    ]


def _texts(bore: BoreMeasure, groove: Groove) -> list[str]:
    radii = ", ".join(f"R{number(r / MM)}" for r in groove.radii)
    texts = [f"{number(groove.depth / MM)} deep{f', {radii}' if radii else ''}"]
    if groove.width - groove.mouth > 1e-6:
        texts.append(f"head {number(groove.width / MM)} wide")
    if bore.opposite is not None:
        has_other = bore.opposite > 2.0 * bore.radius + groove.depth + 1e-6
        texts.append(
            f"{number(bore.opposite / MM)} to {'opposite bottom' if has_other else 'opposite wall'}"
        )
    return texts
