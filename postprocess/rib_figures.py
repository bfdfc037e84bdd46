"""Figures of the rotor's ribs as a whole, beside those of the verdict."""

import math
from dataclasses import dataclass, field

from lamwright.geometry.section import CrossSection
from lamwright.solver.estimate_stress import BEYOND

from .quantities import COUNT, RPM, STATED, shown_as
from .ribs import RibReport


@dataclass(frozen=True, slots=True, kw_only=True)
class RotorFigures:
    """The lamination at overspeed, bore free."""

    ribs: int = field(
        metadata=shown_as("ribs_of_a_period", "ribs of the rotor's period", "", exact=COUNT)
    )
    growth_d: float = field(metadata=shown_as("growth_d_um", "growth on the d axis", "um", 1e6))
    growth_q: float = field(metadata=shown_as("growth_q_um", "growth on the q axis", "um", 1e6))
    gap: float = field(
        metadata=shown_as("gap_cold_mm", "air gap at rest, cold", "mm", 1e3, exact=STATED)
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class MeanYield:
    """Where a rib yields over its whole section."""

    speed: float = field(
        metadata=shown_as(
            "speed_mean_yield_lowest_rpm", "lowest speed of a rib's mean yield", "1/min", RPM
        )
    )


def rotor_figures(section: CrossSection, report: RibReport) -> RotorFigures:
    """The figures of a report."""
    return RotorFigures(
        ribs=len(report.ribs),
        growth_d=report.growth_d,
        growth_q=report.growth_q,
        gap=section.gap,
    )


def mean_yield(report: RibReport) -> tuple[MeanYield, ...]:
    """The lowest speed at which a rib yields on average; none where no rib is pulled."""
    speed = min(row.mean_yield_speed for row in report.ribs)
    return (MeanYield(speed=speed),) if math.isfinite(speed) else ()


def rotor_errors(report: RibReport, finer: RibReport) -> dict[str, float]:
    """Errors in SI of the rotor's figures by field, from the mesh four times as fine."""
    return {
        name: BEYOND * abs(getattr(finer, name) - getattr(report, name))
        for name in ("growth_d", "growth_q")
    }
