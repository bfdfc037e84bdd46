"""The chapter of `map` on losses at rated current: figures, tables and pictures.

Fields at more positions than the map has are solved for it, at the angle of most torque, so that
the harmonics of rotor and teeth are seen to higher orders.
"""

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from lamwright.geometry.skew import skew_offsets
from lamwright.geometry.whole_file import write_text
from lamwright.geometry.winding import phase_resistance
from lamwright.postprocess.ac_copper import (
    SlotStrands,
    alone_factor,
    closed_factor,
    direct_loss,
    field_loss,
    slot_strands,
    strand_field,
    thickness_in_depths,
)
from lamwright.postprocess.coenergy_surface import torque
from lamwright.postprocess.figure_errors import SUFFIX, differences
from lamwright.postprocess.figures_losses import DensityPart, LossPicture, write_loss_figures
from lamwright.postprocess.iron_loss import (
    IronLaws,
    IronPart,
    loss_coefficients,
    loss_density,
    loss_of_orders,
)
from lamwright.postprocess.loss_figures import (
    AcCopperFigures,
    BearingFigures,
    CopperFigures,
    IronFigures,
    PointFigures,
    WindageFigures,
    iron_figures,
    loss_cautions,
    losses_csv,
    orders_csv,
)
from lamwright.postprocess.operating import copper_loss, dq_currents
from lamwright.postprocess.quantities import FORMULA, RPM, scaled_by_key
from lamwright.postprocess.skew import step_point
from lamwright.postprocess.table_errors import PLACE, Columns
from lamwright.postprocess.torque import waveform_positions
from lamwright.postprocess.windage import bearing_loss, windage_loss
from lamwright.solver.chains import OperatingPoint, solve_chain
from lamwright.solver.model import joined_parts
from lamwright.solver.types import FieldSolution, FloatArray

from .chapter import Chapter
from .known_losses import turning_of
from .map_losses import laws_of
from .mapped import Mapped

if TYPE_CHECKING:
    from _typeshed import DataclassInstance

POSITIONS = 24  # over 60 electrical degrees: orders up to 72
ANGLES = 721  # current angles tried on the surface
LOSS_TABLES = ("losses.csv", "iron_loss_orders.csv")
OF_COARSER = "not estimated row by row: the sums' errors stand in map.json"
SPEEDS = 21  # rows of the table over speed


@dataclass(frozen=True, slots=True, eq=False)
class _Iron:
    """Iron loss at rated current at any speed."""

    laws: IronLaws
    coefficients: FloatArray  # (3, n_order, 4)


@dataclass(frozen=True, slots=True, eq=False)
class _Losses:
    """All losses over mechanical speeds (n,) in W; None where not given."""

    columns: tuple[tuple[str, str, FloatArray | None], ...]  # key, name, values


@dataclass(frozen=True, slots=True, eq=False)
class _Solved:
    """What one mesh says."""

    steps: list[tuple[FieldSolution, ...]]
    laws: IronLaws | str  # or why there are none
    iron: _Iron | None
    strands: SlotStrands | None
    losses: _Losses


def loss_chapter(mapped: Mapped, stage: Path) -> Chapter:
    """Losses at rated current and speed; tables and pictures go to `stage`."""
    design, section = mapped.machine.design, mapped.section
    current = design.duty.rated_current_a
    gamma = best_angle(mapped, current)
    rated = design.duty.rated_speed_rpm / RPM
    omega_e = section.pole_pairs * rated
    top = design.duty.maximum_speed_rpm / RPM
    speeds = np.append(np.linspace(0.0, top, SPEEDS)[1:], rated)
    own = _solved(mapped, current, gamma, speeds)
    steps, laws, iron, strands, losses = own.steps, own.laws, own.iron, own.strands, own.losses
    figures: list[DataclassInstance] = [
        PointFigures(current=current, gamma=gamma, speed=rated),
        CopperFigures(
            slots=float(losses.columns[0][2][-1]),  # type: ignore[index]  # always given
            ends=float(losses.columns[1][2][-1]),  # type: ignore[index]
        ),
    ]
    ac, of_iron = _of_fields(own, omega_e)
    figures += [group for group in (ac, of_iron) if group is not None]
    if iron is not None:
        write_text(
            stage / "iron_loss_orders.csv", orders_csv(iron.coefficients, iron.laws, omega_e)
        )
    named = {key: values for key, _, values in losses.columns}
    windage, bearings = named["windage_w"], named["bearings_w"]
    assert windage is not None
    figures.append(WindageFigures(windage=float(windage[-1])))
    if bearings is not None:
        figures.append(BearingFigures(bearings=float(bearings[-1])))
    table = [(key, None if v is None else v[:-1]) for key, _, v in losses.columns]
    write_text(stage / "losses.csv", losses_csv(speeds[:-1], table))
    write_loss_figures(stage, _picture(mapped, steps, current, gamma, rated, iron, losses))
    not_given = []  # also on behalf of the efficiency, so that each is told once
    if strands is None:
        not_given.append(
            "AC copper loss, the efficiency is without it: the design has no table winding.strands"
        )
    if bearings is None:
        not_given.append(
            "friction of bearings, the efficiency is without it: "
            "the design states no losses.bearing_friction_nm"
        )
    if isinstance(laws, str) and not isinstance(mapped.losses, str):
        not_given.append(laws)  # else the map tells it
    bounds: dict[str, Columns] = {name: {"all columns": OF_COARSER} for name in LOSS_TABLES}
    errors = scaled_by_key(figures[0], {"gamma": mapped.angle_error})
    if mapped.coarser is not None:
        other = _solved(replace(mapped, model=mapped.coarser), current, gamma, speeds)
        errors |= differences(
            [group for group in (ac, of_iron) if group is not None],
            [group for group in _of_fields(other, omega_e) if group is not None],
        )
        bounds["losses.csv"] = _columns(losses, other.losses)
    return Chapter(
        tuple(figures),
        loss_cautions(of_iron, ac, POSITIONS),
        tuple(not_given),
        errors=errors,
        table_errors={name: own for name, own in bounds.items() if (stage / name).exists()},
    )


def _solved(mapped: Mapped, current: float, gamma: float, speeds: FloatArray) -> _Solved:
    """The fields at rated current and all losses at the speeds in rad/s."""
    design, section = mapped.machine.design, mapped.section
    steps = rated_fields(mapped, current, gamma)
    laws = laws_of(mapped.machine, section, mapped.model)
    iron: _Iron | None = None
    if not isinstance(laws, str):
        parts = [loss_coefficients(mapped.model, fields, laws) for fields in steps]
        iron = _Iron(laws, np.asarray(np.mean(parts, axis=0)))
    strands = slot_strands(design, mapped.model, section.rotor_period)
    losses = _losses(mapped, steps, current, iron, strands, speeds)
    return _Solved(steps, laws, iron, strands, losses)


def _of_fields(
    solved: _Solved, omega_e: float
) -> tuple[AcCopperFigures | None, IronFigures | None]:
    """The figures that rest on the fields; the last speed is the rated one."""
    ac = None if solved.strands is None else _ac_figures(solved.strands, solved.losses, omega_e)
    iron = solved.iron
    return ac, None if iron is None else iron_figures(iron.coefficients, iron.laws, omega_e)


def _columns(losses: _Losses, coarser: _Losses) -> Columns:
    """Errors of the columns of `losses.csv`: the most that any row differs by on a coarser mesh."""
    columns: Columns = {"speed_rpm": PLACE}
    for (key, _, own), (_, _, other) in zip(losses.columns, coarser.columns, strict=True):
        if own is None or other is None:
            continue
        off = float(np.abs(own - other).max())
        if off > 0.0:
            columns[key + SUFFIX] = off
        else:
            columns[key] = FORMULA
    return columns


def best_angle(mapped: Mapped, current: float) -> float:
    """Current angle of most torque in rad at a peak current, by the map's surface."""
    least = 0.0 if mapped.surface.even_q else -0.5 * math.pi
    gamma = np.linspace(least, 0.5 * math.pi, ANGLES)
    found = torque(mapped.surface, current * np.cos(gamma), current * np.sin(gamma))
    return float(gamma[int(np.argmax(found))])


def rated_fields(mapped: Mapped, current: float, gamma: float) -> list[tuple[FieldSolution, ...]]:
    """Fields at `POSITIONS` positions over 60 electrical degrees, for each step of the rotor."""
    pole_pairs = mapped.section.pole_pairs
    i_d, i_q = dq_currents(current, gamma)
    points = [OperatingPoint(i_d, i_q, float(x)) for x in waveform_positions(pole_pairs, POSITIONS)]
    return [
        solve_chain(mapped.model, [step_point(point, offset, pole_pairs) for point in points])
        for offset in skew_offsets(mapped.machine.design)
    ]


def _losses(
    mapped: Mapped,
    steps: Sequence[Sequence[FieldSolution]],
    current: float,
    iron: _Iron | None,
    strands: SlotStrands | None,
    speeds: FloatArray,
) -> _Losses:
    design, section = mapped.machine.design, mapped.section
    omegas = section.pole_pairs * speeds
    stack, end = design.stator.stack_length_mm, design.winding.end_turn_length_mm
    copper = copper_loss(current, phase_resistance(design)) * np.ones(speeds.size)
    slots = copper * stack / (stack + end)
    extra = of_iron = None
    if strands is not None:
        fields = [strand_field(strands, mapped.model, own) for own in steps]
        extra = np.array(
            [
                float(np.mean([field_loss(strands, own, w).sum() for own in fields]))
                + (alone_factor(strands, w) - 1.0) * direct_loss(strands, current)
                for w in omegas
            ]
        )
    if iron is not None:
        of_iron = np.array(
            [loss_of_orders(iron.coefficients, iron.laws, w)[1].sum(axis=(1, 2)) for w in omegas]
        ).T
    friction = design.losses.bearing_friction_nm
    bearings = None if friction is None else bearing_loss(friction, speeds)
    rotor, teeth, yoke = (None, None, None) if of_iron is None else of_iron
    return _Losses(
        (
            ("copper_slots_w", "copper, slots", slots),
            ("copper_end_turns_w", "copper, end turns", copper - slots),
            ("copper_ac_extra_w", "copper, AC extra", extra),
            ("iron_teeth_w", "iron, teeth", teeth),
            ("iron_yoke_w", "iron, yoke", yoke),
            ("iron_rotor_w", "iron, rotor", rotor),
            ("windage_w", "windage", windage_loss(turning_of(mapped), speeds)),
            ("bearings_w", "bearings", bearings),
        )
    )


def _ac_figures(strands: SlotStrands, losses: _Losses, omega_e: float) -> AcCopperFigures:
    slots, extra = losses.columns[0][2], losses.columns[2][2]
    assert slots is not None
    assert extra is not None
    return AcCopperFigures(
        extra=float(extra[-1]),
        share=float(extra[-1] / slots[-1]),
        closed=float(closed_factor(strands, np.array(omega_e)) - 1.0),
        depths=thickness_in_depths(strands, omega_e),
    )


def _picture(
    mapped: Mapped,
    steps: Sequence[Sequence[FieldSolution]],
    current: float,
    gamma: float,
    rated: float,
    iron: _Iron | None,
    losses: _Losses,
) -> LossPicture:
    density: tuple[DensityPart, ...] = ()
    order, of_order = np.zeros(0), np.zeros((3, 0))
    if iron is not None:
        omega_e = mapped.section.pole_pairs * rated
        middle = steps[len(steps) // 2]
        per_point = loss_density(mapped.model, middle, iron.laws, omega_e)
        both = zip((iron.laws.rotor, iron.laws.stator), per_point, strict=True)
        density = tuple(_density(mapped, part, own) for part, own in both)
        f, loss = loss_of_orders(iron.coefficients, iron.laws, omega_e)
        order = 6.0 / iron.laws.steps * np.arange(1.0, f.size + 1.0)
        of_order = loss.sum(axis=2)
    given = [(name, float(v[-1])) for _, name, v in losses.columns if v is not None]
    return LossPicture(
        name=mapped.machine.design.name,
        condition=(
            f"{current:.4g} A peak at {math.degrees(gamma):.4g} el deg, {RPM * rated:.5g} 1/min"
        ),
        section=mapped.section,
        density=density,
        bars=tuple(given),
        missing=tuple(name for _, name, v in losses.columns if v is None),
        order=order,
        of_order=of_order,
    )


def _density(mapped: Mapped, part: IronPart, per_point: FloatArray) -> DensityPart:
    nodes, elements = joined_parts(mapped.model.sector)
    area = part.points.area.reshape(part.points.element.size, -1)
    loss = (area * per_point.reshape(area.shape)).sum(axis=1) / area.sum(axis=1)
    return DensityPart(nodes[elements[part.points.element][:, :3]], area.sum(axis=1), loss)
