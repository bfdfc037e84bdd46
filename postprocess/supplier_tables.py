"""A supplier's outline as records and CSV: ribs, worst places, how it lay, and the promise."""

import math
from collections.abc import Sequence

from lamwright.geometry.supplier_outline import Ring, SupplierOutline, WorstPlace

from .differences import FigureDifference, difference_rows
from .files import csv_text

MM, UM = 1e3, 1e6  # per m
RIB_COLUMNS = (
    "pole",
    "rib",
    "design_mm",
    "measured_mm",
    "difference_um",
    "standard_error_um",
    "tolerance_um",
    "within_tolerance",
)
SIGMAS = 2.0  # standard errors of a width, within which a tolerance counts as held


def rib_records(found: SupplierOutline, tolerance: float) -> list[dict[str, object]]:
    """Every rib of every pole against design and tolerance (m, to both sides)."""
    return [
        dict(
            zip(
                RIB_COLUMNS,
                (
                    rib.pole,
                    rib.name,
                    round(MM * rib.designed, 6),
                    round(MM * rib.width, 6),
                    round(UM * rib.difference, 3),
                    round(UM * rib.error, 3),
                    round(UM * tolerance, 3),
                    holds(rib.difference, rib.error, tolerance),
                ),
                strict=True,
            )
        )
        for rib in found.ribs
    ]


def holds(difference: float, error: float, tolerance: float) -> bool:
    """Whether a width is within its tolerance, as far as the noise lets that be told (m)."""
    return abs(difference) <= tolerance + SIGMAS * error


def ribs_out(found: SupplierOutline, tolerance: float) -> int:
    """How many ribs are not within the tolerance (m)."""
    return sum(not holds(rib.difference, rib.error, tolerance) for rib in found.ribs)


def supplier_ribs_csv(found: SupplierOutline, tolerance: float) -> str:
    """One row a rib."""
    rows = [[str(v) for v in record.values()] for record in rib_records(found, tolerance)]
    return csv_text(RIB_COLUMNS, rows)


def promise_csv(differences: Sequence[FigureDifference]) -> str:
    """One row a figure: promised, of the outline, change, both error bars together."""
    records = difference_rows(differences, ("promised", "outline"))
    rows = [["" if v is None else str(v) for v in record.values()] for record in records]
    return csv_text(list(records[0]) if records else [], rows)


def supplier_record(
    found: SupplierOutline, tolerance: float, differences: Sequence[FigureDifference]
) -> dict[str, object]:
    """All that is said of the outline, for JSON."""
    laid = found.alignment
    return {
        "outline_file": found.source.file,
        "outline_sha256": found.source.sha256,
        "unit": found.source.unit,
        "entities_read": dict(found.source.kinds),
        "entities_left_out": dict(found.source.left_out),
        "points_beside_left_out": found.left_out,
        "drawn_copies_in_a_turn": found.copies,
        "axis_mm": [MM * laid.axis.real, MM * laid.axis.imag],
        "turned_deg": math.degrees(laid.angle),
        "own_mirror_image": laid.is_either,
        "noise_um": round(UM * found.noise, 4),
        "rim": _ring_record(found.rim),
        "bore": _ring_record(found.bore),
        "poles_analysed": list(found.poles_analysed),
        "worst_places": [_place_record(place) for place in found.worst],
        "analysed_as_drawn": not found.strays,
        "strays": [_place_record(place) for place in found.strays],
        "ribs": rib_records(found, tolerance),
        "ribs_out_of_tolerance": ribs_out(found, tolerance),
        "figures": difference_rows(differences, ("promised", "outline")),
    }


def supplier_cautions(found: SupplierOutline) -> tuple[str, ...]:
    """What a reader of the outline's verdict must know."""
    period, poles = found.ideal.period, found.ideal.poles
    analysed = " and ".join(str(pole) for pole in found.poles_analysed)
    what = "pole" if period == 1 else "poles"
    lines = []
    if found.strays:
        worst = found.strays[0]
        count = len(found.strays)
        have = "contours have" if count > 1 else "contour has"
        lines.append(
            f"NOT ANALYSED AS DRAWN: {count} {have} a shape that"
            " the design's lines and arcs do not have (a relief, a chamfer, a burr), up to"
            f" {UM * worst.deviation:+.0f} um off them, first at {worst.text}; stress and field"
            " there are those of the design's lines and arcs: put the shape into the design, or"
            " assess the drawing itself by rotor.outline_dxf"
        )
    if poles > period:
        lines.append(
            f"field and stress are of a rotor with all poles as {what} {analysed}, whose thinnest"
            " rib has the least share of its designed width; rim and bore are the mean of all"
        )
    if found.left_out:
        lines.append("what is drawn inside cavities or outside the rotor was left out")
    if found.copies > 1:
        lines.append("one part of the lamination was drawn: the others are taken alike")
    return tuple(lines)


def _ring_record(ring: Ring | None) -> dict[str, float] | None:
    if ring is None:
        return None
    return {
        "diameter_mm": round(2.0 * MM * ring.radius, 6),
        "design_mm": round(2.0 * MM * ring.designed, 6),
        "off_axis_um": round(UM * abs(ring.centre), 3),
        "unroundness_um": round(UM * ring.unroundness, 3),
    }


def _place_record(place: WorstPlace) -> dict[str, object]:
    return {
        "deviation_um": round(UM * place.deviation, 3),
        "place": place.text,
        "x_mm": round(MM * place.drawn.real, 4),
        "y_mm": round(MM * place.drawn.imag, 4),
    }
