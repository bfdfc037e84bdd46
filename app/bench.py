"""The work on a locked rotor that a process does by itself; every process has one bench."""

from collections.abc import Sequence

import numpy as np

from lamwright.postprocess.locked import Feed
from lamwright.solver.chains import linkage_slope
from lamwright.solver.field import MagneticModel, solve_point
from lamwright.solver.types import FieldSolution, FloatArray

READINGS = 4  # torque in N m, terminal linkage in V s, its slope in H, coenergy in J


class Bench:
    """What a process keeps between its tasks: the magnetic model with its factors."""

    def __init__(self) -> None:
        """An empty bench."""
        self._model: MagneticModel | None = None

    def take_model(self, model: MagneticModel) -> None:
        """Keep the model for the readings to come; its factors are made here."""
        self._model = model

    def readings(
        self, feed: Feed, angles: Sequence[float], currents: Sequence[float]
    ) -> FloatArray:
        """Readings at each angle with each current, (n_angle, n_current, `READINGS`).

        Args:
            feed: how the current is fed.
            angles: mechanical rad of the d axis ahead of the feed's axis, neighbours in a row.
            currents: A.
        """
        assert self._model is not None
        model, pole_pairs = self._model, self._model.sector.pole_pairs
        found = np.empty((len(angles), len(currents), READINGS))
        before: list[FieldSolution | None] = [None] * len(currents)
        for row, angle in zip(found, angles, strict=True):
            position = angle + feed.axis_el / pole_pairs
            for k, current in enumerate(currents):
                i_d, i_q = feed.currents(current, pole_pairs * angle)
                near = before[k] if before[k] is not None else before[k - 1] if k else None
                solution = solve_point(model, i_d, i_q, position, near)
                before[k] = solution
                row[k] = _reading(model, feed, solution, angle)
        return found


def _reading(
    model: MagneticModel, feed: Feed, solution: FieldSolution, angle: float
) -> tuple[float, float, float, float]:
    unit = feed.currents(1.0, model.sector.pole_pairs * angle)
    slopes = linkage_slope(model, solution, *unit)
    # psi_t = 3/2 (psi_d i_d + psi_q i_q) / I, derived: dW' = psi_t dI
    psi = 1.5 * (unit[0] * solution.psi_d + unit[1] * solution.psi_q)
    slope = 1.5 * (unit[0] * slopes[0] + unit[1] * slopes[1])
    return solution.torque, psi, slope, solution.coenergy
