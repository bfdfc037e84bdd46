"""Chains of operating points: a map's mean cost, and growth with points and unknowns."""

import math
from functools import partial

import numpy as np

from lamwright.solver.chains import OperatingPoint, solve_chain
from lamwright.solver.model import MagneticModel

from .ours import case, emptied, point
from .timing import Notes, growth_exponent, seconds
from .workload import Workload

PERIOD_EL = math.pi / 3.0  # rad; torque repeats after it
STEP_EL = math.radians(2.0)  # between points of a chain that turns


def map_point_ms(work: Workload, notes: Notes) -> dict[str, float]:
    """Mean time of a point of a map of currents at several positions, one process.

    Some rows of the map's grid, to and fro, a chain for each position; symbolic analyses included.
    """
    ours = case(work.scale)
    model = emptied(ours.model)
    peak = ours.machine.design.duty.rated_current_a
    values = np.linspace(0.0, peak, work.map_side + 1)[1:]
    rows = values[np.linspace(0, values.size - 1, work.map_rows + 2).astype(int)[1:-1]]
    grid = [
        (i_d, i_q) for k, i_q in enumerate(rows) for i_d in (values if k % 2 == 0 else values[::-1])
    ]
    step = PERIOD_EL / (ours.section.pole_pairs * work.map_positions)
    times = []
    for k in range(work.map_positions):
        chain = [OperatingPoint(float(d), float(q), k * step) for d, q in grid]
        times.append(1e3 * seconds(partial(solve_chain, model, chain)) / len(chain))
    notes.tell("time a point, by position", times, "ms")
    return {"map_point_ms": float(np.mean(times))}


def growth_exponent_points(work: Workload, notes: Notes) -> dict[str, float]:
    """Exponent of the time of a chain over its number of positions."""
    ours = case(work.scale)
    times = np.array(
        [
            [_chain_seconds(emptied(ours.model), count) for count in work.chain_lengths]
            for _ in range(work.growth_rounds)
        ]
    )
    for count, column in zip(work.chain_lengths, times.T, strict=True):
        notes.tell(f"chain of {count}", column, "s")
    exponent = growth_exponent(work.chain_lengths, np.median(times, axis=0))
    return {"growth_exponent_points": exponent}


def growth_exponent_unknowns(work: Workload, notes: Notes) -> dict[str, float]:
    """Exponent of the time of an operating point from nothing over the number of unknowns."""
    gamma = work.current_angles[len(work.current_angles) // 2]
    cases = [case(scale) for scale in work.growth_scales]
    unknowns = [ours.unknowns for ours in cases]
    first = [seconds(partial(point, ours, gamma)) for ours in cases]  # with its analysis
    times = np.array(
        [
            [seconds(partial(point, ours, gamma)) for ours in cases]
            for _ in range(work.growth_rounds)
        ]
    )
    for k, ours in enumerate(cases):
        steps = point(ours, gamma).newton.steps
        notes.tell(
            f"{unknowns[k]} unknowns, {steps} steps, first time {first[k]:.3g} s", times[:, k], "s"
        )
    exponent = growth_exponent(unknowns, np.median(times, axis=0))
    return {"growth_exponent_unknowns": exponent}


def _chain_seconds(model: MagneticModel, count: int) -> float:
    """Time of a chain of positions at rated current, 45 degrees, with a model without factors."""
    i = 8.0
    chain = [OperatingPoint(i, i, k * STEP_EL / model.sector.pole_pairs) for k in range(count)]
    return seconds(partial(solve_chain, model, chain))
