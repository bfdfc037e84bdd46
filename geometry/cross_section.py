"""From a design to its cross-section, or to all reasons why there is none."""

from .checks import check_design
from .design import MachineDesign
from .errors import Finding, GeometryError
from .rotor import rotor_frame, rotor_poles
from .section import CrossSection, Region
from .sectors import ripples_in_sixty_degrees, rotor_sector, smallest_sector
from .stator import stator_regions
from .winding import winding_table

MM = 1e-3  # m


def cross_section(
    design: MachineDesign, sector_poles: int | None = None, *, remedies: bool = True
) -> CrossSection:
    """A sector of the design's machine as exact regions in SI units.

    Args:
        design: the machine.
        sector_poles: of the sector, a multiple of the smallest that stands for the machine and
            a divisor of the poles; the smallest itself if not given.
        remedies: whether findings say what would fit, as of `check_design`.

    Raises:
        ValueError: for a sector that does not stand for the machine.
        GeometryError: with every finding, if the shape cannot be drawn or punched.
    """
    findings = check_design(design, remedies=remedies)
    if findings:
        raise GeometryError(findings)
    frame = rotor_frame(design)
    poles = rotor_poles(design)
    findings = _ripple_findings(design, len(poles))
    if findings:
        raise GeometryError(findings)
    least = smallest_sector(winding_table(design), len(poles))
    covered = least if sector_poles is None else sector_poles
    if covered < 1 or covered % least or design.rotor.poles % covered:
        raise ValueError(f"a sector of {covered} poles does not stand for this machine")
    rotor, ribs = rotor_sector(poles, design.pole_pairs, covered)
    return CrossSection(
        pole_pairs=design.pole_pairs,
        stack_length=MM * design.stator.stack_length_mm,
        rotor_radius=frame.rotor_radius,
        shaft_radius=frame.shaft_radius,
        stator_bore_radius=0.5 * MM * design.stator.bore_diameter_mm,
        stator_outer_radius=0.5 * MM * design.stator.outer_diameter_mm,
        slots=design.stator.slots,
        rotor=rotor,
        stator=stator_regions(design, covered),
        ribs=ribs,
        sector_poles=covered,
        rotor_period=len(poles),
        ring_radius=None if design.rotor.contour is None else frame.ring_radius,
        bridge=MM * (design.stator.bridge_mm or 0.0),
    )


def _ripple_findings(design: MachineDesign, rotor_period: int) -> tuple[Finding, ...]:
    """Waveforms over 60 electrical degrees must be whole ones."""
    slots, poles = design.stator.slots, design.rotor.poles
    if ripples_in_sixty_degrees(slots, poles, rotor_period):
        return ()
    keyway, fault = design.rotor.keyway, "the torque does not repeat every 60 electrical degrees"
    if keyway is not None and not design.rotor.alternate_barrier and design.rotor.outline is None:
        counts = [n for n in range(1, poles + 1) if _repeats_with(design, n)]
        remedy = "accepted " + " or ".join(str(count) for count in counts)
        text = f"with keyways in some poles only {fault}"
        return (Finding("unlike_poles", "rotor.keyway.count", keyway.count, text, remedy),)
    remedy = f"accepted multiples of {3 * poles}"
    return (Finding("unlike_poles", "stator.slots", slots, f"with unlike poles {fault}", remedy),)


def _repeats_with(design: MachineDesign, keyways: int) -> bool:
    slots, poles = design.stator.slots, design.rotor.poles
    return poles % keyways == 0 and ripples_in_sixty_degrees(slots, poles, poles // keyways)


def _least(design: MachineDesign, period: int) -> int:
    return smallest_sector(winding_table(design), period)


def drawn_rotor(design: MachineDesign) -> tuple[Region, ...]:
    """The rotor's regions in the smallest sector, without any check."""
    poles = rotor_poles(design)
    return rotor_sector(poles, design.pole_pairs, _least(design, len(poles)))[0]


def drawn_rotor_period(design: MachineDesign) -> tuple[Region, ...]:
    """The regions of the rotor's own period, without any check."""
    poles = rotor_poles(design)
    return rotor_sector(poles, design.pole_pairs, len(poles))[0]


def drawn_stator(design: MachineDesign) -> tuple[Region, ...]:
    """The stator's regions in the smallest sector, without any check."""
    return stator_regions(design, _least(design, len(rotor_poles(design))))
