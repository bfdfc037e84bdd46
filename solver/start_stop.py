"""Does a body that has yielded settle under a load that comes and goes?

The load is cycled between two factors until nothing flows any more or the flow repeats itself.
    elastic      nothing has flowed, not in the first cycle either
    shakedown    flow ends: by Melan's theorem the residual stress left is the proof, as with it
                 both ends of the cycle are within yield
    alternating  some points flow up and down in every cycle and come back: low-cycle fatigue
    ratcheting   what flows does not come back: the body grows with every cycle
    unsettled    the cycles allowed do not tell the last three apart
Perfectly plastic or with isotropic hardening, which ends every alternating flow in time (real
steel's does not: take perfect plasticity for a verdict). Source: definitions as in Koenig,
Shakedown of Elastic-Plastic Structures (1987), from memory.
Axes: n_elem, n_qp.
"""

from dataclasses import dataclass
from typing import Literal

import numpy as np

from .plastic import LoadStep, PathSettings, load_path
from .plastic_kernel import PlasticBody, PlasticState, virgin
from .return_mapping import dissipation
from .types import FloatArray

Regime = Literal["elastic", "shakedown", "alternating", "ratcheting", "unsettled"]

# Plastic strain of a cycle that counts as none: 0.05 % of the elastic strain at yield.
NO_FLOW = 1e-6
RETURNS = 0.1  # of the flow of a cycle, what may be left at its end if it comes back
STEADY = 0.02  # of the flow of the cycle before, its change if it repeats itself
KEEPS_ON = 0.9  # of the net flow half the cycles ago, if the body keeps growing


@dataclass(frozen=True, slots=True)
class Cycle:
    """One coming and going of the load."""

    flow: float  # largest plastic strain any point gained, up and down counted alike
    net: float  # largest plastic strain that was left of it at the end


@dataclass(frozen=True, slots=True, eq=False)
class StartStop:
    """How a body behaves under a load that comes and goes."""

    regime: Regime
    cycles: tuple[Cycle, ...]
    state: PlasticState  # at the end of the last cycle
    history: tuple[LoadStep, ...]


def start_stop(
    plastic: PlasticBody,
    force: FloatArray,
    high: float,
    low: float = 0.0,
    start: PlasticState | None = None,
    most: int = 12,
    settings: PathSettings | None = None,
) -> StartStop:
    """Cycle the load between the factors `low` and `high` until its flow is known.

    Args:
        plastic: the body.
        force: (n_node, 2), nodal forces in N/m at factor 1.
        high: factor of the load running.
        low: factor at rest.
        start: what the body remembers, e.g. of an overspeed test; virgin by default.
        most: cycles at most.
        settings: how to step.

    Raises:
        NotConverged: there is no equilibrium on the way, as beyond the limit load.
    """
    state = start or virgin(plastic)
    cycles: list[Cycle] = []
    history: list[LoadStep] = []
    for _ in range(most):
        path = load_path(plastic, force, (high, low), settings, state)
        after = path.stops[-1]
        cycles.append(_cycle(plastic, state, after))
        history += path.history
        state = after
        # Elastic on the way down: the next way up retraces it, and so on for ever.
        is_settled = not np.any(after.hardened > path.stops[0].hardened)
        if is_settled or cycles[-1].flow <= NO_FLOW or _comes_back(cycles):
            break
    return StartStop(_regime(cycles, state, is_settled), tuple(cycles), state, tuple(history))


def _cycle(plastic: PlasticBody, before: PlasticState, after: PlasticState) -> Cycle:
    left = dissipation(after.plastic_strain - before.plastic_strain, plastic.criterion)
    return Cycle(float((after.hardened - before.hardened).max()), float(left.max()))


def _comes_back(cycles: list[Cycle]) -> bool:
    """Whether the flow of the last cycle was undone in it and was that of the cycle before."""
    if len(cycles) < 2:
        return False
    before, last = cycles[-2:]
    is_steady = abs(last.flow - before.flow) <= STEADY * last.flow
    return is_steady and last.net <= RETURNS * last.flow


def _regime(cycles: list[Cycle], state: PlasticState, is_settled: bool) -> Regime:
    last = cycles[-1]
    if not state.hardened.any():
        return "elastic"
    if is_settled or last.flow <= NO_FLOW:
        return "shakedown"
    if _comes_back(cycles):
        return "alternating"
    middle = cycles[(len(cycles) - 1) // 2]
    return "ratcheting" if last.net >= KEEPS_ON * middle.net else "unsettled"
