"""A design beside two yardsticks: the ideal rotor in its stator, and an induction machine."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from .files import csv_text
from .quantities import FORMULA, STATED, figures_of, shown_as, shown_estimate

if TYPE_CHECKING:
    from _typeshed import DataclassInstance


@dataclass(frozen=True, slots=True, kw_only=True)
class DesignFigures:
    """The design at rated current and the current angle of most torque, from the map."""

    current: float = field(
        metadata=shown_as("yardstick_current_a", "current, peak", "A", exact=STATED)
    )
    torque: float = field(metadata=shown_as("yardstick_design_torque_nm", "torque, design", "N m"))
    saliency: float = field(
        metadata=shown_as("yardstick_design_saliency_ratio", "saliency, design", "")
    )
    copper_loss: float = field(
        metadata=shown_estimate(
            "yardstick_design_copper_loss_w", "stator copper loss, design", "W", exact=FORMULA
        )
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class IdealFigures:
    """The ideal anisotropic rotor at the same current, and the design's share of it."""

    gap_share: float = field(
        metadata=shown_as("ideal_rotor_gap_share_percent", "share of gaps, ideal rotor", "%", 100.0)
    )
    torque: float = field(metadata=shown_as("ideal_rotor_torque_nm", "torque, ideal rotor", "N m"))
    saliency: float = field(
        metadata=shown_as("ideal_rotor_saliency_ratio", "saliency, ideal rotor", "")
    )
    torque_share: float = field(
        metadata=shown_as(
            "ideal_rotor_torque_reached_percent", "torque reached of the ideal", "%", 100.0
        )
    )
    saliency_share: float = field(
        metadata=shown_as(
            "ideal_rotor_saliency_reached_percent", "saliency reached of the ideal", "%", 100.0
        )
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class InductionFigures:
    """The induction machine in the same frame at the same stator current: estimates all."""

    torque: float = field(
        metadata=shown_estimate("induction_estimate_torque_nm", "torque, induction machine", "N m")
    )
    torque_same_loss: float = field(
        metadata=shown_estimate(
            "induction_estimate_torque_at_design_copper_loss_nm",
            "torque at the design's copper loss, induction machine",
            "N m",
        )
    )
    torque_per_ampere: float = field(
        metadata=shown_estimate(
            "induction_estimate_torque_per_ampere_nm_per_a",
            "torque per peak ampere, induction machine",
            "N m/A",
        )
    )
    design_torque_per_ampere: float = field(
        metadata=shown_as(
            "yardstick_design_torque_per_ampere_nm_per_a",
            "torque per peak ampere, design",
            "N m/A",
        )
    )
    stator_loss: float = field(
        metadata=shown_estimate(
            "induction_estimate_stator_copper_loss_w", "stator copper loss, induction machine", "W"
        )
    )
    rotor_loss: float = field(
        metadata=shown_estimate(
            "induction_estimate_rotor_cage_loss_w", "rotor cage loss, induction machine", "W"
        )
    )
    slip: float = field(
        metadata=shown_estimate(
            "induction_estimate_slip_percent", "slip, induction machine", "%", 100.0
        )
    )
    voltage: float = field(
        metadata=shown_estimate(
            "induction_estimate_line_voltage_v", "line voltage, induction machine", "V"
        )
    )
    power_factor: float = field(
        metadata=shown_estimate(
            "induction_estimate_power_factor", "power factor, induction machine", ""
        )
    )
    magnetising: float = field(
        metadata=shown_estimate(
            "induction_estimate_magnetising_current_a",
            "magnetising current, peak, induction machine",
            "A",
        )
    )


@dataclass(frozen=True, slots=True)
class Yardsticks:
    """The design and its yardsticks; each is left out where it is not given."""

    design_name: str
    design: DesignFigures
    ideal: tuple[IdealFigures, ...]  # one or none
    induction: tuple[InductionFigures, ...]  # one or none
    assumptions: tuple[str, ...]  # of the induction machine


def yardsticks_csv(found: Yardsticks) -> str:
    """One row for each figure, then the assumptions of the estimate."""
    groups: tuple[DataclassInstance, ...] = (found.design, *found.ideal, *found.induction)
    rows = [
        [figure.label, figure.key, f"{figure.value:.7g}", figure.unit, _kind(figure.is_estimate)]
        for group in groups
        for figure in figures_of(group)
    ]
    rows += [
        ["assumed of the induction machine", "", line, "", "assumption"] for line in _given(found)
    ]
    return csv_text(["figure", "key", "value", "unit", "kind"], rows)


def _given(found: Yardsticks) -> Sequence[str]:
    return found.assumptions if found.induction else ()


def _kind(is_estimate: bool) -> str:
    return "estimate" if is_estimate else "computed"
