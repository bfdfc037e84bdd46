"""Where a line across the slot parts its copper into two layers.

Between heights a and b a straight flank of slope s encloses (w_b^2 - w_a^2) / s, w half widths,
and a fillet of centre X + iY and radius r, run through angles t_a to t_b, twice
Y (x_b - x_a) + r^2/2 [t_a - t_b - (sin 2 t_a - sin 2 t_b)/2] (derived).
"""

import cmath
import math

from .curves import Edge, Point, arc, line
from .slot_dimensions import SlotDimensions

WELD_TOL = 1e-9  # m, a piece thinner than this is not drawn; far below a punch's 1e-5 m
NEAR_JOINT = 0.01  # of the half width; a piece so short would make needles of its elements
HALVINGS = 60  # of a fillet's angle: to rounding

Edges = tuple[Edge, ...]


def parted_flank(
    dims: SlotDimensions, straight: Edge, fillet: Edges, inner: float
) -> tuple[Edges, Edges, float]:
    """The flank of the copper in two, inner and outer layer, and the bulge of what parts them.

    They are parted by a line; by a shallow arc of the same effect where a line would end so near
    the joint of flank and fillet that no mesh could follow the piece between.

    Args:
        dims: of the slot.
        straight: upper flank beside copper, run outward.
        fillet: none or one arc at its end, clockwise.
        inner: area in m^2 that the inner layer has beyond the start of `straight`.

    Raises:
        ValueError: where the line would meet the inner side or the slot bottom.
    """
    start, end = straight.start, straight.end
    # The inner side is curved where copper reaches to the bore or the bridge.
    least = abs(start) if start == dims.entry else start.real
    rest = inner - (start.imag + end.imag) * (end.real - start.real)
    at: Point | None = _on_straight(dims, inner)
    if at is not None and at.real >= dims.corner_height - WELD_TOL:
        at = _on_fillet(fillet[0], rest) if fillet else None
    if at is None:
        raise ValueError("the line between the two layers meets the slot bottom")
    if at.real <= least + WELD_TOL:
        raise ValueError("the line between the two layers meets the slot's inner side")
    if fillet and abs(at - end) <= NEAR_JOINT * end.imag:
        return (straight,), fillet, -_bulge(2.0 * end.imag, rest)
    if at.real < dims.corner_height - WELD_TOL:
        return (line(start, at),), (line(at, end), *fillet), 0.0
    before, after = (
        arc(a, b, dims.corner_centre, ccw=False) for a, b in ((end, at), (at, fillet[0].end))
    )
    return (straight, before), (after,), 0.0


def _bulge(chord: float, enclosed: float) -> float:
    """Bulge of a shallow arc over a chord that encloses an area with it, signed as the area.

    c^2 (b/3 + b^3/15 - b^5/105 + ...), the series of the segment's closed form (derived).
    """
    aim = 3.0 * enclosed / chord**2
    bulge = aim
    for _ in range(8):  # each gains a factor b^2, 1e-3 at the most
        bulge = aim - bulge**3 / 5.0 + bulge**5 / 35.0
    return bulge


def _on_straight(dims: SlotDimensions, inner: float) -> Point:
    """Where the area is reached between the prolonged flanks."""
    slope = math.tan(dims.flank.angle)
    if slope == 0.0:
        along = inner / (2.0 * dims.copper_half_width)
        return complex(dims.copper_height + along, dims.copper_half_width)
    width = math.sqrt(dims.copper_half_width**2 + inner * slope)
    height = dims.copper_height + (width - dims.copper_half_width) / slope
    return complex(height, width)


def _on_fillet(fillet: Edge, rest: float) -> Point | None:
    """Where the area is reached along the fillet; None where it is not."""
    centre, radius = fillet.centre, fillet.radius
    first, last = (cmath.phase(p - centre) for p in (fillet.start, fillet.end))

    def enclosed(angle: float) -> float:
        along = radius * (math.cos(angle) - math.cos(first))
        swept = first - angle - 0.5 * (math.sin(2.0 * first) - math.sin(2.0 * angle))
        return 2.0 * centre.imag * along + radius**2 * swept

    if enclosed(last) <= rest:
        return None
    low, high = first, last
    for _ in range(HALVINGS):
        middle = 0.5 * (low + high)
        low, high = (middle, high) if enclosed(middle) < rest else (low, middle)
    return centre + cmath.rect(radius, 0.5 * (low + high))
