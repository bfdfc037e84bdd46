"""What the adjoint knows of a design for the polish of a search: figures and their slopes by key.

`slopes` tells torque, saliency, linkages and the ribs' peak; power factor and voltage follow from
the linkages, the yield margin from the peak. All are relative slopes, so that a figure of a quick
evaluation may take them: d log(figure) by mm or degree. Of other figures, as ripple or mass, the
adjoint says nothing.
An axis of the search may be a key of the design, or a number by which all barriers are laid out
anew: what it moves is found by reading the designs beside it, no field is solved for that.
"""

import math
from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from lamwright.geometry.errors import LamwrightError

if TYPE_CHECKING:
    from lamwright.geometry.design import MachineDesign
    from lamwright.postprocess.slopes import SlopeTable

    from .search_space import SearchSpace
    from .study import Study, Values
    from .study_task import Task

# Figures of a verdict that get slopes.
KNOWN_FIGURES = (
    "torque_nm",
    "saliency_ratio",
    "psi_d_vs",
    "psi_q_vs",
    "power_factor",
    "terminal_voltage_v",
    "rib_stress_peak_mpa",
    "lamination_stress_peak_mpa",
    "yield_margin",
)
# Of an axis, to each side; a layout rounds to 0.01 mm and 0.01 degrees, which must be small to it.
SIDE = 0.02
LINKAGE_STEP = 1e-5  # relative, for what follows from the linkages in closed form


@dataclass(frozen=True, slots=True)
class DesignSlopes:
    """Relative slopes of figures by the keys of one design, or why there are none."""

    by_figure: Mapping[str, Mapping[str, float]] = field(default_factory=dict)  # per mm or deg
    refusal: str = ""  # one line


def design_slopes(task: "Task") -> DesignSlopes:
    """Slopes of a task's design; a design that has none says why. Some 5 s of a core."""
    from .lamination import section_of
    from .slopes import slopes_of
    from .study_machine import machine_of

    try:
        machine = machine_of(task.design_name, task.design_text, task.cards, task.drawings)
        table = slopes_of(machine, section_of(machine))
    except LamwrightError as error:
        return DesignSlopes(refusal=" ".join(str(error).split()))
    return DesignSlopes(relative_slopes(machine.design, table))


def relative_slopes(design: "MachineDesign", table: "SlopeTable") -> dict[str, dict[str, float]]:
    """Relative slopes of `KNOWN_FIGURES` by key, per mm or degree."""
    at = table.figures.shown()
    slopes: dict[str, dict[str, float]] = {figure: {} for figure in KNOWN_FIGURES}
    by_linkage = _by_linkage(design, table)
    for row in table.rows:
        own = {name: change / row.step for name, change in row.change.shown().items()}
        for figure, value in own.items():
            slopes[figure][row.key] = value / at[figure]
        peak = slopes["rib_stress_peak_mpa"][row.key]
        slopes["lamination_stress_peak_mpa"][row.key] = peak
        slopes["yield_margin"][row.key] = -peak
        for figure, (by_d, by_q) in by_linkage.items():
            d, q = slopes["psi_d_vs"][row.key], slopes["psi_q_vs"][row.key]
            slopes[figure][row.key] = by_d * d + by_q * q
    return slopes


def _by_linkage(design: "MachineDesign", table: "SlopeTable") -> dict[str, tuple[float, float]]:
    """Relative slopes by psi_d and psi_q, d log(figure) / d log(psi), at the terminals."""
    from lamwright.geometry.winding import end_winding_inductance, phase_resistance
    from lamwright.postprocess.operating import terminal_state

    speed = design.duty.rated_speed_rpm * math.pi / 30.0
    resistance, inductance = phase_resistance(design), end_winding_inductance(design)

    def figures(d: float, q: float) -> dict[str, float]:
        state = terminal_state(
            i_d=table.i_d,
            i_q=table.i_q,
            psi_d=d * table.figures.psi_d,
            psi_q=q * table.figures.psi_q,
            omega_e=design.pole_pairs * speed,
            resistance=resistance,
            end_inductance=inductance,
        )
        return {"power_factor": state.power_factor, "terminal_voltage_v": state.line_voltage}

    h = LINKAGE_STEP
    d_up, d_down, q_up, q_down = (
        figures(1.0 + d, 1.0 + q) for d, q in ((h, 0.0), (-h, 0.0), (0.0, h), (0.0, -h))
    )
    return {
        name: (
            math.log(d_up[name] / d_down[name]) / (2.0 * h),
            math.log(q_up[name] / q_down[name]) / (2.0 * h),
        )
        for name in d_up
    }


Motion = Mapping[str, float]  # mm or degrees of each design key, over a whole axis


def axis_motions(study: "Study", space: "SearchSpace", values: "Values") -> list[Motion | None]:
    """What each axis moves at a point: None of axes that are held.

    Held are whole numbers, names and steps, which are the study's own choice, and keys on which no
    length or angle of the outlines depends.
    """
    here = space.place_of(values)
    assert here is not None
    found: list[Motion | None] = []
    for k, axis in enumerate(space.axes):
        side = max(1, round(SIDE * (axis.count - 1)))
        ends = [max(0, here[k] - side), min(axis.count - 1, here[k] + side)]
        if not axis.is_length or ends[0] == ends[1]:
            found.append(None)
            continue
        shapes = []
        for end in (*ends, here[k]):
            shapes.append(_shape(study, {**values, axis.key: axis.value(end)}))
        low, high, middle = shapes
        # Where one side cannot be built, or has other barriers, the other side alone tells.
        if low is None or middle is None or low.keys() != middle.keys():
            low, ends[0] = middle, here[k]
        if high is None or middle is None or high.keys() != middle.keys():
            high, ends[1] = middle, here[k]
        if low is None or high is None or ends[0] == ends[1]:
            found.append(None)
            continue
        share = (ends[1] - ends[0]) / (axis.count - 1)
        motion = {key: (high[key] - low[key]) / share for key in low if high[key] != low[key]}
        found.append(motion or None)
    return found


def _shape(study: "Study", values: "Values") -> dict[str, float] | None:
    """Every length and angle of a design by its key; None where there is no such design."""
    from lamwright.geometry.remedies import value_of
    from lamwright.solver.design_motion import shape_keys

    from .study_machine import machine_of
    from .study_task import task_of

    task = task_of(study, values)
    if task.fault:
        return None
    try:
        design = machine_of(task.design_name, task.design_text, task.cards, task.drawings).design
    except LamwrightError:
        return None
    return {key: value_of(design, key) for key in shape_keys(design)}
