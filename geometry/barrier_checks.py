"""Checks of the barriers: whether each fits its pole, and each pair leaves iron between.

Each barrier is checked by itself on its outline (`half_checks`), and each pair of barriers on the
exact distance of their outlines. All geometry is symmetric about the q axis; the upper half answers
for both.
"""

import math

from .design import BarrierDesign, MachineDesign
from .distances import distance
from .half_checks import SLACK, Pole, half_checks, left
from .mid_lines import MM
from .remedies import Fault, barrier_key
from .rotor import rotor_frame


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


def _own_faults(pole: Pole, number: int, barrier: BarrierDesign) -> list[Fault]:
    return list(half_checks(pole, f"rotor.barrier[{number}]", barrier).faults)


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
    near, far = (
        half_checks(pole, f"rotor.barrier[{k}]", barrier).half
        for k, barrier in ((outer, first), (inner, second))
    )
    if faults or near is None or far is None:
        return faults
    iron = distance((*near.to_shaft, *near.end), (*far.to_rim, *far.end), pole.sheet)
    text = f"{left(iron)} between barriers {outer} and {inner}"
    if iron <= 0.0:
        text = f"barriers {outer} and {inner} run into each other"
    names = ("depth_mm", "end_angle_deg", "thickness_mm")
    keys = [barrier_key(k, name) for k in (inner, outer) for name in names]
    if second.shape == "straight":
        keys.insert(2, barrier_key(inner, "arm_angle_deg"))
    lack = pole.sheet - iron
    return [Fault("carrier_thin", tuple(keys), text, lack)] if lack > SLACK else []
