"""Checks of a design: every reason why it cannot be drawn, punched or wound, all at once.

Each finding names a key that mends it and the range of that key that fits while all other values
stay. Checks of shapes are in `slot_checks` and `barrier_checks`, the search for ranges in
`remedies`.
"""

from .contour_checks import contour_faults, rim_faults
from .design import MachineDesign
from .detail_checks import detail_faults
from .errors import Finding
from .half_checks import SLACK
from .hot_steel import fit_findings
from .loss_checks import strand_findings
from .magnet_checks import magnet_faults, magnet_findings
from .mid_lines import MM
from .remedies import SCALES, Fault, barrier_number, findings, value_of
from .rotor import following
from .rotor_checks import barrier_faults, rotor_faults
from .skew import skew_findings
from .slot_checks import stator_faults
from .tolerance_checks import tolerance_findings
from .unlike_poles import of_all_poles
from .winding import winding_findings


def check_design(design: MachineDesign, *, remedies: bool = True) -> tuple[Finding, ...]:
    """All findings on the design, stator first; empty where `cross_section` will succeed.

    Args:
        design: the machine.
        remedies: look for the range that mends a fault of the shape, which takes a second or two.
    """
    found = findings(design, shape_faults(design), shared_faults if remedies else None)
    if design.rotor.poles % 2 == 0:
        found += winding_findings(design)
    found += tuple(strand_findings(design.winding))
    found += fit_findings(design)
    found += tuple(tolerance_findings(design))
    return (*found, *magnet_findings(design), *skew_findings(design), *_duty_findings(design))


def shape_faults(design: MachineDesign) -> list[Fault]:
    """All faults of the shape, as far as each can be told with the others there."""
    return [*_pole_faults(design), *(_scale_faults(design) or _parts_faults(design))]


def _parts_faults(design: MachineDesign) -> list[Fault]:
    return stator_faults(design) + _ring_faults(design)


def _ring_faults(design: MachineDesign) -> list[Fault]:
    """Faults of the rotor; without radii or a pole pitch nothing can be said of the barriers."""
    disc = _disc_faults(design)
    # A drawn rotor stands as it was recognised, ribs thinner than the sheet included.
    if disc or design.rotor.poles % 2 or design.rotor.outline is not None:
        return disc
    rim = contour_faults(design)
    return rim or _pole_faults_with(design, rotor_faults(following(design)))


def _pole_faults_with(design: MachineDesign, of_barriers: list[Fault]) -> list[Fault]:
    """The faults of the barriers with those of what lies beside and in them."""
    faults = of_barriers + of_all_poles(design, rim_faults) + detail_faults(design)
    return faults or of_all_poles(design, magnet_faults)


def shared_faults(design: MachineDesign, key: str) -> list[Fault]:
    """The faults in which a key has a share; sparing the others makes the search fast."""
    scale = _scale_faults(design)
    if scale:
        return scale
    if barrier_number(key) is not None:
        rim = contour_faults(design)
        return rim or _pole_faults_with(design, barrier_faults(following(design), key))
    if key.startswith(("rotor.notch[", "rotor.hole[", "rotor.keyway.")):
        return contour_faults(design) or detail_faults(design)
    if key in SCALES:
        return _parts_faults(design)
    return stator_faults(design) if key.startswith("stator.") else _ring_faults(design)


def _scale_faults(design: MachineDesign) -> list[Fault]:
    faults = []
    for key, (least, most) in SCALES.items():
        lack = MM * max(least - value_of(design, key), value_of(design, key) - most)
        if lack > 0.0:
            faults.append(Fault("scale", (key,), "beyond any electrical machine", lack))
    return faults


def _pole_faults(design: MachineDesign) -> list[Fault]:
    poles = design.rotor.poles
    if poles % 2 == 0:
        return []
    remedy = f"accepted {poles - 1} or {poles + 1}"
    return [Fault("poles_odd", ("rotor.poles",), "poles come in pairs", 1.0, remedy)]


def _disc_faults(design: MachineDesign) -> list[Fault]:
    """Whether rotor disc and shaft leave a ring of iron between them."""
    rotor, bore = design.rotor, design.stator.bore_diameter_mm
    disc = 0.5 * bore - rotor.gap_mm  # radius
    lack = MM * (rotor.sheet_thickness_mm - (disc - 0.5 * rotor.shaft_diameter_mm))
    if lack <= SLACK:
        return []
    keys = ("rotor.shaft_diameter_mm", "rotor.gap_mm", "stator.bore_diameter_mm")
    return [Fault("ring_thin", keys, "no rotor is left between shaft and gap", lack)]


def _duty_findings(design: MachineDesign) -> list[Finding]:
    duty, found = design.duty, []
    if duty.maximum_speed_rpm < duty.rated_speed_rpm:
        key, text = "duty.maximum_speed_rpm", "below the rated speed"
        remedy = f"accepted {duty.rated_speed_rpm:g} or more"
        found.append(Finding("speed_order", key, duty.maximum_speed_rpm, text, remedy))
    if duty.most_current_a < duty.rated_current_a:
        key, text = "duty.maximum_current_a", "below the rated current"
        remedy = f"accepted {duty.rated_current_a:g} or more"
        found.append(Finding("current_order", key, duty.most_current_a, text, remedy))
    return found
