"""Which sector of a machine repeats, and how its poles are put together.

A sector of s poles stands for the whole where every field in it turns over to its neighbour with
the sign (-1)^s: slots and rotor repeat, and the winding's table repeats with that sign. Source:
derived; a current pattern that changes sign does so to the whole field, saturation included,
as steel has no sign.
"""

import cmath
import math
from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from .curves import turned
from .section import Region, Rib, pole_name
from .winding import WindingTable

SAME = 1e-9  # of the largest number of conductors; fewer turns than this are none

Pole = tuple[tuple[Region, ...], tuple[Rib, ...]]  # in its own frame, d axis at angle 0


def smallest_sector(winding: WindingTable, rotor_period: int = 1) -> int:
    """Poles of the smallest sector that stands for the machine; all of them if none repeats.

    Args:
        winding: conductors of all slots.
        rotor_period: poles after which the rotor repeats.
    """
    for poles in range(rotor_period, winding.poles, rotor_period):
        if winding.poles % poles == 0 and repeats(winding, poles):
            return poles
    return winding.poles


def repeats(winding: WindingTable, poles: int) -> bool:
    """Whether the winding turned by `poles` poles is itself, with the sign (-1)^poles."""
    slots, rest = divmod(winding.slots * poles, winding.poles)
    if rest:
        return False
    sign = -1.0 if poles % 2 else 1.0
    onward = np.roll(winding.conductors, -slots, axis=0)
    most = float(np.abs(winding.conductors).max(initial=0.0))
    return bool(np.all(np.abs(onward - sign * winding.conductors) <= SAME * most))


def ripples_in_sixty_degrees(slots: int, poles: int, rotor_period: int) -> bool:
    """Whether torque and dq linkages repeat every 60 electrical degrees.

    Slots and winding are themselves, phases exchanged or reversed, when turned by k slots if that
    is a multiple of 60 electrical degrees; the rotor is itself when turned by its period j times.
    Both together must make 60 degrees: k 360 / slots = (60 + 180 rotor_period j) / pole pairs,
    mechanical. Always so for whole q, and for like poles. Source: derived.
    """
    return any(
        slots * (1 + 3 * rotor_period * j) % (3 * poles) == 0 for j in range(poles // rotor_period)
    )


def rotor_sector(poles: Sequence[Pole], pole_pairs: int, sector_poles: int) -> Pole:
    """Regions and ribs of a sector from the poles of the rotor's period.

    Args:
        poles: of one period, each drawn from its own d axis at angle 0 and with magnets as in the
            first pole; those of every second one come out reversed.
        pole_pairs: of the machine.
        sector_poles: a multiple of the period.
    """
    regions: list[Region] = []
    ribs: list[Rib] = []
    for k in range(sector_poles):
        own_regions, own_ribs = poles[k % len(poles)]
        if k == 0:  # to the last bit
            regions += own_regions
            ribs += own_ribs
            continue
        angle = k * math.pi / pole_pairs
        regions += [_turned_region(region, angle, k + 1) for region in own_regions]
        ribs += [_turned_rib(rib, angle, k + 1) for rib in own_ribs]
    return tuple(regions), tuple(ribs)


def _turned_region(region: Region, angle: float, pole: int) -> Region:
    way = cmath.exp(1j * angle) * (1 if pole % 2 else -1)  # magnets alternate from pole to pole
    return replace(
        region,
        name=pole_name(region.name, pole),
        outer=turned(region.outer, angle),
        holes=tuple(turned(path, angle) for path in region.holes),
        magnetisation=region.magnetisation * way,
    )


def _turned_rib(rib: Rib, angle: float, pole: int) -> Rib:
    turn = cmath.exp(1j * angle)
    return replace(rib, name=pole_name(rib.name, pole), start=rib.start * turn, end=rib.end * turn)
