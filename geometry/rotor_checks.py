"""Checks of all barriers of a rotor: as they lie in their pole, and with their radial ribs.

Halves and poles that are alike are looked at once. Where the halves of a pole differ, each is
checked as if both were like it, which tells all clearances within a half and to the d axes, and
between neighbouring barriers whole outlines are measured besides.
"""

from .bands import Band, band_of
from .barrier_checks import barrier_faults as shape_faults_of
from .barrier_checks import pole_of
from .barrier_checks import rotor_faults as shape_faults
from .curves import Edge
from .design import MachineDesign
from .distances import distance
from .half_checks import SLACK
from .mid_lines import MM
from .remedies import Fault, barrier_key, barrier_number
from .rib_checks import rib_faults
from .unlike_poles import ALTERNATE, halves, of_all_poles, of_both_halves


def rotor_faults(design: MachineDesign) -> list[Fault]:
    """All faults of all barriers, each once."""
    return of_all_poles(design, _pole_faults)


def barrier_faults(design: MachineDesign, key: str) -> list[Fault]:
    """All faults in which the barrier that a key belongs to has a share."""
    number = barrier_number(key)
    assert number is not None, key
    if key.startswith(ALTERNATE) or design.rotor.alternate_barrier:
        # Seldom: the time is not worth telling the poles apart.
        return rotor_faults(design)
    faults = of_both_halves(design, lambda half: shape_faults_of(half, number))
    for outer in (number - 1, number):
        faults += _cross_faults(design, outer, faults)
    return faults + _rib_faults(design, number)


def _pole_faults(design: MachineDesign) -> list[Fault]:
    faults = of_both_halves(design, shape_faults)
    numbers = range(1, len(design.rotor.barrier) + 1)
    for number in numbers:
        faults += _cross_faults(design, number, faults)
    for number in numbers:
        faults += _rib_faults(design, number)
    return faults


def _cross_faults(design: MachineDesign, outer: int, known: list[Fault]) -> list[Fault]:
    """Iron between unlike halves of barrier `outer` and the next one inward, across the q axis."""
    inner = outer + 1
    if outer < 1 or inner > len(design.rotor.barrier):
        return []
    pair = design.rotor.barrier[outer - 1 : inner]
    keys = tuple(
        barrier_key(k, name) for k in (inner, outer) for name in ("depth_mm", "end_angle_deg")
    )
    if all(barrier.other_half is None for barrier in pair):
        return []
    bands = [_band(design, number) for number in (outer, inner)]
    if bands[0] is None or bands[1] is None:
        return []
    iron = distance(_outline(bands[0]), _outline(bands[1]))
    lack = pole_of(design).sheet - iron
    if lack <= SLACK or any({*fault.keys} & {*keys} for fault in known):
        return []
    text = f"only {iron / MM:.3g} mm of iron between barriers {outer} and {inner}"
    return [Fault("carrier_thin", keys, text, lack)]


def _outline(band: Band) -> tuple[Edge, ...]:
    return (*band.to_shaft, *band.to_rim, *band.upper_end, *band.lower_end)


def _rib_faults(design: MachineDesign, number: int) -> list[Fault]:
    table = f"rotor.barrier[{number}]"
    barrier = design.rotor.barrier[number - 1]
    return rib_faults(pole_of(design), table, barrier, _band(design, number))


def _band(design: MachineDesign, number: int) -> Band | None:
    """The barrier's outline; None where there is none, which the checks of its shape tell."""
    pole, barrier = pole_of(design), design.rotor.barrier[number - 1]
    try:
        return band_of(*halves(barrier, pole.rotor_radius, pole.pole_pairs))
    except ValueError:
        return None
