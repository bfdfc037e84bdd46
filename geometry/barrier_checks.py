"""Checks of the barriers: whether each fits its pole, and each pair leaves iron between.

A barrier is its mid-line thickened by a disc, so every clearance is an exact distance between
mid-lines (or a mid-line and a side of the pole) less half thicknesses. All geometry is symmetric
about the q axis; the upper half answers for both.

Least sizes are common practice, no source: iron and cavities no narrower than the sheet is thick,
radii no smaller than half of it. Edges shorter than a tenth of it are refused because no mesh
could follow them.
"""

import cmath
import math
from dataclasses import dataclass

from .corners import is_within
from .curves import Edge
from .design import BarrierDesign, MachineDesign
from .distances import distance
from .mid_lines import (
    MM,
    MidLine,
    bend_radius,
    bottom_radius,
    cap_centre,
    mid_line,
    straight_legs,
)
from .remedies import Fault, barrier_key
from .rotor import rotor_frame

SLACK = 1e-9  # m, a size is let miss its limit by rounding; far below a punch's 1e-5 m


@dataclass(frozen=True, slots=True)
class Pole:
    """What a barrier has to fit into, and the least sizes, in m."""

    rotor_radius: float
    shaft_radius: float
    pole_pairs: int
    sheet: float

    @property
    def least_radius(self) -> float:
        """Least radius of a punch's corner."""
        return 0.5 * self.sheet

    @property
    def least_edge(self) -> float:
        """Least length of an edge of an outline."""
        return 0.1 * self.sheet


def barrier_faults(design: MachineDesign, number: int) -> list[Fault]:
    """All faults in which barrier `number` (from 1 at the rim) has a share."""
    count = len(design.rotor.barrier)
    faults = _own_faults(pole_of(design), number, design.rotor.barrier[number - 1])
    for outer in (number - 1, number):
        if 1 <= outer < count:
            faults += _pair_faults(pole_of(design), outer, design.rotor.barrier)
    return faults


def rotor_faults(design: MachineDesign) -> list[Fault]:
    """All faults of all barriers, each once, from the rim inward."""
    pole, barriers = pole_of(design), design.rotor.barrier
    faults = []
    for number, barrier in enumerate(barriers, start=1):
        if number > 1:
            faults += _pair_faults(pole, number - 1, barriers)
        faults += _own_faults(pole, number, barrier)
    return faults


def pole_of(design: MachineDesign) -> Pole:
    """What the design's barriers have to fit into."""
    frame = rotor_frame(design)
    return Pole(
        frame.rotor_radius,
        frame.shaft_radius,
        frame.pole_pairs,
        MM * design.rotor.sheet_thickness_mm,
    )


def _fault(
    number: int, code: str, keys: tuple[str, ...], text: str, lack: float, remedy: str | None = None
) -> Fault:
    return Fault(code, tuple(barrier_key(number, key) for key in keys), text, lack, remedy)


def _own_faults(pole: Pole, number: int, barrier: BarrierDesign) -> list[Fault]:
    faults = _size_faults(pole, number, barrier) + _key_faults(number, barrier)
    faults += _bore_faults(pole, number, barrier) + _placement_faults(pole, number, barrier)
    mid = _mid_line(pole, barrier)
    if mid is not None:
        faults += _side_faults(pole, number, barrier, mid)
    return faults


def _mid_line(pole: Pole, barrier: BarrierDesign) -> MidLine | None:
    """The mid-line, where the barrier can be placed at all."""
    if _placement_faults(pole, 1, barrier) or bottom_radius(barrier, pole.rotor_radius) <= 0.0:
        return None
    return mid_line(barrier, pole.rotor_radius, pole.pole_pairs)


def _size_faults(pole: Pole, number: int, barrier: BarrierDesign) -> list[Fault]:
    """Single values below what can be punched."""
    half, sheet = pole.least_radius, pole.sheet
    least = [
        ("tangential_rib_thin", "tangential_rib_mm", barrier.tangential_rib_mm, sheet),
        ("barrier_thin", "thickness_mm", barrier.thickness_mm, sheet),
    ]
    if barrier.shape == "straight":
        least.append(("bend_tight", "bend_radius_mm", bend_radius(barrier) / MM, half))
    faults = []
    for code, key, value, limit in least:
        if limit - MM * value > SLACK:
            what = "than the sheet" if limit == sheet else "than half the sheet"
            text = f"thinner {what} ({pole.sheet / MM:g} mm)"
            faults.append(_fault(number, code, (key,), text, limit - MM * value))
    return faults


def _key_faults(number: int, barrier: BarrierDesign) -> list[Fault]:
    """Keys that belong to another shape."""
    faults = []
    if barrier.shape == "arc":
        for key in ("arm_angle_deg", "bend_radius_mm"):
            if getattr(barrier, key) is not None:
                remedy = 'remove it, or set shape = "straight"'
                text = "only a straight barrier has it"
                faults.append(_fault(number, "straight_only", (key,), text, 1.0, remedy))
    return faults


def _bore_faults(pole: Pole, number: int, barrier: BarrierDesign) -> list[Fault]:
    iron = bottom_radius(barrier, pole.rotor_radius) - 0.5 * MM * barrier.thickness_mm
    iron -= pole.shaft_radius
    text = f"{_left(iron)} to the bore"
    keys = ("depth_mm", "thickness_mm")
    return _short(number, "bore_close", keys, text, pole.sheet - iron)


def _placement_faults(pole: Pole, number: int, barrier: BarrierDesign) -> list[Fault]:
    """What keeps the barrier from having a mid-line."""
    beyond = math.radians(barrier.end_angle_deg) - 0.5 * math.pi / pole.pole_pairs
    if beyond >= 0.0:
        text = f"not within half the pole pitch ({90.0 / pole.pole_pairs:g})"
        return [_fault(number, "end_beyond", ("end_angle_deg",), text, beyond + SLACK)]
    bottom = bottom_radius(barrier, pole.rotor_radius)
    rise = cap_centre(barrier, pole.rotor_radius).real - bottom
    text = "the round ends lie no further out than the bottom on the q axis"
    keys = ("depth_mm", "end_angle_deg", "thickness_mm", "tangential_rib_mm")
    flat = _short(number, "barrier_flat", keys, text, pole.least_edge - rise)
    if flat or barrier.shape == "arc":
        return flat
    return _leg_faults(pole, number, barrier)


def _leg_faults(pole: Pole, number: int, barrier: BarrierDesign) -> list[Fault]:
    legs = straight_legs(barrier, pole.rotor_radius, pole.pole_pairs)
    edge = pole.least_edge
    others = ("bend_radius_mm", "end_angle_deg", "depth_mm", "thickness_mm")
    keys = ("arm_angle_deg", *others)
    faults = _short(
        number,
        "bottom_gone",
        keys,
        "the arms and their bends leave no straight bottom",
        0.5 * edge - legs.bottom_left,
    )
    faults += _short(
        number, "arm_gone", keys, "the bends leave no straight arm", edge - legs.arm_left
    )
    text = "the arms hardly turn from the bottom"
    bend = edge - bend_radius(barrier) * legs.turn
    return faults + _short(number, "bend_flat", keys, text, bend)


def _side_faults(pole: Pole, number: int, barrier: BarrierDesign, mid: MidLine) -> list[Fault]:
    """Iron left to the d axes, and the inner side of an arc."""
    half = 0.5 * mid.thickness
    side = cmath.exp(0.5j * math.pi / pole.pole_pairs)
    iron = min(_clearance(edge, side) for edge in mid.edges) - half
    keys = ["end_angle_deg", "depth_mm", "thickness_mm", "tangential_rib_mm"]
    if barrier.shape == "straight":
        keys.insert(1, "arm_angle_deg")
    text = f"{_left(iron)} to the d axis"
    faults = _short(number, "side_close", tuple(keys), text, pole.sheet - iron)
    if barrier.shape == "straight":
        return faults
    keys = ["thickness_mm", "depth_mm", "end_angle_deg"]
    arc = mid.edges[0]
    inner = arc.radius - half
    text = "the arc's inner side is too tight to punch"
    lack = max(pole.least_radius - inner, pole.least_edge + 2.0 * inner * arc.sweep)
    faults += _short(number, "arc_tight", tuple(keys), text, lack)
    if -arc.sweep > 0.5 * math.pi:  # the ends turn back towards the q axis
        iron = 2.0 * (mid.cap_centre.imag - half)
        keys = ["end_angle_deg", "thickness_mm", "depth_mm", "tangential_rib_mm"]
        text = f"{_left(iron)} between the barrier's own ends"
        faults += _short(number, "ends_close", tuple(keys), text, pole.sheet - iron)
    return faults


def _clearance(edge: Edge, side: complex) -> float:
    """Least distance of an edge to the line through the shaft axis along `side`, on its right."""
    points = [edge.start, edge.end]
    if not edge.is_line:
        extreme = edge.centre + edge.radius * 1j * side
        if is_within(edge, extreme):
            points.append(extreme)
    return min((point.conjugate() * side).imag for point in points)


def _pair_faults(pole: Pole, outer: int, barriers: tuple[BarrierDesign, ...]) -> list[Fault]:
    """Iron between barrier `outer` (from 1) and the next one inward."""
    first, second = barriers[outer - 1], barriers[outer]
    inner = outer + 1
    deeper = MM * (second.depth_mm - first.depth_mm)
    wider = math.radians(second.end_angle_deg - first.end_angle_deg)
    text = f"barriers {outer} and {inner} are not in order from the rim inward"
    keys = [barrier_key(k, "depth_mm") for k in (inner, outer)]
    faults = [Fault("barrier_order", tuple(keys), text, SLACK - deeper)] if deeper <= 0.0 else []
    text = f"barrier {inner} ends no further from the q axis than barrier {outer}"
    keys = [barrier_key(k, "end_angle_deg") for k in (inner, outer)]
    if wider <= 0.0:
        faults.append(Fault("ends_order", tuple(keys), text, SLACK - wider))
    first_mid, second_mid = _mid_line(pole, first), _mid_line(pole, second)
    if faults or first_mid is None or second_mid is None:
        return faults
    iron = distance(first_mid.edges, second_mid.edges)
    iron -= 0.5 * (first_mid.thickness + second_mid.thickness)
    text = f"{_left(iron)} between barriers {outer} and {inner}"
    if iron <= 0.0:
        text = f"barriers {outer} and {inner} run into each other"
    names = ("depth_mm", "end_angle_deg", "thickness_mm")
    keys = [barrier_key(k, name) for k in (inner, outer) for name in names]
    if second.shape == "straight":
        keys.insert(2, barrier_key(inner, "arm_angle_deg"))
    lack = pole.sheet - iron
    return [Fault("carrier_thin", tuple(keys), text, lack)] if lack > SLACK else []


def _short(number: int, code: str, keys: tuple[str, ...], text: str, lack: float) -> list[Fault]:
    """The fault, if anything is missing."""
    return [_fault(number, code, keys, text, lack)] if lack > SLACK else []


def _left(iron: float) -> str:
    return f"only {iron / MM:.3g} mm of iron" if iron > SLACK else "no iron"
