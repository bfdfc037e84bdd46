"""Figures of the rotor beyond yield, from its `PlasticReport`."""

import math
from dataclasses import dataclass, field

from .plastic_ribs import PlasticReport, PlasticRib
from .quantities import COUNT, RPM, scaled_by_key, shown_as


@dataclass(frozen=True, slots=True, kw_only=True)
class BurstFigures:
    """Where the rotor collapses, by limit load and by two simpler means beside it."""

    low: float = field(
        metadata=shown_as("speed_burst_low_rpm", "burst by limit load, lower bound", "1/min", RPM)
    )
    high: float = field(
        metadata=shown_as("speed_burst_high_rpm", "burst by limit load, upper bound", "1/min", RPM)
    )
    tensile: float = field(
        metadata=shown_as(
            "speed_burst_tensile_rpm", "the lower with tensile strength for yield", "1/min", RPM
        )
    )
    mean_hoop: float = field(
        metadata=shown_as(
            "speed_mean_hoop_rpm", "mean hoop of a whole cut yields (bound)", "1/min", RPM
        )
    )
    reserve: float = field(
        metadata=shown_as("burst_over_overspeed", "burst, lower bound, over overspeed", "")
    )
    cycles: int = field(
        metadata=shown_as("start_stop_cycles", "start-stop cycles computed for it", "", exact=COUNT)
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class LeftFigures:
    """What an overspeed test that the rotor survives leaves."""

    growth: float = field(
        metadata=shown_as("growth_left_um", "growth left after the overspeed test", "um", 1e6)
    )
    growth_d: float = field(metadata=shown_as("growth_left_d_um", "of it on the d axis", "um", 1e6))
    growth_q: float = field(metadata=shown_as("growth_left_q_um", "of it on the q axis", "um", 1e6))
    strain: float = field(
        metadata=shown_as("plastic_strain_most_percent", "largest plastic strain", "%", 100.0)
    )
    yielded: float = field(
        metadata=shown_as("yielded_iron_percent", "iron that yielded", "%", 100.0)
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class PlasticRibFigures:
    """One rib after the test; in the collapse where the test is that."""

    section: float = field(
        metadata=shown_as("yielded_section_percent", "section that yielded", "%", 100.0)
    )
    area: float = field(metadata=shown_as("yielded_area_mm2", "area that yielded", "mm2", 1e6))
    strain: float = field(
        metadata=shown_as("plastic_strain_percent", "largest plastic strain", "%", 100.0)
    )


def burst_figures(report: PlasticReport) -> BurstFigures:
    """The burst speeds of a report."""
    return BurstFigures(
        low=report.burst_low,
        high=report.burst_high,
        tensile=report.burst_tensile,
        mean_hoop=report.mean_hoop_speed,
        reserve=report.burst_low / report.test_speed,
        cycles=report.cycles,
    )


def left_figures(report: PlasticReport) -> tuple[LeftFigures, ...]:
    """What the test leaves; nothing where the rotor does not survive it."""
    if not report.survives:
        return ()
    left = LeftFigures(
        growth=_clean(report.growth_max),
        growth_d=_clean(report.growth_d),
        growth_q=_clean(report.growth_q),
        strain=report.largest_strain,
        yielded=report.yielded_share,
    )
    return (left,)


def plastic_rib_figures(report: PlasticReport) -> tuple[PlasticRibFigures, ...]:
    """One for each rib."""
    return tuple(_of_rib(row) for row in report.ribs)


def rib_differences(rib: PlasticRibFigures, other: PlasticRibFigures) -> dict[str, float]:
    """By how much a rib's figures differ from another mesh's, by key; nan where both burst."""
    return scaled_by_key(
        rib,
        {
            name: abs(getattr(rib, name) - getattr(other, name))
            for name in ("section", "area", "strain")
        },
    )


def _of_rib(row: PlasticRib) -> PlasticRibFigures:
    return PlasticRibFigures(
        section=row.section_share, area=row.zone_area, strain=row.largest_strain
    )


def _clean(growth: float) -> float:
    """A growth without the rounding of the radii it is the difference of."""
    return growth if math.isinf(growth) or abs(growth) > 1e-13 else 0.0
