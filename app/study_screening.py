"""What a design of a study must pass before its fields are solved, cheapest first.

| stage | what is looked at | cost |
|---|---|---|
| `values` | whether the values give a design at all | nothing |
| `design` | whether the design file and its cards can be used | 7 ms |
| `geometry` | whether the machine can be drawn, punched and wound | 3 ms |
| `ribs` | the ribs' stress at overspeed by the closed form of `start` | 1 ms |
| `quick` | a full computation only: the limits by the quick figures, with an allowance | 0.7 s |

A design that fails is rejected with the stage and the reason. The closed form and the quick figures
are estimates, so they only reject what they find far beyond a limit.
"""

import math
from collections.abc import Mapping

from lamwright.geometry.checks import shape_faults
from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design_file import Machine
from lamwright.geometry.errors import DesignError, GeometryError
from lamwright.geometry.first_ribs import RibLaw, rib_loads, rib_stresses
from lamwright.geometry.first_rotor import pole_room
from lamwright.geometry.first_wishes import RPM
from lamwright.geometry.section import CrossSection

from .study import StudyLimit

STAGES = ("values", "design", "geometry", "ribs", "quick", "full")  # with the computation
MARGIN = "yield_margin"
# The stress on one mesh was 0.39 to 2.3 times the law's, median 0.78, of 80 random rotors; so a
# rotor is refused only where the law is beyond the limit by more than this.
LAW_ALLOWANCE = 4.0
# Shares by which quick figures may miss a limit of a full computation and still be computed.
ALLOWANCES = {
    "torque_nm": 0.05,
    "torque_linkage_nm": 0.05,
    "torque_ripple_percent": 0.5,
    "saliency_ratio": 0.05,
    "power_factor": 0.03,
    "yield_margin": 0.15,
    "rib_stress_peak_mpa": 0.15,
    "lamination_stress_peak_mpa": 0.15,
}
EXACT = (
    *("rotor_iron_mass_kg", "stator_iron_mass_kg", "copper_mass_kg", "active_mass_kg"),
    *("phase_resistance_ohm", "copper_loss_w", "lamination_area_mm2", "lamination_perimeter_mm"),
)


class Rejected(DesignError):
    """A design that a stage of the screening refuses."""

    def __init__(self, stage: str, reason: str) -> None:
        """Keep the stage beside the reason, which is one line."""
        super().__init__(" ".join(reason.split()))
        self.stage = stage


def drawn(machine: Machine) -> CrossSection:
    """The machine's cross-section.

    The faults are looked at before `cross_section` does: it would search for what would fit, which
    takes some 0.1 s.

    Raises:
        Rejected: it cannot be drawn, punched or wound.
    """
    faults = shape_faults(machine.design)
    if faults:
        raise Rejected("geometry", f"{faults[0].keys[0]}: {faults[0].text}")
    try:
        return cross_section(machine.design)
    except GeometryError as error:
        raise Rejected("geometry", str(error).split("\n")[0]) from None


def screen_ribs(machine: Machine, least_margin: float) -> None:
    """Refuse ribs that are far too weak by the closed form.

    Raises:
        Rejected: the ribs would yield, even if the law were wrong by `LAW_ALLOWANCE`.
    """
    stress = law_stress(machine)
    if stress <= 0.0:
        return
    margin = 1e6 * machine.rotor_steel.yield_strength_mpa.value / stress
    if margin * LAW_ALLOWANCE < least_margin:
        raise Rejected(
            "ribs",
            f"yield margin {margin:.2g} at overspeed by the closed form of the ribs; accepted "
            f"{least_margin:g} with an allowance of {LAW_ALLOWANCE:g}",
        )


def law_stress(machine: Machine) -> float:
    """Greatest stress in Pa of any rib at overspeed by the closed form; 0 where it has none.

    It knows like poles of arcs and the like, with ribs under round ends and on the q axis.
    """
    design = machine.design
    rotor = design.rotor
    if rotor.outline is not None or rotor.alternate_barrier:
        return 0.0
    room = pole_room(design)
    speed = design.duty.overspeed_factor * design.duty.maximum_speed_rpm / RPM
    density = machine.rotor_steel.density_kg_per_m3.value
    loads = rib_loads(rotor.barrier, room.rotor_radius, room.pole_pairs, density, speed)
    greatest = 0.0
    for barrier, load in zip(rotor.barrier, loads, strict=True):
        radial = 1e-3 * barrier.radial_ribs * (barrier.radial_rib_mm or 0.0)
        widths = (1e-3 * barrier.tangential_rib_mm, radial)
        greatest = max(greatest, rib_stresses(load, *widths, RibLaw()).greatest)
    return greatest


def screen_figures(figures: Mapping[str, float], limits: tuple[StudyLimit, ...]) -> None:
    """Refuse a design that misses a limit by far with quick figures.

    Raises:
        Rejected: which limit.
    """
    for limit in limits:
        value = figures.get(limit.figure)
        share = 0.0 if limit.figure in EXACT else ALLOWANCES.get(limit.figure, math.inf)
        if value is None or math.isinf(share):
            continue
        reach = share * abs(value)
        if limit.holds(value) or limit.holds(value + reach) or limit.holds(value - reach):
            continue
        low = "" if limit.least is None else f"at least {limit.least:g}"
        high = "" if limit.most is None else f"at most {limit.most:g}"
        wanted = " and ".join(part for part in (low, high) if part)
        raise Rejected("quick", f"{limit.figure} = {value:.4g} by quick figures; accepted {wanted}")
