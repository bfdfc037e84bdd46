"""Unlike halves of a pole and unlike neighbouring poles: what lowers ripple without any skew.

A design states the counter-clockwise half of each barrier and, under `other_half`, where the
clockwise one differs; and the barriers of every second pole under `alternate_barrier`. Both are
taken apart here into designs of poles that are alike, or whose halves are, so that what knows one
kind of pole serves all.
"""

from collections.abc import Callable, Sequence
from dataclasses import replace

from .design import BarrierDesign, MachineDesign
from .half_barrier import HalfBarrier, half_barrier
from .remedies import Fault

OWN, ALTERNATE = "rotor.barrier[", "rotor.alternate_barrier["


def clockwise_half(barrier: BarrierDesign) -> BarrierDesign:
    """The barrier that has both halves as this one has its clockwise half."""
    if barrier.other_half is None:
        return barrier
    unlike = {name: value for name, value in barrier.other_half if value is not None}
    return barrier.model_copy(update={**unlike, "other_half": None})


def halves(
    barrier: BarrierDesign, rotor_radius: float, pole_pairs: int
) -> tuple[HalfBarrier, HalfBarrier]:
    """The counter-clockwise and the clockwise half, both drawn as upper halves, in m.

    Raises:
        ValueError: if a half has no outline; `checks` says what would fit.
    """
    upper = half_barrier(barrier, rotor_radius, pole_pairs)
    if barrier.other_half is None:
        return upper, upper
    return upper, half_barrier(clockwise_half(barrier), rotor_radius, pole_pairs)


def alternate_pole(design: MachineDesign) -> MachineDesign | None:
    """The design with all poles as every second one is; None where all are alike."""
    others = design.rotor.alternate_barrier
    if not others:
        return None
    rotor = design.rotor.model_copy(update={"barrier": others, "alternate_barrier": ()})
    return design.model_copy(update={"rotor": rotor})


def clockwise_poles(design: MachineDesign) -> MachineDesign | None:
    """The design with all halves as the clockwise ones are; None where all are alike."""
    barriers = design.rotor.barrier
    if all(barrier.other_half is None for barrier in barriers):
        return None
    rotor = design.rotor.model_copy(update={"barrier": tuple(map(clockwise_half, barriers))})
    return design.model_copy(update={"rotor": rotor})


def of_all_poles(
    design: MachineDesign, faults: Callable[[MachineDesign], Sequence[Fault]]
) -> list[Fault]:
    """Faults of a design's own poles, then those of every second one by their own keys."""
    found = list(faults(design))
    other = alternate_pole(design)
    if other is None:
        return found
    known = {fault.identity for fault in found}
    for fault in faults(other):
        keys = tuple(key.replace(OWN, ALTERNATE) for key in fault.keys)
        if fault.identity in known and keys == fault.keys:
            continue  # not of the barriers, so the same on all poles
        found.append(replace(fault, keys=keys, text=f"{fault.text} (every second pole)"))
    return found


def of_both_halves(
    design: MachineDesign, faults: Callable[[MachineDesign], Sequence[Fault]]
) -> list[Fault]:
    """Faults of a pole's counter-clockwise half, then what only the other half has."""
    found = list(faults(design))
    other = clockwise_poles(design)
    if other is None:
        return found
    known = {fault.identity for fault in found}
    for fault in faults(other):
        if fault.identity in known:
            continue
        keys = tuple(_clockwise_key(design, key) for key in fault.keys)
        found.append(replace(fault, keys=keys, text=f"{fault.text} (clockwise half)"))
    return found


def _clockwise_key(design: MachineDesign, key: str) -> str:
    """The key that a value of the clockwise half is stated by."""
    table, dot, name = key.rpartition(".")
    if not table.startswith(OWN):
        return key
    other = design.rotor.barrier[int(table[len(OWN) : -1]) - 1].other_half
    stated = other is not None and getattr(other, name, None) is not None
    return f"{table}{dot}other_half.{name}" if stated else key
