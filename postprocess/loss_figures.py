"""What a machine loses at one current and speed: figures, and losses over the speed as a table.

All are estimates: fields and formulas, nothing measured. A loss that lacks an input has no figure.
"""

from collections.abc import Sequence
from dataclasses import dataclass, field

import numpy as np

from lamwright.solver.types import FloatArray

from .files import csv_text
from .iron_loss import PARTS, IronLaws, loss_of_orders
from .loss_surface import MOST_MISFIT
from .quantities import CHECK, FORMULA, RPM, STATED, shown_as, shown_estimate

MOST_BEYOND = 0.1  # of the iron loss at frequencies no point of the card reaches
MOST_DEPTHS = 1.0  # thickness of a strand over the penetration depth


@dataclass(frozen=True, slots=True, kw_only=True)
class PointFigures:
    """Where the losses are told."""

    current: float = field(
        metadata=shown_as("loss_current_a", "losses: phase current, peak", "A", exact=STATED)
    )
    gamma: float = field(metadata=shown_as("loss_angle_el_deg", "its angle", "el deg", 180 / np.pi))
    speed: float = field(metadata=shown_as("loss_speed_rpm", "speed", "1/min", RPM, exact=STATED))


@dataclass(frozen=True, slots=True, kw_only=True)
class CopperFigures:
    """Direct-current copper loss at the winding's temperature."""

    slots: float = field(
        metadata=shown_estimate("copper_slots_w", "copper in the slots", "W", exact=FORMULA)
    )
    ends: float = field(
        metadata=shown_estimate("copper_end_turns_w", "copper, end turns", "W", exact=FORMULA)
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class AcCopperFigures:
    """What alternating current adds to it in the slots."""

    extra: float = field(metadata=shown_estimate("copper_ac_extra_w", "AC copper, extra", "W"))
    share: float = field(
        metadata=shown_estimate(
            "copper_ac_percent", "AC copper over DC in the slots, by the field", "%", 100.0
        )
    )
    closed: float = field(
        metadata=shown_estimate(
            "copper_ac_closed_percent", "the same, closed form", "%", 100.0, exact=FORMULA
        )
    )
    depths: float = field(
        metadata=shown_as(
            "strand_penetration_depths", "strand over penetration depth", "", exact=FORMULA
        )
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class IronFigures:
    """Iron loss of both laminations."""

    teeth: float = field(metadata=shown_estimate("iron_teeth_w", "iron loss, teeth", "W"))
    yoke: float = field(metadata=shown_estimate("iron_yoke_w", "iron loss, yoke", "W"))
    rotor: float = field(metadata=shown_estimate("iron_rotor_w", "iron loss, rotor", "W"))
    hysteresis: float = field(
        metadata=shown_estimate("iron_hysteresis_w", "of all iron loss: hysteresis", "W")
    )
    eddy: float = field(metadata=shown_estimate("iron_eddy_w", "classical eddy currents", "W"))
    excess: float = field(metadata=shown_estimate("iron_excess_w", "excess", "W"))
    misfit: float = field(
        metadata=shown_as(
            "loss_points_misfit_percent", "loss points, greatest misfit", "%", 100.0, exact=CHECK
        )
    )
    beyond: float = field(
        metadata=shown_as(
            "iron_beyond_points_percent", "iron loss above the points' frequencies", "%", 100.0
        )
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class WindageFigures:
    """Windage by formula."""

    windage: float = field(
        metadata=shown_estimate("windage_w", "windage, formula", "W", exact=FORMULA)
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class BearingFigures:
    """Friction of bearings and seals by the stated torque."""

    bearings: float = field(
        metadata=shown_estimate("bearings_w", "bearings and seals", "W", exact=STATED)
    )


def iron_figures(coefficients: FloatArray, laws: IronLaws, omega_e: float) -> IronFigures:
    """Iron loss at an electrical angular frequency in rad/s."""
    f, loss = loss_of_orders(coefficients, laws, omega_e)
    surfaces = (laws.rotor.surface, laws.stator.surface, laws.stator.surface)
    tops = np.array([surface.frequency_range[1] for surface in surfaces])
    beyond = loss.sum(axis=2)[f[None, :] > tops[:, None]].sum()
    rotor, teeth, yoke = loss.sum(axis=(1, 2))
    hysteresis, eddy, excess = loss.sum(axis=(0, 1))
    return IronFigures(
        teeth=float(teeth),
        yoke=float(yoke),
        rotor=float(rotor),
        hysteresis=float(hysteresis),
        eddy=float(eddy),
        excess=float(excess),
        misfit=max(surface.misfit for surface in surfaces),
        beyond=float(beyond / max(loss.sum(), 1e-300)),
    )


def loss_cautions(
    iron: IronFigures | None, ac: AcCopperFigures | None, positions: int
) -> tuple[str, ...]:
    """What a reader of the losses should be wary of."""
    lines = []
    if iron is not None:
        if iron.misfit > MOST_MISFIT:
            lines.append(
                f"iron loss: the surface misses a loss point of a steel card by"
                f" {100.0 * iron.misfit:.2g} %: look for a wrong point, thickness or resistivity"
            )
        if iron.beyond > MOST_BEYOND:
            lines.append(
                f"iron loss: {100.0 * iron.beyond:.2g} % of it lies above the frequencies of the"
                f" steel card's loss points: extrapolated"
            )
        lines.append(
            f"iron loss: of undamaged sheets in sinusoidal phase currents, orders up to"
            f" {3 * positions}; punching, stress and a converter's ripple add, common practice 20"
            f" to 100 %"
        )
    if ac is not None:
        if ac.depths > MOST_DEPTHS:
            lines.append(
                f"AC copper loss: strands of {ac.depths:.2g} penetration depths shield each other,"
                f" the figure is too high"
            )
        lines.append("AC copper loss: no currents that circulate between strands in hand")
    lines.append("windage: a formula for smooth rotors, +-50 %, without fan")
    return tuple(lines)


def orders_csv(coefficients: FloatArray, laws: IronLaws, omega_e: float) -> str:
    """Iron loss by electrical order: parts, and kinds of all parts."""
    f, loss = loss_of_orders(coefficients, laws, omega_e)
    order = 6.0 / laws.steps * np.arange(1, f.size + 1)
    header = ["order_el", "frequency_hz", *(f"{part}_w" for part in PARTS)]
    header += ["hysteresis_w", "eddy_w", "excess_w"]
    rows = [
        [f"{v:.6g}" for v in (order[k], f[k], *loss[:, k].sum(axis=1), *loss[:, k].sum(axis=0))]
        for k in range(f.size)
        if loss[:, k].any()
    ]
    return csv_text(header, rows)


def losses_csv(speed: FloatArray, columns: Sequence[tuple[str, FloatArray | None]]) -> str:
    """Losses in W over mechanical speeds in rad/s (n,); a column that is not given is left out."""
    given = [(name, values) for name, values in columns if values is not None]
    header = ["speed_rpm", *(name for name, _ in given)]
    table = np.column_stack([RPM * speed, *(values for _, values in given)])
    return csv_text(header, [[f"{value:.6g}" for value in row] for row in table])
