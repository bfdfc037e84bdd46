"""The verdict: every figure of one design with its unit, the limits, and what to be wary of.

The figures stand in groups by what they are of; see `quantities` for how a figure is declared.
"""

import math
from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from lamwright.geometry.design import LimitsDesign

from .demagnetisation import MagnetState
from .magnet_figures import MagnetFigures
from .quantities import (
    CARD,
    CHECK,
    COUNT,
    FORMULA,
    STATED,
    Figure,
    OutlineFigures,
    figures_of,
    shown_as,
    shown_estimate,
)
from .quantities import RPM as RPM

if TYPE_CHECKING:
    from _typeshed import DataclassInstance


@dataclass(frozen=True, slots=True, kw_only=True)
class MagneticFigures:
    """Field results at rated current and the angle of most torque, means over 60 el degrees."""

    torque: float = field(metadata=shown_as("torque_nm", "torque, mean", "N m"))
    ripple: float = field(metadata=shown_as("torque_ripple_percent", "torque ripple", "%", 100.0))
    saliency: float = field(metadata=shown_as("saliency_ratio", "saliency ratio", ""))
    gamma: float = field(
        metadata=shown_as(
            "current_angle_deg", "current angle of most torque", "el deg", 180.0 / math.pi
        )
    )
    current: float = field(metadata=shown_as("current_a", "phase current, peak", "A", exact=STATED))
    i_d: float = field(metadata=shown_as("i_d_a", "d-axis current", "A"))
    i_q: float = field(metadata=shown_as("i_q_a", "q-axis current", "A"))
    psi_d: float = field(metadata=shown_as("psi_d_vs", "d-axis flux linkage", "V s"))
    psi_q: float = field(metadata=shown_as("psi_q_vs", "q-axis flux linkage", "V s"))
    torque_linkage: float = field(
        metadata=shown_as("torque_linkage_nm", "torque by the linkages", "N m")
    )
    torque_difference: float = field(
        metadata=shown_as(
            "torque_difference_percent", "difference of the two torques", "%", 100.0, exact=CHECK
        )
    )
    coenergy_difference: float = field(
        metadata=shown_as(
            "torque_coenergy_difference_percent",
            "largest difference to the coenergy's torque",
            "%",
            100.0,
            exact=CHECK,
        )
    )
    ripple_of_samples: float = field(
        metadata=shown_as(
            "torque_ripple_samples_percent", "ripple of the samples alone", "%", 100.0
        )
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class TerminalFigures:
    """Quantities that hold resistance and end-winding leakage by formula: estimates."""

    power_factor: float = field(metadata=shown_estimate("power_factor", "power factor", ""))
    line_voltage: float = field(
        metadata=shown_estimate("terminal_voltage_v", "line voltage at rated speed, rms", "V")
    )
    supply_voltage: float = field(
        metadata=shown_as("supply_voltage_v", "supply voltage, rms", "V", exact=STATED)
    )
    speed: float = field(
        metadata=shown_as("speed_rated_rpm", "rated speed", "1/min", RPM, exact=STATED)
    )
    shaft_power: float = field(
        metadata=shown_as("air_gap_power_w", "torque times speed at rated speed", "W")
    )
    copper_loss: float = field(
        metadata=shown_estimate("copper_loss_w", "copper loss", "W", exact=FORMULA)
    )
    resistance: float = field(
        metadata=shown_estimate(
            "phase_resistance_ohm", "resistance of a phase", "Ohm", exact=FORMULA
        )
    )
    end_inductance: float = field(
        metadata=shown_estimate(
            "end_winding_inductance_mh", "end-winding leakage of a phase", "mH", 1e3, exact=FORMULA
        )
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class StressFigures:
    """Stress of the rotor lamination at overspeed; the margin is that of the whole lamination."""

    peak: float = field(
        metadata=shown_as("rib_stress_peak_mpa", "greatest rib stress", "MPa", 1e-6)
    )
    tension: float = field(
        metadata=shown_as("rib_tension_mean_mpa", "greatest mean tension of a rib", "MPa", 1e-6)
    )
    lamination_peak: float = field(
        metadata=shown_as("lamination_stress_peak_mpa", "greatest stress anywhere", "MPa", 1e-6)
    )
    yield_margin: float = field(metadata=shown_as("yield_margin", "yield margin at overspeed", ""))
    yield_strength: float = field(
        metadata=shown_as(
            "yield_strength_mpa", "yield strength of the rotor's steel", "MPa", 1e-6, exact=CARD
        )
    )
    speed: float = field(
        metadata=shown_as("speed_overspeed_rpm", "overspeed", "1/min", RPM, exact=STATED)
    )
    yield_speed: float = field(
        metadata=shown_as("speed_yield_begins_rpm", "yielding begins at", "1/min", RPM)
    )
    growth: float = field(
        metadata=shown_as("radial_growth_um", "radial growth at overspeed", "um", 1e6)
    )
    gap_left: float = field(
        metadata=shown_as("gap_left_mm", "air gap left at overspeed", "mm", 1e3)
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class SolverFigures:
    """Size and course of the solutions."""

    field_elements: int = field(
        metadata=shown_as("field_elements", "elements of the field", "", exact=COUNT)
    )
    field_unknowns: int = field(
        metadata=shown_as("field_unknowns", "unknowns of the field", "", exact=COUNT)
    )
    field_solutions: int = field(
        metadata=shown_as("field_solutions", "field solutions", "", exact=COUNT)
    )
    newton_steps: int = field(
        metadata=shown_as("newton_steps", "Newton steps in all", "", exact=COUNT)
    )
    newton_most: int = field(
        metadata=shown_as("newton_steps_most", "most steps of a solution", "", exact=COUNT)
    )
    residual: float = field(
        metadata=shown_as(
            "newton_residual_greatest", "greatest relative residual left", "", exact=CHECK
        )
    )
    positions: int = field(
        metadata=shown_as("waveform_positions", "positions over 60 el degrees", "", exact=COUNT)
    )
    stress_elements: int = field(
        metadata=shown_as("stress_elements", "elements of the stress", "", exact=COUNT)
    )
    stress_unknowns: int = field(
        metadata=shown_as("stress_unknowns", "unknowns of the stress", "", exact=COUNT)
    )
    stress_refinements: int = field(
        metadata=shown_as("stress_refinements", "refinements of the stress mesh", "", exact=COUNT)
    )


@dataclass(frozen=True, slots=True)
class Outcome:
    """A figure against its limit, both in the unit of the figure."""

    key: str  # of the limit, as in the design file
    figure: Figure
    limit: float
    is_least: bool  # the limit is the least that holds; else the most

    @property
    def holds(self) -> bool:
        """Whether the limit is met; being equal meets it."""
        value = self.figure.value
        return value >= self.limit if self.is_least else value <= self.limit


@dataclass(frozen=True, slots=True)
class PhaseTime:
    """Seconds of wall time spent in one phase of the run."""

    phase: str
    seconds: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Verdict:
    """Everything that is said about one design."""

    design_name: str
    design_hash: str
    version: str
    outline_dxf: str  # file name in the folder of the verdict
    tolerance: str  # name of the accuracy asked for, see `solver.tolerance`
    magnetic: MagneticFigures
    terminal: TerminalFigures
    stress: StressFigures
    outline: OutlineFigures
    solver: SolverFigures
    outcomes: tuple[Outcome, ...]
    cautions: tuple[str, ...]
    times: tuple[PhaseTime, ...]
    errors: Mapping[str, float] = field(default_factory=dict)  # by the figure's key, in its unit
    magnets: tuple[MagnetFigures, ...] = ()  # one where the machine has magnets
    magnet_states: tuple[MagnetState, ...] = ()  # of each magnet at the demagnetising current
    finer_states: tuple[MagnetState, ...] = ()  # the same on the finer mesh
    # Of each table the errors of its columns, see `table_errors`.
    table_errors: Mapping[str, Mapping[str, float | str]] = field(default_factory=dict)

    @property
    def passes(self) -> bool:
        """Whether every limit of the design file holds."""
        return all(outcome.holds for outcome in self.outcomes)

    def _repr_html_(self) -> str:
        """Limits and figures with their error bars, as a notebook shows them."""
        from .notebook import verdict_html  # it needs all that is here

        return verdict_html(self)


def all_figures(verdict: Verdict) -> dict[str, Figure]:
    """Every figure of the verdict by its key, in order."""
    groups: tuple[DataclassInstance, ...] = (
        verdict.magnetic,
        verdict.terminal,
        verdict.stress,
        verdict.outline,
        verdict.solver,
        *verdict.magnets,
    )
    return {figure.key: figure for group in groups for figure in figures_of(group)}


def judged(
    limits: LimitsDesign, magnetic: MagneticFigures, stress: StressFigures
) -> tuple[Outcome, ...]:
    """The outcome of each limit of the design file."""
    by_key = {figure.key: figure for figure in (*figures_of(magnetic), *figures_of(stress))}
    ripple, saliency = by_key["torque_ripple_percent"], by_key["saliency_ratio"]
    return (
        Outcome("least_torque_nm", by_key["torque_nm"], limits.least_torque_nm, True),
        Outcome("most_ripple_percent", ripple, limits.most_ripple_percent, False),
        Outcome("least_saliency_ratio", saliency, limits.least_saliency_ratio, True),
        Outcome("least_yield_margin", by_key["yield_margin"], limits.least_yield_margin, True),
    )
