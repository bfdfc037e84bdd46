"""A first design for a stator: a complete design file by published rules and stated assumptions.

Rules and formulas stand in `first_spread` (barrier ends against slots), `first_barriers` (carriers
and thicknesses), `first_ribs` (overspeed), `first_stator` and `first_winding`. Here they are put
together, checked, and written down with the reason for every number.
"""

import math
from dataclasses import dataclass
from fractions import Fraction

from .checks import check_design
from .design import MachineDesign, StatorDesign, SteelCard
from .drawn_slot import layered
from .errors import DesignError
from .first_barriers import shares
from .first_rotor import (
    ANGLE,
    Candidate,
    FirstBarrier,
    FirstRotor,
    RotorNeeds,
    first_rotor,
    pole_room,
)
from .first_spread import AVOIDED, BEST_DISTANCE
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
from .slot_outline import slot_copper_area
from .star_of_slots import is_balanced, nearest_poles, nearest_slots
from .winding import winding_factor, winding_table

RPM = 30.0 / math.pi  # 1/min per rad/s
OVERSPEED = 1.2
AIMED_MARGIN = 1.3  # yield over the stress by the rib law, which errs
SATURATION = 1.5  # of the gap by slots and steel, assumed
TORQUE_SHARE = 0.5  # of the estimated torque that the limit asks for


@dataclass(frozen=True, slots=True)
class Wishes:
    """What a first design is made from; lengths in m, speeds in rad/s."""

    name: str
    stator: StatorDesign
    stator_table: DesignTable  # as it will be written
    winding_table: DesignTable | None  # likewise; None to make one
    poles: int
    maximum_speed: float
    rated_speed: float
    supply_voltage: float  # rms between lines
    barriers: int | None
    gap: float
    shaft_diameter: float
    sheet: float
    rib_factor: float  # least rib over the sheet's thickness
    steel: SteelCard
    steel_file: str  # as written in the design file
    rib_margin: float = AIMED_MARGIN  # yield over the stress by the rib law


@dataclass(frozen=True, slots=True)
class FirstDesign:
    """The design, and its file's tables in order."""

    design: MachineDesign
    tables: tuple[DesignTable, ...]
    rotor: FirstRotor


def usual_gap(bore: float) -> float:
    """A radial air gap in m for a bore in m: common practice, no source."""
    return 5e-5 * round(max(2.5e-4, 2.0e-4 + 2.7e-3 * bore) / 5e-5)


def usual_shaft(bore: float, poles: int) -> float:
    """A shaft diameter in m for a bore in m: common practice, no source."""
    share = 0.22 if poles == 2 else 0.32
    return 5e-4 * round(share * bore / 5e-4)


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
    needs = RotorNeeds(
        speed=OVERSPEED * wishes.maximum_speed,
        density=wishes.steel.density_kg_per_m3.value,
        most_stress=1e6 * wishes.steel.yield_strength_mpa.value / wishes.rib_margin,
        least_rib=wishes.rib_factor * wishes.sheet,
        barriers=wishes.barriers,
    )
    try:
        rotor = first_rotor(design, needs)
    except DesignError as error:
        raise DesignError(_none_found(wishes, str(error))) from None
    barriers = _barrier_tables(design, wishes, needs, rotor)
    whole = (*tables, *barriers, *rest, _limits_table(wishes, design))
    design = _machine(wishes, whole)
    findings = check_design(design)
    if findings:
        raise DesignError("\n".join(finding.text for finding in findings))
    return FirstDesign(design, whole, rotor)


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


def _barrier_tables(
    design: MachineDesign, wishes: Wishes, needs: RotorNeeds, rotor: FirstRotor
) -> tuple[DesignTable, ...]:
    """The tables of the barriers with the reasons of their numbers."""
    taken = rotor.taken
    share = shares(taken.spread.ends)
    tables = []
    for k, one in enumerate(taken.barriers):
        why = {
            "end_angle_deg": f"{math.degrees(taken.spread.ends[k]):.2f} el deg / "
            f"{design.pole_pairs} pole pairs.",
            "thickness_mm": f"{share.barriers[k]:.3f} of the air, its share of the q-axis mmf "
            "drop.",
            "depth_mm": f"The carrier outside has {share.carriers[k]:.3f} of the iron, its share "
            "of the d axis's flux, and more where the arc would lie flatter to the rim than 45 "
            "degrees.",
            "end_thickness_mm": "At most half the places at the rim, so that flux gets in between.",
            "tangential_rib_mm": _rib_reason(wishes, needs, one),
            "radial_ribs": "Tangential ribs alone would be too thick: one on the q axis.",
            "fillet_mm": "A third of the thickness, or a full round.",
        }
        values = one.table.model_dump(exclude_unset=True)
        lines = tuple(Line(key, value, why.get(key, "")) for key, value in values.items())
        about = _spread_reason(design, rotor) if k == 0 else ""
        tables.append(DesignTable("rotor.barrier", lines, about))
    return tuple(tables)


def _rib_reason(wishes: Wishes, needs: RotorNeeds, one: FirstBarrier) -> str:
    return (
        f"At {RPM * needs.speed:.0f} rpm {1e-3 * one.load.force:.4g} N per mm of stack hang "
        f"outside; stress by formula {1e-6 * one.stress:.0f} MPa, allowed "
        f"{1e-6 * needs.most_stress:.0f} MPa = yield / {wishes.rib_margin:.2f}; not under "
        f"{wishes.rib_factor:g} x sheet (derived, see geometry/first_ribs.py)."
    )


def _spread_reason(design: MachineDesign, rotor: FirstRotor) -> str:
    taken, room = rotor.taken, pole_room(design)
    slots = Fraction(design.stator.slots, design.pole_pairs)
    air = sum(1e-3 * one.table.thickness_mm for one in taken.barriers)
    lines = [
        f"Barriers. Ends stand on n_r = {taken.spread.places} places equally spaced round a pole "
        f"pair, against n_s = {float(slots):g} slots. The published rule: n_r not n_s nor "
        f"n_s +-{AVOIDED[1]}, best n_s +-{BEST_DISTANCE} (Vagati, Pastorelli, Franceschini, "
        "Petrache 1998, from memory). Among all such spreads of 2 to 5 barriers this one has the "
        f"least ripple by a linear mmf model, {_percent(taken)} (derived, like Bianchi, Bolognani, Bon, "
        "Dai Pre 2009; geometry/first_ripple.py). It ranks rotors; real ripple is mostly lower.",
        *(f"Not taken: {_candidate_text(other)}." for other in rotor.others[:3]),
        f"Insulation ratio {taken.insulation:g} of the depth that barriers and carriers share, "
        f"{air / room.depth:.3f} of rim to shaft; usual 0.3 to 0.5 (common practice).",
        "Carriers: widths as the d axis's flux through them, cos e_k - cos e_(k+1); thicknesses as "
        "the q axis's mmf drop between them (derived; Vagati et al. 1992, from memory).",
    ]
    if taken.is_avoided:
        lines.insert(
            1, "The rule is against this n_r: all others have over 1.6 times its estimated ripple."
        )
    return "\n".join(lines)


def _candidate_text(one: Candidate) -> str:
    ends = ", ".join(f"{math.degrees(end):.1f}" for end in one.spread.ends)
    rule = ", against the rule" if one.is_avoided else ""
    return f"{one.spread.places} places, ends at {ends} el deg: {_percent(one)}{rule}"


def _percent(one: Candidate) -> str:
    return f"{100.0 * one.estimate.ripple:.0f} %"
