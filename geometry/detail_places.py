"""Where notches, holes and keyways stand in the poles of a rotor.

Notches and holes stand alike in all poles. Keyways are evenly spaced round the bore: where there
are fewer than poles the first stands in the first pole, or on the d axis behind it, and the rotor
repeats after as many poles as lie between two keyways. Source: derived.
"""

import math

from .design import MachineDesign

ON_AXIS_TOL = 1e-9  # rad, of an angle that is meant to be that of an axis

Places = tuple[tuple[str, float], ...]  # end of a region's name; angle in the pole's sector, rad


def places(angle: float, half_pitch: float) -> Places:
    """Ends of name and angles in the sector of a detail at `angle` rad from the q axis.

    Names: none on the q axis, else `_right` and `_left`, as seen with the q axis upright.
    """
    if abs(angle) < ON_AXIS_TOL:
        return (("", half_pitch),)
    if abs(angle - half_pitch) < ON_AXIS_TOL:
        return (("_right", 0.0), ("_left", 2.0 * half_pitch))
    return (("_right", half_pitch - angle), ("_left", half_pitch + angle))


def key_period(design: MachineDesign) -> int:
    """Poles after which the keyways repeat; their number divides that of the poles."""
    keyway = design.rotor.keyway
    return 1 if keyway is None else max(1, design.rotor.poles // keyway.count)


def rotor_period(design: MachineDesign) -> int:
    """Poles after which the whole rotor repeats, unlike neighbours and keyways alike."""
    return math.lcm(2 if design.rotor.alternate_barrier else 1, key_period(design))


def key_places(design: MachineDesign, pole: int) -> Places:
    """The keyways, or the halves of them beside a side, in pole number `pole`, from 0."""
    keyway = design.rotor.keyway
    if keyway is None:
        return ()
    half_pitch = 0.5 * math.pi / design.pole_pairs
    angle, period = math.radians(keyway.angle_deg), key_period(design)
    found = places(angle, half_pitch)
    if abs(angle - half_pitch) >= ON_AXIS_TOL:
        # Not mirrored: of a pair beside the q axis only the one ahead of it.
        return (("", found[-1][1]),) if pole % period == 0 else ()
    right, left = found
    behind = (right,) if (pole - 1) % period == 0 else ()
    return (*behind, left) if pole % period == 0 else behind


def poles_apart(design: MachineDesign, *, is_alternate: bool = False) -> tuple[int, ...]:
    """Poles of the rotor's period, from 0, that between them hold every keyway as it stands.

    Args:
        design: the machine.
        is_alternate: whether of the poles with alternate barriers, else of the others.
    """
    step = 2 if design.rotor.alternate_barrier else 1
    first = 1 if is_alternate else 0
    held: dict[Places, int] = {}
    for pole in range(first, rotor_period(design), step):
        held.setdefault(key_places(design, pole), pole)
    # A pole without keyways is one of the others with less cut out of it.
    return tuple(pole for key, pole in held.items() if key) or (first,)
