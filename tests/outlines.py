"""Outlines as polygons, a plain machine, and the reference rotor B1, for tests."""

import cmath
import math
from pathlib import Path as FilePath

import numpy as np
import shapely

from lamwright.geometry.curves import Path
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

DESIGNS = FilePath(__file__).parents[1] / "designs"
SAG = 1e-7  # m, how far a polygon's chords may lie from their arcs


def plain_design() -> MachineDesign:
    """An invented machine: 24 slots, 4 poles, three arc barriers without radial ribs.

    Fixed here, so that tests of single numbers do not follow the shipped designs.
    """
    return MachineDesign(
        name="plain",
        note="invented for the tests",
        stator=StatorDesign(
            outer_diameter_mm=140.0,
            bore_diameter_mm=82.0,
            stack_length_mm=100.0,
            slots=24,
            tooth_width_mm=5.4,
            slot_depth_mm=15.5,
            slot_opening_mm=2.4,
            opening_depth_mm=0.8,
            wedge_angle_deg=30.0,
            wedge_depth_mm=1.0,
            slot_corner_radius_mm=1.5,
        ),
        winding=WindingDesign(
            layers=1,
            coil_span_slots=6,
            turns_per_coil=34,
            conductor_area_mm2=1.4,
            end_turn_length_mm=110.0,
        ),
        rotor=RotorDesign(
            poles=4,
            gap_mm=0.4,
            shaft_diameter_mm=26.0,
            sheet_thickness_mm=0.5,
            barrier=(
                _arc(14.5, thickness=2.6, depth=3.6),
                _arc(25.0, thickness=3.4, depth=10.2),
                _arc(36.0, thickness=3.6, depth=18.0),
            ),
        ),
        steel=SteelChoice(rotor_card="steel/demo_050.toml", stator_card="steel/demo_050.toml"),
        duty=DutyDesign(
            rated_current_a=12.0,
            rated_speed_rpm=1500.0,
            maximum_speed_rpm=6000.0,
            supply_voltage_v=400.0,
        ),
        limits=LimitsDesign(
            least_torque_nm=9.0,
            most_ripple_percent=25.0,
            least_saliency_ratio=3.0,
            least_yield_margin=1.2,
        ),
    )


def _arc(end: float, *, thickness: float, depth: float) -> BarrierDesign:
    return BarrierDesign(
        shape="arc",
        end_angle_deg=end,
        thickness_mm=thickness,
        depth_mm=depth,
        tangential_rib_mm=0.6,
    )


def polygon(path: Path, sag: float = SAG) -> shapely.Polygon:
    """The path as a polygon with its corners on the curve, chords within `sag` of it (m)."""
    runs = []
    for edge in path.edges:
        if edge.is_line:
            runs.append(np.array([edge.start]))
            continue
        # The sagitta of a chord over the angle phi is r (1 - cos(phi / 2)) < r phi^2 / 8.
        step = math.sqrt(8.0 * sag / edge.radius)
        count = max(1, math.ceil(abs(edge.sweep) / step))
        turn = np.exp(1j * edge.sweep / count * np.arange(count))
        runs.append(edge.centre + (edge.start - edge.centre) * turn)
    points = np.concatenate(runs)
    return shapely.Polygon(np.column_stack([points.real, points.imag]))


def turns(path: Path) -> list[float]:
    """The angle in rad by which the path turns at the end of each edge, 0 where it is smooth."""
    edges = path.edges
    return [
        cmath.phase(after.direction(0.0) / before.direction(1.0))
        for before, after in zip(edges, (*edges[1:], edges[0]), strict=True)
    ]


def b1_barrier() -> BarrierDesign:
    """Barrier of the reference rotor B1 (check values C10), from its definition there.

    R = 39.5 mm; band between circles of 25 and 30 mm about the point R sqrt 2 on the q axis; cap
    centres on the circle of 27.5 mm, 39.5 - 0.6 - 2.5 mm from the shaft axis.
    """
    centre, reach = 39.5 * math.sqrt(2.0), 39.5 - 0.6 - 2.5
    cosine = (reach**2 + centre**2 - 27.5**2) / (2.0 * reach * centre)
    return BarrierDesign(
        shape="arc",
        end_angle_deg=math.degrees(math.acos(cosine)),
        thickness_mm=5.0,
        depth_mm=39.5 - (centre - 25.0),
        tangential_rib_mm=0.6,
    )


def b1_design() -> MachineDesign:
    """The plain stator at a bore of 80 mm round the reference rotor B1; bore 24 mm, gap 0.5 mm."""
    plain = plain_design()
    rotor = plain.rotor.model_copy(
        update={"gap_mm": 0.5, "shaft_diameter_mm": 24.0, "barrier": (b1_barrier(),)}
    )
    stator = plain.stator.model_copy(update={"bore_diameter_mm": 80.0})
    return plain.model_copy(update={"rotor": rotor, "stator": stator})
