"""Rules of measured loss points on a steel card, and of the strands of a winding."""

import math
from collections.abc import Iterator
from itertools import pairwise

from .design import WindingDesign
from .design_loss import LossPoints, StrandDesign
from .errors import Finding

# Bounds that no measurement of a sheet passes but a wrong unit does (common practice, no source).
_MOST = {"frequency_hz": 1e5, "b_t": 3.0, "loss_w_per_kg": 1e5}
MOST_AREA_DIFFERENCE = 0.02  # of strands against the conductor's stated area
_UNITS = {"frequency_hz": "hertz", "b_t": "tesla, peak", "loss_w_per_kg": "watts per kilogram"}

Point = tuple[float, float, float]  # frequency, flux density, loss


def loss_findings(loss: LossPoints) -> tuple[Finding, ...]:
    """Everything that forbids the use of a card's loss points.

    Three columns of like length; at least two frequencies, as one cannot part hysteresis from eddy
    currents; and a loss that rises with the flux density and with the frequency.
    """
    columns = {key: getattr(loss, key) for key in _MOST}
    n = len(loss.frequency_hz)
    found = []
    for key, values in columns.items():
        if len(values) != n:
            fault, remedy = f"number of points, but frequency_hz has {n}", "accepted one for each"
            found.append(Finding("loss-lengths", f"loss.{key}", len(values), fault, remedy))
        top = max(values)
        if top > _MOST[key]:
            place = f"loss.{key}[{values.index(top) + 1}]"
            remedy = f"accepted {_UNITS[key]}, up to {_MOST[key]:g}"
            found.append(Finding("loss-unit", place, top, "beyond any sheet steel", remedy))
    if found:
        return tuple(found)
    if len(set(loss.frequency_hz)) < 2:
        fault = "one frequency cannot part hysteresis from eddy currents"
        remedy = "accepted points at two frequencies or more"
        value = loss.frequency_hz[0]
        return (Finding("loss-frequencies", "loss.frequency_hz[1]", value, fault, remedy),)
    points = list(zip(*columns.values(), strict=True))
    return (*_not_rising(points, 0, 1), *_not_rising(points, 1, 0))


def _not_rising(points: list[Point], same: int, along: int) -> Iterator[Finding]:
    """Losses that do not rise along one column where the other is the same."""
    what = "flux density" if along == 1 else "frequency"
    order = sorted(range(len(points)), key=lambda k: (points[k][same], points[k][along]))
    for before, k in pairwise(order):
        one, other = points[before], points[k]
        if one[same] == other[same] and other[2] <= one[2]:
            fault = f"not above {one[2]:g} at a {what} of {one[along]:g}"
            remedy = f"accepted a loss that rises with the {what}, each point once"
            yield Finding("loss-order", f"loss.loss_w_per_kg[{k + 1}]", other[2], fault, remedy)


def strand_findings(winding: WindingDesign) -> Iterator[Finding]:
    """What keeps the stated strands from being those of the winding's conductor."""
    strands = winding.strands
    if strands is None:
        return
    area = strand_area_mm2(strands)
    if area is None:
        key = "winding.strands.round_diameter_mm"
        fault = "a strand is either round or rectangular, and fully stated"
        remedy = "accepted round_diameter_mm alone, or width_mm, height_mm and layers"
        yield Finding("strand-shape", key, strands.round_diameter_mm or 0.0, fault, remedy)
        return
    in_slot = winding.layers * winding.turns_per_coil * strands.in_hand
    if strands.layers is not None and in_slot % strands.layers:
        fault = f"{in_slot} strands in a slot do not fill so many layers"
        fitting = (n for n in range(1, in_slot + 1) if in_slot % n == 0)
        remedy = f"accepted {', '.join(str(n) for n in fitting)}"
        yield Finding("strand-layers", "winding.strands.layers", strands.layers, fault, remedy)
    total, stated = strands.in_hand * area, winding.conductor_area_mm2
    if abs(total - stated) > MOST_AREA_DIFFERENCE * stated:
        fault = f"not the strands' copper, {strands.in_hand} of {area:.4g} mm2"
        remedy = f"accepted {total:.4g} within {100.0 * MOST_AREA_DIFFERENCE:g} %"
        yield Finding("strand-area", "winding.conductor_area_mm2", stated, fault, remedy)


def strand_area_mm2(strands: StrandDesign) -> float | None:
    """Copper area of one strand; None where its shape is not fully stated."""
    diameter, width, height = strands.round_diameter_mm, strands.width_mm, strands.height_mm
    if diameter is not None:
        return 0.25 * math.pi * diameter**2 if width is None and height is None else None
    if width is None or height is None or strands.layers is None:
        return None
    return width * height
