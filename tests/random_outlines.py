"""Random rotors of every barrier family and end, invented: 2 to 16 poles, rotors of 36 to 600 mm.

A draw follows what a designer would try first (ends spread over half the pole pitch, bottoms about
where the flux lines of a solid disc lie, a quarter to half of the space between them cut out) and
then strays from it, so that more than half can be drawn and the others fail in many ways.
"""

import math

import numpy as np

from lamwright.geometry.design import BarrierDesign, MachineDesign
from tests.outlines import plain_design

FAMILIES = ("arc", "straight", "vee", "hyperbolic", "streamline")
ENDS = ("round", "flat", "square")
STRAY = 0.12  # share of barriers of another family than their rotor's


def drawn_rotor(rng: np.random.Generator, family: str) -> MachineDesign:
    """A machine whose rotor has barriers of a family, most of them; often, not always, drawable."""
    poles = int(rng.choice([2, 4, 4, 6, 6, 8, 10, 12, 16]))
    radius = float(np.exp(rng.uniform(math.log(18.0), math.log(300.0))))  # mm
    sheet = float(rng.choice([0.2, 0.35, 0.5])) if radius < 60.0 else float(rng.choice([0.5, 0.65]))
    shaft = radius * rng.uniform(0.15, 0.35)
    plain = plain_design()
    rotor = plain.rotor.model_copy(
        update={
            "poles": poles,
            "gap_mm": 0.5,
            "shaft_diameter_mm": _round(2.0 * shaft),
            "sheet_thickness_mm": sheet,
            "barrier": _barriers(rng, family, poles // 2, radius, sheet),
        }
    )
    stator = plain.stator.model_copy(update={"bore_diameter_mm": _round(2.0 * radius + 1.0)})
    return plain.model_copy(update={"rotor": rotor, "stator": stator})


def _barriers(
    rng: np.random.Generator, family: str, pairs: int, radius: float, sheet: float
) -> tuple[BarrierDesign, ...]:
    half_pitch = 0.5 * math.pi / pairs
    room = radius * math.sin(min(half_pitch, 1.0))  # mm
    count = int(rng.integers(1, max(2, min(5, int(room / (5.0 * sheet))))))
    outermost = 0.7 if pairs == 1 else 0.86
    shares = np.linspace(0.0, outermost, count + 1)[1:] + rng.uniform(-0.03, 0.03, count)
    ends = half_pitch * shares
    # Where the flux line of a disc through the end crosses the q axis, and a little beside it.
    vertices = radius * np.cos(pairs * ends) ** (1.0 / pairs) * rng.uniform(0.94, 1.01, count)
    rise = radius - vertices
    spaces = np.diff(np.concatenate(([0.0], rise)))
    along = radius * np.diff(np.concatenate((ends, [half_pitch])))
    barriers = []
    for k in range(count):
        space = np.min(spaces[k : k + 2])
        thickness = max(space * rng.uniform(0.3, 0.6), 1.05 * sheet)
        most = 0.75 * float(np.min(along[max(k - 1, 0) : k + 1]))
        shape = family if rng.random() > STRAY else str(rng.choice(FAMILIES))
        place = (float(ends[k]), float(max(rise[k] - 0.5 * thickness, 1.2 * sheet)))
        barriers.append(_barrier(rng, shape, pairs, radius, sheet, place, float(thickness), most))
    return tuple(barriers)


def _barrier(
    rng: np.random.Generator,
    shape: str,
    pairs: int,
    radius: float,
    sheet: float,
    place: tuple[float, float],
    thickness: float,
    most: float,
) -> BarrierDesign:
    """A barrier whose end lies at `place[0]` rad, its rim's side `place[1]` mm deep."""
    end, depth = place
    at_end = max(min(thickness * rng.uniform(0.6, 1.3), most), 1.05 * sheet)
    is_unlike = rng.random() < 0.5 or thickness > most
    end_shape, rib = str(rng.choice(ENDS)), sheet * rng.uniform(1.0, 2.5)
    is_wider = end_shape == "flat" and rng.random() < 0.4
    reach = at_end if is_unlike else thickness
    fillet = max(reach * rng.uniform(0.12, 0.35), 0.5 * sheet)
    is_bent = shape in ("straight", "vee")
    return BarrierDesign(
        shape=shape,
        end_angle_deg=_round(math.degrees(end)),
        thickness_mm=_round(thickness),
        end_thickness_mm=_round(at_end) if is_unlike else None,
        depth_mm=_round(depth),
        tangential_rib_mm=_round(rib),
        tangential_rib_inner_mm=_round(rib * rng.uniform(1.0, 1.4)) if is_wider else None,
        end_shape=end_shape,
        end_fillet_mm=_round(fillet) if end_shape != "round" and rng.random() < 0.8 else None,
        arm_angle_deg=_arms(rng, pairs, radius, place) if shape == "straight" else None,
        bend_radius_mm=_round(thickness * rng.uniform(0.3, 1.0) + 0.5 * sheet) if is_bent else None,
        **_ribs(rng, radius * math.sin(end), thickness, sheet),
    )


def _arms(
    rng: np.random.Generator, pairs: int, radius: float, place: tuple[float, float]
) -> float | None:
    """Arms that leave some share of the height to the bottom; or None, parallel to the d axes."""
    if pairs > 1 and rng.random() < 0.3:
        return None
    height, rise = radius * math.sin(place[0]), radius * (math.cos(place[0]) - 1.0) + place[1]
    angle = math.degrees(math.atan2(height * rng.uniform(0.2, 0.6), max(rise, 0.02 * radius)))
    return _round(min(angle, 88.0))


def _ribs(rng: np.random.Generator, height: float, thickness: float, sheet: float) -> dict:
    count = int(rng.choice([0, 0, 0, 1, 2]))
    if count == 0:
        return {}
    fillet = max(thickness * rng.uniform(0.1, 0.4), 0.5 * sheet)
    ribs = {"radial_ribs": count, "radial_rib_mm": _round(sheet * rng.uniform(1.0, 2.5))}
    if count == 2:
        ribs["radial_rib_offset_mm"] = _round(height * rng.uniform(0.15, 0.35))
    return {**ribs, "fillet_mm": _round(fillet)}


def _round(value: float) -> float:
    return round(float(value), 3)
