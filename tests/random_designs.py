"""Random machines of plausible size, invented: what a tool for any design must cope with.

Both families of barriers, 1 to 6 of them, 0 to 2 radial ribs, 4, 6 or 8 poles, 1 to 4 slots per
pole and phase, one or two layers, chorded or not. A draw that `check_design` refuses is thrown
away and the next one taken, so every design returned can be built.
"""

import numpy as np

from lamwright.geometry.checks import check_design
from lamwright.geometry.design import (
    BarrierDesign,
    DutyDesign,
    LimitsDesign,
    MachineDesign,
    RotorDesign,
    StatorDesign,
    SteelChoice,
    WindingDesign,
)
from lamwright.geometry.rotor_checks import rotor_faults
from lamwright.geometry.slot_checks import stator_faults
from lamwright.geometry.slot_outline import slot_copper_area

MOST_DRAWS = 500  # about half of the draws are valid: 527 of 1000


def random_design(rng: np.random.Generator) -> MachineDesign:
    """A valid design; the same one for the same state of `rng`."""
    for _ in range(MOST_DRAWS):
        design = drawn_design(rng)
        # The faults first: `check_design` takes its time to find what would fit.
        if stator_faults(design) or rotor_faults(design) or check_design(design):
            continue
        return design
    raise AssertionError(f"no valid design in {MOST_DRAWS} draws")


def drawn_design(rng: np.random.Generator) -> MachineDesign:
    """A design drawn at random that often, not always, can be built."""
    poles = int(rng.choice([4, 6, 8]))
    slots = 3 * poles * int(rng.integers(1, 5))
    stator = _stator(rng, poles, slots)
    gap = _round((0.2 + 0.002 * stator.bore_diameter_mm) * rng.uniform(0.7, 1.3))
    speed = float(rng.choice([1000.0, 1500.0, 3000.0]))
    design = MachineDesign(
        name="random",
        note="invented at random",
        stator=stator,
        winding=_winding(rng, poles, slots // poles),
        rotor=_rotor(rng, poles, 0.5 * stator.bore_diameter_mm - gap, gap),
        steel=SteelChoice(rotor_card="steel/demo_050.toml", stator_card="steel/demo_050.toml"),
        duty=DutyDesign(
            rated_current_a=1.0,
            rated_speed_rpm=speed,
            maximum_speed_rpm=speed * rng.uniform(1.0, 4.0),
            supply_voltage_v=400.0,
        ),
        limits=LimitsDesign(
            least_torque_nm=1.0,
            most_ripple_percent=30.0,
            least_saliency_ratio=2.0,
            least_yield_margin=1.2,
        ),
    )
    return design if stator_faults(design) else _wound(rng, design)


def _wound(rng: np.random.Generator, design: MachineDesign) -> MachineDesign:
    """The design with turns that fill its slots, and a current that its copper can bear."""
    turns = int(rng.integers(4, 60))
    fill, density = rng.uniform(0.3, 0.45), rng.uniform(3.0, 8.0)  # of bare copper; A/mm2, rms
    conductor = 1e6 * slot_copper_area(design) * fill / turns  # mm2
    winding = design.winding.model_copy(
        update={"turns_per_coil": turns, "conductor_area_mm2": float(conductor)}
    )
    current = 1.4142 * density * conductor * winding.parallel_paths
    duty = design.duty.model_copy(update={"rated_current_a": float(current)})
    return design.model_copy(update={"winding": winding, "duty": duty})


def _round(value: float) -> float:
    return round(float(value), 3)


def _stator(rng: np.random.Generator, poles: int, slots: int) -> StatorDesign:
    outer = rng.uniform(90.0, 280.0)
    bore = outer * rng.uniform(0.52, 0.6) * (1.0 + 0.02 * (poles - 4))
    pitch = np.pi * bore / slots
    depth = 0.5 * (outer - bore) * rng.uniform(0.45, 0.68)
    return StatorDesign(
        outer_diameter_mm=_round(outer),
        bore_diameter_mm=_round(bore),
        stack_length_mm=_round(rng.uniform(40.0, 200.0)),
        slots=slots,
        tooth_width_mm=_round(pitch * rng.uniform(0.4, 0.58)),
        slot_depth_mm=_round(depth),
        slot_opening_mm=_round(max(1.2, min(3.2, pitch * rng.uniform(0.15, 0.35)))),
        opening_depth_mm=_round(rng.uniform(0.5, 1.2)),
        wedge_angle_deg=_round(rng.uniform(10.0, 40.0)),
        wedge_depth_mm=_round(rng.choice([0.0, rng.uniform(0.3, 1.2)])),
        slot_corner_radius_mm=_round(rng.choice([0.0, rng.uniform(0.3, 1.5)])),
    )


def _winding(rng: np.random.Generator, poles: int, slots_per_pole: int) -> WindingDesign:
    layers = int(rng.integers(1, 3))
    groups = poles * layers // 2  # coil groups of a phase, shared out to the parallel paths
    chording = int(rng.integers(0, slots_per_pole // 3 + 1)) if layers == 2 else 0
    return WindingDesign(
        layers=layers,
        coil_span_slots=slots_per_pole - chording,
        turns_per_coil=1,
        parallel_paths=int(rng.choice([1, 2])) if groups % 2 == 0 else 1,
        conductor_area_mm2=1.0,
        end_turn_length_mm=_round(rng.uniform(60.0, 250.0)),
    )


def _rotor(rng: np.random.Generator, poles: int, radius: float, gap: float) -> RotorDesign:
    sheet = float(rng.choice([0.35, 0.5]))
    shaft = radius * rng.uniform(0.25, 0.45)
    return RotorDesign(
        poles=poles,
        gap_mm=gap,
        shaft_diameter_mm=_round(2.0 * shaft),
        shaft_relative_permeability=float(rng.choice([1.0, 500.0])),
        sheet_thickness_mm=sheet,
        barrier=_barriers(rng, poles, radius, shaft, sheet),
    )


def _barriers(
    rng: np.random.Generator, poles: int, radius: float, shaft: float, sheet: float
) -> tuple[BarrierDesign, ...]:
    count = int(rng.integers(1, 7))
    # Poles are wide or deep, whichever is less; barriers share in that.
    room = min(radius - shaft, radius * np.sin(np.pi / poles) * rng.uniform(0.9, 1.3))
    air = room * rng.uniform(0.25, 0.5)
    thicknesses = np.maximum(rng.dirichlet(np.full(count, 20.0)) * air, 1.2 * sheet)
    carriers = rng.dirichlet(np.full(count + 1, 20.0)) * max(room - thicknesses.sum(), 0.0)
    spacing = 180.0 / poles / (count + rng.uniform(0.4, 0.8))
    shape = str(rng.choice(["arc", "straight"]))
    depth, barriers = 0.0, []
    for k in range(count):
        end = spacing * (k + 1 - rng.uniform(0.3, 0.6))
        height = radius * np.sin(np.radians(end))
        thickness = max(min(float(thicknesses[k]), height * rng.uniform(0.2, 0.4)), 1.1 * sheet)
        # The bottom must lie further in than the round ends.
        rise = radius * (1.0 - np.cos(np.radians(end))) + thickness * rng.uniform(0.3, 1.5)
        depth = max(depth + float(carriers[k]), float(rise))
        arms = 90.0 * 2.0 / poles if shape == "straight" else None
        barriers.append(_barrier(rng, arms, radius, float(end), thickness, depth, sheet))
        depth += thickness
    return tuple(barriers)


def _barrier(
    rng: np.random.Generator,
    parallel: float | None,
    radius: float,
    end: float,
    thickness: float,
    depth: float,
    sheet: float,
) -> BarrierDesign:
    """A barrier; straight if `parallel` is given, the angle of arms parallel to the d axes."""
    thickness, rib = _round(thickness), _round(sheet * rng.uniform(1.0, 2.5))
    height = radius * np.sin(np.radians(end))  # of the round end above the q axis
    ribs, width = int(rng.choice([0, 0, 1, 2])), sheet * rng.uniform(1.0, 3.0)
    bend, arms = None, None
    if parallel is not None:
        bend = _round(max(0.5 * sheet, min(thickness, 0.4 * height) * rng.uniform(0.2, 1.0)))
        cap = (radius - rib - 0.5 * thickness) * np.cos(np.radians(end))
        rise = max(cap - (radius - depth - 0.5 * thickness), 1e-3)
        # Arms that leave some share of the height to the bottom.
        arms = np.degrees(np.arctan(height * rng.uniform(0.1, 0.5) / rise))
        arms = _round(min(arms, parallel * rng.uniform(0.7, 1.1)))
    return BarrierDesign(
        shape="arc" if parallel is None else "straight",
        end_angle_deg=_round(end),
        thickness_mm=thickness,
        depth_mm=_round(depth),
        tangential_rib_mm=rib,
        radial_ribs=ribs,
        radial_rib_mm=_round(width) if ribs else None,
        radial_rib_offset_mm=_round(height * rng.uniform(0.15, 0.4)) if ribs == 2 else None,
        fillet_mm=float(rng.choice([0.5 * thickness, max(0.5 * sheet, _round(0.3 * thickness))])),
        arm_angle_deg=None if rng.random() < 0.3 else arms,
        bend_radius_mm=None if rng.random() < 0.3 else bend,
    )
