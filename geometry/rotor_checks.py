"""Checks of all barriers of a rotor: as they lie in their pole, and with their radial ribs."""

from .bands import Band, band_of
from .barrier_checks import barrier_faults as shape_faults_of
from .barrier_checks import pole_of
from .barrier_checks import rotor_faults as shape_faults
from .design import MachineDesign
from .half_barrier import half_barrier
from .remedies import Fault
from .rib_checks import rib_faults


def rotor_faults(design: MachineDesign) -> list[Fault]:
    """All faults of all barriers, each once."""
    faults = shape_faults(design)
    for number in range(1, len(design.rotor.barrier) + 1):
        faults += _rib_faults(design, number)
    return faults


def barrier_faults(design: MachineDesign, number: int) -> list[Fault]:
    """All faults in which barrier `number` (from 1 at the rim) has a share."""
    return [*shape_faults_of(design, number), *_rib_faults(design, number)]


def _rib_faults(design: MachineDesign, number: int) -> list[Fault]:
    table = f"rotor.barrier[{number}]"
    barrier = design.rotor.barrier[number - 1]
    return rib_faults(pole_of(design), table, barrier, _band(design, number))


def _band(design: MachineDesign, number: int) -> Band | None:
    """The barrier's outline; None where there is none, which the checks of its shape tell."""
    pole, barrier = pole_of(design), design.rotor.barrier[number - 1]
    try:
        half = half_barrier(barrier, pole.rotor_radius, pole.pole_pairs)
    except ValueError:
        return None
    return band_of(half, half)
