"""Checks of the radial ribs: whether each and its fillets fit where they cross their barrier.

The ribs are drawn as they would be punched and measured: what is left of the barrier's sides
between them and beyond them, how long every edge beside them is, and the iron between the
cavities. So a rib may cross any part of any barrier.

Least sizes are those of `barrier_checks`: common practice, no source.
"""

import math
from collections.abc import Sequence
from itertools import pairwise

from .bands import Band
from .cavities import are_symmetric, joined
from .curves import Edge, Path
from .design import BarrierDesign
from .distances import distance
from .half_checks import SLACK, Pole
from .mid_lines import MM
from .remedies import Fault
from .rib_cuts import FULL_ROUND_TOL, RibCut, RibSide, mirrored_pair, rib_cuts, rib_sides

SIDE_KEYS = ("radial_rib_mm", "fillet_mm", "thickness_mm", "depth_mm", "end_angle_deg")
LEAST_COUNT_OF_PLACES = 3  # ribs whose places need a list


def rib_faults(pole: Pole, table: str, barrier: BarrierDesign, band: Band | None) -> list[Fault]:
    """All faults of a barrier's radial ribs.

    Args:
        pole: what the barrier has to fit into.
        table: of the barrier as written in a message, as `rotor.barrier[1]`.
        barrier: whose ribs.
        band: its outline; None where it cannot be drawn, which is found elsewhere.
    """
    faults = _key_faults(pole, table, barrier)
    if barrier.radial_ribs:
        faults += _size_faults(pole, table, barrier)
    if band is None or faults:  # ribs without a sound size or place cannot be measured
        return faults
    return faults + _place_faults(pole, table, barrier, band, rib_cuts(barrier))


def _key_faults(pole: Pole, table: str, barrier: BarrierDesign) -> list[Fault]:
    """Keys that are missing, or that do nothing."""
    count, places = barrier.radial_ribs, barrier.radial_rib_places_mm
    found: list[tuple[str, str, str, str]] = []  # code, key, text, remedy
    if count and barrier.radial_rib_mm is None:
        remedy = f"add radial_rib_mm, {pole.sheet / MM:g} or more"
        found.append(("radial_rib_missing", "radial_ribs", "radial ribs need a width", remedy))
    if places is not None and len(places) != count:
        text = f"radial_rib_places_mm has {len(places)}"
        remedy = f"accepted {len(places)}, or as many places as ribs"
        found.append(("radial_places_count", "radial_ribs", text, remedy))
    if places is None and count == 2 and barrier.radial_rib_offset_mm is None:
        text = "two radial ribs need their distance from the q axis"
        remedy = "add radial_rib_offset_mm, from the q axis to the middle of a rib"
        found.append(("radial_offset_missing", "radial_ribs", text, remedy))
    if places is None and count >= LEAST_COUNT_OF_PLACES:
        text = "so many radial ribs need their places"
        remedy = f"add radial_rib_places_mm, {count} heights off the q axis"
        found.append(("radial_places_missing", "radial_ribs", text, remedy))
    if barrier.radial_rib_offset_mm is not None and (count != 2 or places is not None):
        text = "only two radial ribs without radial_rib_places_mm have it"
        remedy = "remove it, or set radial_ribs = 2 without radial_rib_places_mm"
        found.append(("radial_offset_idle", "radial_rib_offset_mm", text, remedy))
    on_axis = 0.5 * (barrier.radial_rib_mm or 0.0)
    off_axis = count == 2 if places is None else any(abs(place) > on_axis for place in places)
    if barrier.radial_rib_tilt_deg and not off_axis and (places is not None or count < 2):
        text = "there is no radial rib off the q axis to incline"
        remedy = "remove it, or move a rib off the axis"
        found.append(("radial_tilt_idle", "radial_rib_tilt_deg", text, remedy))
    return [
        Fault(code, (f"{table}.{key}",), text, 1.0, remedy) for code, key, text, remedy in found
    ]


def _size_faults(pole: Pole, table: str, barrier: BarrierDesign) -> list[Fault]:
    """The ribs' width and fillets, as far as they hold wherever the ribs are."""
    faults = []
    if barrier.radial_rib_mm is not None:
        lack = pole.sheet - MM * barrier.radial_rib_mm
        text = f"thinner than the sheet ({pole.sheet / MM:g} mm)"
        faults += _short("radial_rib_thin", (f"{table}.radial_rib_mm",), text, lack)
    return faults + _fillet_faults(pole, table, barrier)


def _fillet_faults(pole: Pole, table: str, barrier: BarrierDesign) -> list[Fault]:
    radius, full = MM * barrier.fillet_mm, 0.5 * MM * barrier.thickness_mm
    least, largest = pole.least_radius, full - 0.5 * pole.least_edge
    if abs(radius - full) <= FULL_ROUND_TOL or least - SLACK <= radius <= largest + SLACK:
        return []
    if full < least:
        return []  # the thickness is at fault, and is found elsewhere
    if radius > largest and not _is_even(barrier):
        return []  # what fits is known where the rib is drawn
    # The full round stands apart from the range, so it is named in the text.
    code, text = "fillet_large", f"more than half the thickness; {_mm(full)} is a full round"
    if radius < least:
        code, text = "fillet_small", "too small to punch"
    elif radius < full:
        short = f"leaves a straight end under {_mm(pole.least_edge)} mm beside it"
        text = f"{short}; {_mm(full)} is a full round"
    remedy = f"accepted {_mm(full)} (full round)" if largest < least else None
    lack = max(least - radius, radius - largest)
    return [Fault(code, (f"{table}.fillet_mm",), text, lack, remedy)]


def _is_even(barrier: BarrierDesign) -> bool:
    """Whether the barrier is as thick all along."""
    other = barrier.other_half
    ends = (barrier.end_thickness_mm, None if other is None else other.end_thickness_mm)
    if any(end not in (None, barrier.thickness_mm) for end in ends):
        return False
    return barrier.shape not in ("hyperbolic", "streamline")


def _place_faults(
    pole: Pole, table: str, barrier: BarrierDesign, band: Band, cuts: tuple[RibCut, ...]
) -> list[Fault]:
    """Whether the ribs fit on the barrier, each by itself and beside each other."""
    faults: list[Fault] = []
    names = (*_own_keys(barrier), *_shape_keys(barrier))
    sides: list[tuple[RibSide, RibSide]] = []
    # Of ribs that mirror each other one half answers for both: half the time.
    first = len(cuts) // 2 if are_symmetric(band, cuts) else 0
    for number, cut in zip(_order(barrier)[first:], cuts[first:], strict=True):
        keys = tuple(f"{table}.{name}" for name in _with_place(names, barrier, number))
        try:
            pair = rib_sides(band, cut)
        except ValueError:  # across no side of the barrier, or a fillet beyond it
            lack = _overreach(pole, band, cut)
        else:
            sides.append(pair)
            lack = pole.least_edge - min(map(_room, pair))
        text = "a radial rib and its fillets reach beyond the sides of the barrier"
        if not any(fault.keys[0] == keys[0] for fault in faults):  # a pair is one fault
            faults += _short("radial_rib_reach", keys, text, lack)
    if faults or not cuts:
        return faults
    places = tuple(f"{table}.{name}" for name in _with_place(names, barrier, _order(barrier)[-1]))
    text = "the radial ribs leave no cavity between them"
    mirrored = [mirrored_pair(pair) for pair in reversed(sides[len(cuts) % 2 :])] if first else []
    both = [*mirrored, *sides]
    lack = max((pole.least_edge - _between(p[1], q[0]) for p, q in pairwise(both)), default=0.0)
    faults += _short("radial_ribs_close", places, text, lack)
    if faults:
        return faults
    try:
        cavities = joined(band, cuts, both).cavities[first:]
    except ValueError:  # on a bend the ends of two ribs may meet where their chord says not
        return _short("radial_ribs_close", places, text, pole.least_edge)
    own = min(_length((edge,)) for edge in (*band.to_shaft, *band.to_rim))
    return _edge_faults(min(pole.least_edge, own), places, cavities, cuts[0].width)


def _edge_faults(
    least: float, keys: tuple[str, ...], cavities: Sequence[Path], width: float
) -> list[Fault]:
    """Slivers beside the ribs, and iron between cavities that is no rib."""
    shortest = min(edge.length for path in cavities for edge in path.edges)
    text = f"beside a radial rib an edge of only {shortest / MM:.3g} mm is left"
    faults = _short("radial_rib_sliver", keys, text, least - shortest)
    iron = min(distance(p.edges, q.edges) for p, q in pairwise(cavities))
    text = f"only {iron / MM:.3g} mm of iron are left beside a radial rib"
    return faults + _short("radial_rib_iron", keys, text, width - iron)


def _own_keys(barrier: BarrierDesign) -> tuple[str, ...]:
    keys = ("radial_rib_tilt_deg",) if barrier.radial_rib_tilt_deg else ()
    is_pair = barrier.radial_ribs == 2 and barrier.radial_rib_places_mm is None
    return ("radial_rib_offset_mm", *keys) if is_pair else keys


def _shape_keys(barrier: BarrierDesign) -> tuple[str, ...]:
    if barrier.shape == "straight":
        return (*SIDE_KEYS, "arm_angle_deg", "bend_radius_mm")
    return (*SIDE_KEYS, "bend_radius_mm") if barrier.shape == "vee" else SIDE_KEYS


def _with_place(names: tuple[str, ...], barrier: BarrierDesign, number: int) -> tuple[str, ...]:
    if barrier.radial_rib_places_mm is None:
        return names
    return (f"radial_rib_places_mm[{number}]", *names)


def _order(barrier: BarrierDesign) -> tuple[int, ...]:
    """Number of each rib in the list of places, from 1, counter-clockwise."""
    places = barrier.radial_rib_places_mm
    if places is None:
        return tuple(range(1, barrier.radial_ribs + 1))
    return tuple(sorted(range(1, len(places) + 1), key=lambda number: places[number - 1]))


def _room(side: RibSide) -> float:
    """What a rib leaves of the shorter side of its barrier, in m."""
    return min(_length(side.to_shaft), _length(side.to_rim))


def _between(low: RibSide, high: RibSide) -> float:
    """The shorter of the barrier's sides between two ribs in m, negative where they overlap."""
    # Both leave a rest of the same chain, whose length is known from the rests' overlap.
    return min(
        _overlap(low.to_shaft, high.to_shaft),
        _overlap(low.to_rim, high.to_rim),
    )


def _overlap(ahead: Sequence[Edge], back: Sequence[Edge]) -> float:
    start, end = ahead[0].start, back[0].start
    step = (end - start) / ahead[0].direction(0.0)
    return math.copysign(abs(step), step.real)


def _overreach(pole: Pole, band: Band, cut: RibCut) -> float:
    """How far a rib that cannot be drawn reaches beyond the barrier's sides, at least a little."""
    reach = max(abs(edge.end.imag) for edge in (*band.to_rim, *band.to_shaft))
    beyond = abs(cut.height) + 0.5 * cut.width + cut.fillet - 0.9 * reach
    return pole.least_edge + max(beyond, 0.0)


def _length(edges: Sequence[Edge]) -> float:
    return sum(edge.length for edge in edges)


def _short(code: str, keys: tuple[str, ...], text: str, lack: float) -> list[Fault]:
    """The fault, if anything is missing."""
    return [Fault(code, keys, text, lack)] if lack > SLACK else []


def _mm(length: float) -> str:
    """A length to a nanometre, which is what the checks let pass for rounding."""
    return f"{length / MM:.6f}".rstrip("0").rstrip(".")
