"""Checks of a design: every reason why it cannot be drawn, punched or wound, all at once.

Each finding names a key that mends it and the range of that key that fits while all other values
stay. Checks of shapes are in `slot_checks` and `barrier_checks`, the search for ranges in
`remedies`; what is left here are limits known in closed form.
"""

from .barrier_checks import barrier_faults, rotor_faults
from .design import MachineDesign
from .errors import Finding
from .remedies import Fault, barrier_number, findings
from .slot_checks import fill_finding, stator_faults
from .winding import winding_findings

# Outside these the numbers are slips of the pen: beyond any machine built, and beyond what double
# precision could draw to a nanometre. Common practice, no source.
LEAST_OUTER_MM, MOST_OUTER_MM = 5.0, 20_000.0
LEAST_SHEET_MM, MOST_SHEET_MM = 0.02, 5.0
LEAST_GAP_MM = 0.02


def check_design(design: MachineDesign) -> tuple[Finding, ...]:
    """All findings on the design, stator first; empty where `cross_section` will succeed."""
    found = [*_scale_findings(design), *_pole_findings(design)]
    if not any(one.code == "scale" for one in found):
        found += _shape_findings(design)
    if design.rotor.poles % 2 == 0:
        found += winding_findings(design)
    return (*found, *_duty_findings(design))


def _scale_findings(design: MachineDesign) -> list[Finding]:
    stator, rotor = design.stator, design.rotor
    limits = (
        ("stator.outer_diameter_mm", stator.outer_diameter_mm, LEAST_OUTER_MM, MOST_OUTER_MM),
        ("rotor.sheet_thickness_mm", rotor.sheet_thickness_mm, LEAST_SHEET_MM, MOST_SHEET_MM),
        ("rotor.gap_mm", rotor.gap_mm, LEAST_GAP_MM, MOST_OUTER_MM),
        ("stator.bore_diameter_mm", stator.bore_diameter_mm, 0.0, MOST_OUTER_MM),
    )
    text = "beyond any electrical machine"
    return [
        Finding("scale", key, value, text, f"accepted {least:g} to {most:g}")
        for key, value, least, most in limits
        if not least <= value <= most
    ]


def _pole_findings(design: MachineDesign) -> list[Finding]:
    poles = design.rotor.poles
    if poles % 2 == 0:
        return []
    text = "poles come in pairs"
    return [
        Finding("poles_odd", "rotor.poles", poles, text, f"accepted {poles - 1} or {poles + 1}")
    ]


def _shape_findings(design: MachineDesign) -> list[Finding]:
    in_stator, in_disc = stator_faults(design), _disc_findings(design)
    found = findings(design, in_stator, _shared_faults)
    if not in_stator:
        found += fill_finding(design)
    found += in_disc
    if in_disc or design.rotor.poles % 2:
        return found  # without radii or a pole pitch nothing can be said of the barriers
    return found + findings(design, rotor_faults(design), _shared_faults)


def _shared_faults(design: MachineDesign, key: str) -> list[Fault]:
    number = barrier_number(key)
    return stator_faults(design) if number is None else barrier_faults(design, number)


def _disc_findings(design: MachineDesign) -> list[Finding]:
    """Whether rotor disc and shaft leave a ring of iron between them."""
    rotor = design.rotor
    bore, sheet = design.stator.bore_diameter_mm, rotor.sheet_thickness_mm
    largest = bore - 2.0 * (rotor.gap_mm + sheet)  # shaft diameter
    if rotor.shaft_diameter_mm <= largest:
        return []
    text = "the shaft leaves no rotor between it and the gap"
    if largest > 0.0:
        key, remedy = "rotor.shaft_diameter_mm", f"accepted up to {largest:.9g}"
        return [Finding("shaft_thick", key, rotor.shaft_diameter_mm, text, remedy)]
    widest = 0.5 * (bore - rotor.shaft_diameter_mm) - sheet
    remedy = "no value mends it, take a larger bore"
    if widest >= LEAST_GAP_MM:
        remedy = f"accepted {LEAST_GAP_MM:g} to {widest:.9g}"
    return [Finding("gap_wide", "rotor.gap_mm", rotor.gap_mm, text, remedy)]


def _duty_findings(design: MachineDesign) -> list[Finding]:
    duty = design.duty
    if duty.maximum_speed_rpm >= duty.rated_speed_rpm:
        return []
    key = "duty.maximum_speed_rpm"
    text = "below the rated speed"
    remedy = f"accepted {duty.rated_speed_rpm:g} or more"
    return [Finding("speed_order", key, duty.maximum_speed_rpm, text, remedy)]
