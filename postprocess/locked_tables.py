"""The curves of a locked rotor, and measured values beside them, as CSV and as a record."""

from collections.abc import Sequence

import numpy as np

from .files import csv_text
from .locked import (
    DEGREE,
    MM,
    LockedCurves,
    LockedFigures,
    locked_cautions,
    locked_figures,
)
from .locked_measured import ANGLE, CURRENT, MEASURED, NO_CURRENT, Comparison
from .quantities import figures_of

SAME_ANGLE = 1e-6  # rad: a measured value this near to a row's angle stands in that row


def locked_csv(curves: LockedCurves, comparisons: Sequence[Comparison]) -> str:
    """One row for each current and angle, the last angle the first of the next period.

    Measured values stand in their columns where their angle is a row's, else the columns are
    empty.
    """
    angles = np.append(curves.angle, curves.period)
    turn = curves.feed.axis_el / curves.pole_pairs
    rows = []
    for k, current in enumerate(curves.currents):
        torque, psi, apparent, slope, coenergy = (
            np.append(values[k], values[k][0])
            for values in (
                curves.torque,
                curves.linkage,
                curves.apparent,
                curves.slope,
                curves.coenergy,
            )
        )
        bare = np.append(curves.bare_slope, curves.bare_slope[0])
        for j, angle in enumerate(angles):
            numbers = (
                current,
                angle / DEGREE,
                curves.pole_pairs * angle / DEGREE,
                (angle + turn) / DEGREE,
                torque[j],
                psi[j],
                MM * apparent[j],
                MM * slope[j],
                MM * bare[j],
                MM * curves.terminal_end_inductance,
                coenergy[j],
            )
            # What was measured without current stands beside the first one only.
            owners = [0.0 if name == NO_CURRENT and k == 0 else current for name in MEASURED]
            measured = [
                _measured_at(comparisons, name, owner, angle)
                for name, owner in zip(MEASURED, owners, strict=True)
            ]
            rows.append([f"{number:.7g}" for number in numbers] + measured)
    # fmt: off
    header = [
        CURRENT, ANGLE, "angle_el_deg", "angle_from_phase_a_mech_deg", "torque_nm",
        "terminal_linkage_vs", "terminal_inductance_apparent_mh",
        "terminal_inductance_incremental_mh", "terminal_inductance_no_current_mh",
        "terminal_end_winding_estimate_mh", "coenergy_j", *MEASURED,
    ]
    # fmt: on
    return csv_text(header, rows)


def comparison_csv(curves: LockedCurves, comparisons: Sequence[Comparison]) -> str:
    """One row for each measured value: what is computed there, and the difference.

    Its columns are those of the table of measured values, so it can be read as one again.
    """
    rows = []
    for one in comparisons:
        own = one.measured.column
        _, unit, factor = MEASURED[own]
        triples = zip(one.measured.angle, one.measured.value, one.computed, strict=True)
        for angle, value, computed in triples:
            place = (one.measured.current, angle / DEGREE)
            cells = [f"{value / factor:.7g}" if name == own else "" for name in MEASURED]
            beside = (computed / factor, (value - computed) / factor)
            rows.append([f"{n:.7g}" for n in place] + cells + [f"{n:.7g}" for n in beside] + [unit])
    header = [CURRENT, ANGLE, *MEASURED, "computed", "measured_less_computed", "unit"]
    return csv_text(header, rows)


def locked_record(
    curves: LockedCurves, comparisons: Sequence[Comparison], version: str, design_hash: str
) -> dict[str, object]:
    """The figures of each current as they stand in JSON, with how far measured values lie off."""
    return {
        "design": curves.design_name,
        "feed": curves.feed.name,
        "step_mech_deg": curves.period / len(curves.angle) / DEGREE,
        "turned_through_mech_deg": curves.period / DEGREE,
        "terminal_inductance_per_phase_inductance": curves.feed.terminal_factor,
        "currents": [_figures_record(figures) for figures in locked_figures(curves)],
        "comparisons": [_comparison_record(one) for one in comparisons],
        "estimates": ["end_winding_mh"],
        "cautions": list(locked_cautions(curves)),
        "version": version,
        "design_hash": design_hash,
        "seconds": round(curves.seconds, 3),
    }


def _figures_record(figures: LockedFigures) -> dict[str, float]:
    return {figure.key: figure.value for figure in figures_of(figures)}


def _comparison_record(one: Comparison) -> dict[str, object]:
    _, unit, factor = MEASURED[one.measured.column]
    suffix = unit.lower().replace(" ", "")
    return {
        "column": one.measured.column,
        "current_a": one.measured.current,
        "values": len(one.measured.value),
        f"difference_rms_{suffix}": one.rms / factor,
        f"difference_most_{suffix}": float(one.difference[one.worst]) / factor,
        "difference_most_angle_mech_deg": float(one.measured.angle[one.worst]) / DEGREE,
    }


def _measured_at(
    comparisons: Sequence[Comparison], column: str, current: float, angle: float
) -> str:
    for one in comparisons:
        if one.measured.column == column and one.measured.current == current:
            near = np.flatnonzero(np.abs(one.measured.angle - angle) < SAME_ANGLE)
            if near.size:
                return f"{float(one.measured.value[near[0]]) / MEASURED[column][2]:.7g}"
    return ""
