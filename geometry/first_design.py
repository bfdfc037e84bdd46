"""A first design for a stator: a complete design file by published rules and stated assumptions.

Rules and formulas stand in `first_spread` (barrier ends against slots), `first_barriers` (carriers
and thicknesses), `first_ribs` (overspeed), `first_stator` and `first_winding`. Here they are put
together, checked, and written down with the reason for every number.
"""

import math
from dataclasses import dataclass

from .checks import check_design
from .design import MachineDesign
from .drawn_slot import layered
from .errors import DesignError
from .first_notes import barrier_tables
from .first_rotor import (
    ANGLE,
    FirstRotor,
    RotorNeeds,
    first_rotor,
)
from .first_text import Data, DesignTable, Line, design_data
from .first_winding import (
    CURRENT_DENSITY,
    GAP_DENSITY,
    Q_SHARE,
    WindingNeeds,
    coil_plan,
    rated_current,
    winding_table_of,
)
from .first_wishes import RPM, Wishes
from .slot_outline import slot_copper_area
from .star_of_slots import is_balanced, nearest_poles, nearest_slots
from .winding import winding_factor, winding_table

OVERSPEED = 1.2
SATURATION = 1.5  # of the gap by slots and steel, assumed
TORQUE_SHARE = 0.5  # of the estimated torque that the limit asks for


@dataclass(frozen=True, slots=True)
class FirstDesign:
    """The design, and its file's tables in order."""

    design: MachineDesign
    tables: tuple[DesignTable, ...]
    rotor: FirstRotor


def first_design(wishes: Wishes) -> FirstDesign:
    """The design and its tables.

    Raises:
        DesignError: the stator cannot be wound for the poles, or no rotor is found; one line.
    """
    _raise_if_unbalanced(wishes)
    draft = _draft(wishes)
    winding = wishes.winding_table or _winding(wishes, draft)
    tables = [_head(wishes), wishes.stator_table, winding, _rotor_table(wishes)]
    placeholder = DesignTable("rotor.barrier", _barrier_lines(_DRAFT_BARRIER))
    rest = [_steel_table(wishes), _duty_table(wishes, winding)]
    design = _machine(wishes, [*tables, placeholder, *rest, _LIMITS])
    needs = rotor_needs(wishes)
    try:
        rotor = first_rotor(design, needs)
    except DesignError as error:
        raise DesignError(_none_found(wishes, str(error))) from None
    barriers = barrier_tables(design, wishes, needs, rotor)
    whole = (*tables, *barriers, *rest, _limits_table(wishes, design))
    design = _machine(wishes, whole)
    findings = check_design(design)
    if findings:
        raise DesignError("\n".join(finding.text for finding in findings))
    return FirstDesign(design, whole, rotor)


def rotor_needs(wishes: Wishes) -> RotorNeeds:
    """What the barriers and ribs follow from."""
    return RotorNeeds(
        speed=OVERSPEED * wishes.maximum_speed,
        density=wishes.steel.density_kg_per_m3.value,
        most_stress=1e6 * wishes.steel.yield_strength_mpa.value / wishes.rib_margin,
        least_rib=wishes.rib_factor * wishes.sheet,
        barriers=wishes.barriers,
    )


def _raise_if_unbalanced(wishes: Wishes) -> None:
    slots, poles = wishes.stator.slots, wishes.poles
    if poles < 2 or poles > 24 or poles % 2:
        raise DesignError(f"poles = {poles}: poles come in pairs; accepted 2 to 24, even")
    if is_balanced(slots, poles):
        return
    near = " or ".join(str(n) for n in nearest_poles(slots, poles, 2))
    others = " or ".join(str(n) for n in nearest_slots(slots, poles, 2))
    raise DesignError(
        f"poles = {poles}: {slots} slots give no three like phases; accepted {near} poles, or "
        f"{others} slots"
    )


def _none_found(wishes: Wishes, why: str) -> str:
    wished = "" if wishes.barriers is None else f" with {wishes.barriers} barriers"
    remedy = "fewer barriers, a lower maximum speed, a smaller shaft or stronger steel"
    speed = round(RPM * wishes.maximum_speed, 1)
    return f"no rotor found for {wishes.poles} poles at {speed:g} rpm{wished}: {why}; try {remedy}"


_DRAFT_BARRIER: Data = {
    "shape": "arc",
    "end_angle_deg": 1.0,
    "thickness_mm": 1.0,
    "depth_mm": 1.0,
    "tangential_rib_mm": 1.0,
}
_DRAFT_WINDING = (
    Line("layers", 2),
    Line("coil_span_slots", 1),
    Line("turns_per_coil", 1),
    Line("conductor_area_mm2", 1e-3),
    Line("end_turn_length_mm", 1.0),
)
_LIMITS = DesignTable(
    "limits",
    (
        Line("least_torque_nm", 0.0),
        Line("most_ripple_percent", 100.0),
        Line("least_saliency_ratio", 1.0),
        Line("least_yield_margin", 1.0),
    ),
)


def _draft(wishes: Wishes) -> MachineDesign:
    """A machine of which only stator, layers and span count."""
    plan = coil_plan(wishes.stator.slots, wishes.poles)
    changed = {"layers": plan.layers, "coil_span_slots": plan.span}
    lines = tuple(Line(one.key, changed.get(one.key, one.value)) for one in _DRAFT_WINDING)
    winding = DesignTable("winding", lines)
    duty = DesignTable("duty", _duty_lines(wishes, 1.0))
    barrier = DesignTable("rotor.barrier", _barrier_lines(_DRAFT_BARRIER))
    rotor, steel = _rotor_table(wishes), _steel_table(wishes)
    return _machine(wishes, [_head(wishes), winding, rotor, barrier, steel, duty, _LIMITS])


def _machine(
    wishes: Wishes, tables: "list[DesignTable] | tuple[DesignTable, ...]"
) -> MachineDesign:
    """The tables as a validated design; the stator as it was read, with its drawing."""
    return MachineDesign.model_validate({**design_data(tables), "stator": wishes.stator})


def copper_area(design: MachineDesign) -> float:
    """Area of one copper region in m^2, of a drawn slot as well."""
    outline = design.stator.outline
    if outline is None:
        return slot_copper_area(design)
    slot = layered(outline.drawing.slot, design.winding.layers)
    return min(part.area for part in slot.copper)


def _winding(wishes: Wishes, draft: MachineDesign) -> DesignTable:
    stator = wishes.stator
    plan = coil_plan(stator.slots, wishes.poles)
    needs = WindingNeeds(
        slots=stator.slots,
        poles=wishes.poles,
        bore=1e-3 * stator.bore_diameter_mm,
        stack_length=1e-3 * stator.stack_length_mm,
        slot_depth=1e-3 * stator.slot_depth_mm,
        copper_area=copper_area(draft),
        supply_voltage=wishes.supply_voltage,
        rated_speed=wishes.rated_speed,
    )
    return winding_table_of(needs, plan)


def _head(wishes: Wishes) -> DesignTable:
    note = "first design by rules, not optimised; every number has its reason beside it"
    return DesignTable("", (Line("name", wishes.name), Line("note", note)))


def _mm(length: float, digits: int = 2) -> float:
    return round(1e3 * length, digits)


def _rotor_table(wishes: Wishes) -> DesignTable:
    bore = wishes.stator.bore_diameter_mm
    return DesignTable(
        "rotor",
        (
            Line("poles", wishes.poles, "As asked for."),
            Line(
                "gap_mm",
                _mm(wishes.gap, 3),
                "Unless asked for: 0.2 mm + 0.0027 x bore, at least 0.25 mm; common practice, no "
                "source.",
            ),
            Line(
                "shaft_diameter_mm",
                _mm(wishes.shaft_diameter, 3),
                f"Unless asked for: {0.22 if wishes.poles == 2 else 0.32:g} x bore {bore:g} mm; "
                "common practice, no source. Check it for torque and critical speed.",
            ),
            Line("sheet_thickness_mm", _mm(wishes.sheet, 3)),
        ),
    )


def _steel_table(wishes: Wishes) -> DesignTable:
    return DesignTable(
        "steel",
        (Line("rotor_card", wishes.steel_file), Line("stator_card", wishes.steel_file)),
        about="Steel: replace by the supplier's certificate before anything is built.",
    )


def _duty_lines(wishes: Wishes, current: float) -> tuple[Line, ...]:
    return (
        Line(
            "rated_current_a",
            float(f"{current:.4g}"),
            f"Peak: sqrt(2) x {CURRENT_DENSITY:g} A/mm2 rms x conductor area x parallel paths; the "
            "density is usual for closed machines with a fan (common practice, no source).",
        ),
        Line("rated_speed_rpm", round(RPM * wishes.rated_speed, 3)),
        Line("maximum_speed_rpm", round(RPM * wishes.maximum_speed, 3), "As asked for."),
        Line(
            "overspeed_factor",
            OVERSPEED,
            "Usual overspeed test of rotating machines (IEC 60034-1, from memory).",
        ),
        Line("supply_voltage_v", wishes.supply_voltage),
    )


def _duty_table(wishes: Wishes, winding: DesignTable) -> DesignTable:
    area, paths = winding.value("conductor_area_mm2"), winding.value("parallel_paths")
    assert isinstance(area, float | int)
    current = rated_current(float(area), paths if isinstance(paths, int) else 1)
    return DesignTable("duty", _duty_lines(wishes, current))


def estimated_torque(design: MachineDesign) -> float:
    """Torque in N m at rated current: an estimate for a limit to start from.

    B = mu0 3/2 4/pi k_w N i_d / (2 p g k), at most the density the turns are laid out for;
    psi_d = k_w N B D L / p; T = 3/2 p psi_d (i_q - (psi_q/psi_d) i_d). Derived, with an assumed
    angle, saturation and psi_q / psi_d.
    """
    table, stator, p = winding_table(design), design.stator, design.pole_pairs
    effective = winding_factor(table, 1) * table.turns_per_phase
    current = design.duty.rated_current_a
    i_d, i_q = current * math.cos(ANGLE), current * math.sin(ANGLE)
    mmf = 6.0 / math.pi * effective * i_d / (2.0 * p)
    density = min(GAP_DENSITY, 4e-7 * math.pi * mmf / (1e-3 * design.rotor.gap_mm * SATURATION))
    psi_d = effective * density * 1e-6 * stator.bore_diameter_mm * stator.stack_length_mm / p
    return 1.5 * p * psi_d * (i_q - Q_SHARE * i_d)


def _limits_table(wishes: Wishes, design: MachineDesign) -> DesignTable:
    torque = estimated_torque(design)
    return DesignTable(
        "limits",
        (
            Line(
                "least_torque_nm",
                float(f"{TORQUE_SHARE * torque:.3g}"),
                f"{TORQUE_SHARE:g} x {torque:.3g} N m, a rough estimate from the turns' flux and "
                "the current (3/2 p psi_d (i_q - 0.35 i_d) at 55 degrees): put in what the drive "
                "needs.",
            ),
            Line(
                "most_ripple_percent",
                40.0,
                "Ripple and saliency: what any first design should keep (no source): tighten.",
            ),
            Line("least_saliency_ratio", 2.0),
            Line(
                "least_yield_margin",
                1.0,
                "At overspeed; the ribs are laid out for more, see there.",
            ),
        ),
    )


def _barrier_lines(values: Data) -> tuple[Line, ...]:
    lines = []
    for key, value in values.items():
        assert isinstance(value, str | int | float)
        lines.append(Line(key, value))
    return tuple(lines)
