"""AC copper loss of a machine's slots, from its fields and by closed form.

From the field: the flux density across every strand over its whole period, by harmonics, with the
loss of a strand in such a field (`strand_loss`). Round strands are taken as spread evenly over the
copper; rectangular ones lie in layers of equal depth, each in the mean field of its layer. A
strand's own current adds its skin effect. Strands in hand are taken as transposed: no current
circulates between them. The field is static, so round strands do not shield each other: an
overestimate where one is thicker than the penetration depth. Only what lies in the slots counts,
end turns have their direct-current loss.

By closed form: all sides of a slot of one phase, the field across it rising evenly from bottom to
top: bars by Field (mean of the layers), round strands in the mean square of that field. Slots of
two phases lose less, mouths and saturated teeth more.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from lamwright.geometry.design import MachineDesign
from lamwright.geometry.design_loss import StrandDesign
from lamwright.geometry.winding import copper_resistivity
from lamwright.solver.iron_period import (
    ComplexArray,
    PeriodPoints,
    copper_points,
    flux_at,
    whole_period,
)
from lamwright.solver.model import MagneticModel
from lamwright.solver.steel import MU_0
from lamwright.solver.types import FieldSolution, FloatArray, IntArray

from .iron_loss import LEAST_FLUX
from .strand_loss import (
    bar_alone,
    bar_in_field,
    bar_xi,
    mean_factor,
    round_alone,
    round_in_field,
)

MM = 1e-3  # m


@dataclass(frozen=True, slots=True, eq=False)
class SlotStrands:
    """Strands in the slots of a machine, SI."""

    strands: StrandDesign
    in_slot: int  # strands of all sides of a slot
    per_turn: float  # strand's share of the phase current: 1 / (strands in hand, parallel paths)
    width: float  # of the slot, mean over its copper
    low: float  # radius at which the copper begins, on the slot's centre line
    high: float  # and ends
    length: float  # of all slots together
    slots: int
    resistivity: float
    points: PeriodPoints


@dataclass(frozen=True, slots=True, eq=False)
class StrandField:
    """Flux density across all strands, squared, by order; amplitudes."""

    order: FloatArray  # (n_order,), electrical
    across: FloatArray  # (n_order,), T^2 m, across the slot, over all strands' length
    along: FloatArray  # (n_order,), T^2 m, along the slot's depth


def slot_strands(
    design: MachineDesign, model: MagneticModel, rotor_period: int
) -> SlotStrands | None:
    """The strands of a design in its meshed slots; None where the design states none."""
    strands, winding = design.winding.strands, design.winding
    if strands is None:
        return None
    slots = design.stator.slots
    points = copper_points(model, slots, rotor_period)
    place = _in_slot(points, slots)[0]
    in_sector = slots // model.sector.sectors
    low, high = float(place.real.min()), float(place.real.max())
    return SlotStrands(
        strands=strands,
        in_slot=winding.layers * winding.turns_per_coil * strands.in_hand,
        per_turn=1.0 / (strands.in_hand * winding.parallel_paths),
        width=float(points.area.sum()) / in_sector / (high - low),
        low=low,
        high=high,
        length=slots * model.stack_length,
        slots=slots,
        resistivity=copper_resistivity(winding.temperature_c),
        points=points,
    )


def strand_field(
    own: SlotStrands, model: MagneticModel, fields: Sequence[FieldSolution]
) -> StrandField:
    """The field across the strands at positions equally spaced over 60 electrical degrees."""
    points = own.points
    place, slot, turn = _in_slot(points, own.slots)
    period = whole_period(points.step, flux_at(model, points, fields)) * turn
    area = points.area
    if own.strands.layers is not None and own.strands.round_diameter_mm is None:
        share = (place.real - own.low) / (own.high - own.low)
        layer = np.clip((share * own.strands.layers).astype(np.int64), 0, own.strands.layers - 1)
        group = np.unique(slot * own.strands.layers + layer, return_inverse=True)[1]
        period, area = _grouped(period, area, group)
    weight = own.in_slot * own.length * area / area.sum()
    n = period.shape[0]
    squares = []
    for part in (period.imag, period.real):  # across, along
        amplitude = 2.0 / n * np.abs(np.fft.rfft(part, axis=0))[1:]
        if n % 2 == 0:
            amplitude[-1] *= 0.5
        squares.append(np.where(amplitude > LEAST_FLUX, amplitude, 0.0) ** 2 @ weight)
    order = 6.0 / points.step.steps * np.arange(1.0, n // 2 + 1.0)
    return StrandField(order, squares[0], squares[1])


def field_loss(own: SlotStrands, field: StrandField, omega_e: float) -> FloatArray:
    """Loss in W by order (n_order,) of the strands in the slots' field."""
    f = abs(omega_e) / (2.0 * np.pi) * field.order
    strands, rho = own.strands, own.resistivity
    if strands.round_diameter_mm is not None:
        each = round_in_field(MM * strands.round_diameter_mm, f, rho)
        return each * (field.across + field.along)
    height, width, share = _bar(own)
    loss: FloatArray = bar_in_field(height, width, f, rho, share) * field.across
    # Along the depth rows of bars stand above each other with little between them.
    loss = loss + bar_in_field(width, height, f, rho, 1.0) * field.along
    return loss


def alone_factor(own: SlotStrands, omega_e: float) -> float:
    """Loss of a strand by its own current over that of direct current."""
    f = np.array(abs(omega_e) / (2.0 * np.pi))
    if own.strands.round_diameter_mm is not None:
        return float(round_alone(MM * own.strands.round_diameter_mm, f, own.resistivity))
    height, _, share = _bar(own)
    return float(bar_alone(bar_xi(height, f, own.resistivity, share)))


def direct_loss(own: SlotStrands, current: float) -> float:
    """Direct-current loss in W of the slots' strands at a peak phase current in A."""
    strand = current * own.per_turn
    total: float = 0.5 * strand**2 * own.resistivity * own.in_slot * own.length / _area(own)
    return total


def closed_factor(own: SlotStrands, omega_e: FloatArray) -> FloatArray:
    """AC loss in the slots over that of direct current by closed form, any shape of `omega_e`."""
    f = np.abs(np.asarray(omega_e, dtype=np.float64)) / (2.0 * np.pi)
    strands, rho = own.strands, own.resistivity
    if strands.round_diameter_mm is None:
        height, _, share = _bar(own)
        assert strands.layers is not None
        return mean_factor(bar_xi(height, f, rho, share), strands.layers)
    diameter = MM * strands.round_diameter_mm
    # Mean square over the depth of a field that rises evenly to in_slot I / width.
    square = (MU_0 * own.in_slot / own.width) ** 2 / 3.0
    direct = 0.5 * rho / _area(own)
    factor: FloatArray = (
        round_alone(diameter, f, rho) + round_in_field(diameter, f, rho) * square / direct
    )
    return factor


def thickness_in_depths(own: SlotStrands, omega_e: float) -> float:
    """Thickness of a strand over the penetration depth of the fundamental."""
    strands = own.strands
    thick = strands.round_diameter_mm or strands.height_mm or 0.0
    depth = np.sqrt(2.0 * own.resistivity / (MU_0 * max(abs(omega_e), 1e-9)))
    return float(MM * thick / depth)


def _bar(own: SlotStrands) -> tuple[float, float, float]:
    """Height and width of a bar in m, and copper's part of the slot's width."""
    strands = own.strands
    assert strands.height_mm is not None
    assert strands.width_mm is not None
    assert strands.layers is not None
    width = MM * strands.width_mm
    abreast = max(1.0, own.in_slot / strands.layers)
    return MM * strands.height_mm, width, min(1.0, abreast * width / own.width)


def _area(own: SlotStrands) -> float:
    strands = own.strands
    if strands.round_diameter_mm is not None:
        return 0.25 * np.pi * (MM * strands.round_diameter_mm) ** 2
    height, width, _ = _bar(own)
    return height * width


def _in_slot(points: PeriodPoints, slots: int) -> tuple[ComplexArray, IntArray, ComplexArray]:
    """Places in the frame of each slot, its centre line along x; slot; turn into that frame."""
    pitch = 2.0 * np.pi / slots
    slot = np.floor(np.angle(points.place) / pitch).astype(np.int64)
    turn = np.exp(-1j * (slot + 0.5) * pitch)
    return points.place * turn, slot, turn


def _grouped(
    period: ComplexArray, area: FloatArray, group: IntArray
) -> tuple[ComplexArray, FloatArray]:
    """Means over groups of points by area, (n_sample, n_group), and the groups' areas."""
    total = np.bincount(group, area)
    order = np.argsort(group, kind="stable")
    starts = np.append(0, np.flatnonzero(np.diff(group[order])) + 1)
    sums = np.add.reduceat((period * area)[:, order], starts, axis=1)
    return np.asarray(sums / total), total.astype(np.float64)
