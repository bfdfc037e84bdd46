"""From a design to its cross-section, or to all reasons why there is none."""

from .checks import check_design
from .design import MachineDesign
from .errors import Finding, GeometryError
from .rotor import rotor_frame, rotor_regions
from .section import CrossSection
from .star_of_slots import is_balanced
from .stator import stator_regions

MM = 1e-3  # m


def cross_section(design: MachineDesign) -> CrossSection:
    """One pole of the design's machine as exact regions in SI units.

    Raises:
        GeometryError: with every finding, if the shape cannot be drawn or punched.
    """
    findings = (*check_design(design), *_sector_findings(design))
    if findings:
        raise GeometryError(findings)
    frame = rotor_frame(design)
    rotor, ribs = rotor_regions(design)
    return CrossSection(
        pole_pairs=design.pole_pairs,
        stack_length=MM * design.stator.stack_length_mm,
        rotor_radius=frame.rotor_radius,
        shaft_radius=frame.shaft_radius,
        stator_bore_radius=0.5 * MM * design.stator.bore_diameter_mm,
        stator_outer_radius=0.5 * MM * design.stator.outer_diameter_mm,
        slots=design.stator.slots,
        rotor=rotor,
        stator=stator_regions(design),
        ribs=ribs,
    )


def _sector_findings(design: MachineDesign) -> tuple[Finding, ...]:
    """One pole can stand for all only where it has a whole number of slots."""
    slots, poles = design.stator.slots, design.rotor.poles
    if poles % 2 or slots % poles == 0 or not is_balanced(slots, poles):
        return ()
    fault = "the field of fractional slots per pole is not computed yet"
    remedy = f"accepted multiples of {3 * poles}"
    return (Finding("sector", "stator.slots", slots, fault, remedy),)
