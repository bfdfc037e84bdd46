"""From a design to its cross-section, or to all reasons why there is none."""

from .checks import check_design
from .design import MachineDesign
from .errors import GeometryError
from .rotor import rotor_frame, rotor_regions
from .section import CrossSection
from .stator import stator_regions

MM = 1e-3  # m


def cross_section(design: MachineDesign) -> CrossSection:
    """One pole of the design's machine as exact regions in SI units.

    Raises:
        GeometryError: with every finding, if the shape cannot be drawn or punched.
    """
    findings = check_design(design)
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
