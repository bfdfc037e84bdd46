"""All barriers of a pole laid out anew by a few numbers, by the published rules that `start` uses.

| key | what it is | default |
|---|---|---|
| `layout.barriers` | barriers of a pole | as many as the base has |
| `layout.end_angle_deg` | q axis to the end of the innermost barrier, mechanical | the base's |
| `layout.places` | or slot pairing: places of barrier ends round a pole pair, even | |
| `layout.first_place` | first end from the q axis, in spacings of the ends: 0.5 or 1 | 1 |
| `layout.insulation_ratio` | share of air in the depth of the pole | most that fits of `start`'s |
| `layout.rib_factor` | least rib over the sheet's thickness | 1.2 |
| `layout.rib_margin` | yield strength over the ribs' stress by the closed form | 1.2 |

Ends are equally spaced, carriers and barriers share out the pole's depth (`first_barriers`), ribs
bear the overspeed by the closed form (`first_ribs`). Cost: 1 to 6 ms.
"""

import math
from collections.abc import Mapping

from lamwright.geometry.design import BarrierDesign, MachineDesign, SteelCard
from lamwright.geometry.errors import DesignError
from lamwright.geometry.first_rotor import FirstBarrier, RotorNeeds, first_that_fits, laid_out
from lamwright.geometry.first_spread import EvenEnds
from lamwright.geometry.first_wishes import AIMED_MARGIN, RPM

from .study import Value

RIB_FACTOR = 1.2
FIRST_PLACE = 1.0
MM = 1e-3  # m


def layout_fault(base: MachineDesign) -> str:
    """Why the barriers of a base cannot be laid out anew; empty where they can."""
    rotor = base.rotor
    if rotor.outline is not None:
        return "the base's rotor is a drawing; accepted a base with [[rotor.barrier]] tables"
    if rotor.alternate_barrier:
        return "the base has unlike poles; accepted a base without rotor.alternate_barrier"
    if any(one.magnet is not None or one.other_half is not None for one in rotor.barrier):
        return "the base's barriers hold magnets or unlike halves; accepted a base without them"
    return ""


def laid_out_barriers(
    design: MachineDesign, card: SteelCard, layout: Mapping[str, Value]
) -> tuple[BarrierDesign, ...]:
    """The barriers of a pole for values of the keys of `layout`.

    Args:
        design: the machine with all other values of the point.
        card: of the rotor's steel.
        layout: values by key; others take their defaults.

    Raises:
        DesignError: no such barriers can be built; one line.
    """
    asked = {key: float(value) for key, value in layout.items()}
    count = round(asked.get("layout.barriers", len(design.rotor.barrier)))
    ends = _ends(design, count, asked)
    factor = asked.get("layout.rib_factor", RIB_FACTOR)
    margin = asked.get("layout.rib_margin", AIMED_MARGIN)
    duty = design.duty
    needs = RotorNeeds(
        speed=duty.overspeed_factor * duty.maximum_speed_rpm / RPM,
        density=card.density_kg_per_m3.value,
        most_stress=1e6 * card.yield_strength_mpa.value / margin,
        least_rib=factor * MM * design.rotor.sheet_thickness_mm,
        barriers=count,
    )
    share = asked.get("layout.insulation_ratio")
    found: tuple[FirstBarrier, ...] | str
    if share is not None:
        found = laid_out(design, needs, ends, share)
    else:
        fitting = first_that_fits(design, needs, ends)
        found = fitting if isinstance(fitting, str) else fitting[1]
    if isinstance(found, str):
        raise DesignError(f"no such barriers: {found}")
    return tuple(one.table for one in found)


def _ends(design: MachineDesign, count: int, asked: Mapping[str, float]) -> EvenEnds:
    """Where the barriers end."""
    first = asked.get("layout.first_place", FIRST_PLACE)
    if "layout.places" in asked:
        if asked["layout.places"] % 2:
            told = f"layout.places = {asked['layout.places']:g}"
            raise DesignError(f"{told}: both halves of a pole are alike; accepted even numbers")
        last = (first + count - 1) * 2.0 * math.pi / asked["layout.places"]
    else:
        innermost = design.rotor.barrier[-1].end_angle_deg
        stated = asked.get("layout.end_angle_deg", innermost)
        last = design.pole_pairs * math.radians(stated)
    if last >= 0.5 * math.pi:
        end, most = math.degrees(last) / design.pole_pairs, 90.0 / design.pole_pairs
        raise DesignError(
            f"no such barriers: the innermost would end at {end:g} degrees; accepted below {most:g}"
        )
    return EvenEnds(count, last, first)
