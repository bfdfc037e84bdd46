"""Damped Newton on convex energies whose minimum is known."""

from dataclasses import dataclass

import numpy as np
import pytest
from annulus import Ring, RingMachine, sheet_model
from steel_s19 import s19_tabulated

from lamwright.geometry.errors import NotConverged
from lamwright.solver.field import solve_point
from lamwright.solver.newton import NewtonSettings, minimise
from lamwright.solver.steel import linear_law
from lamwright.solver.types import FloatArray


@dataclass(frozen=True)
class Knee:
    """F = sum over components of a curve with a knee: slope soft x, stiff beyond |x| = 1."""

    load: FloatArray
    stiff: float = 1e4

    def residual(self, a: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Gradient, and the point itself as state."""
        beyond = np.maximum(np.abs(a) - 1.0, 0.0)
        return a + self.stiff * np.sign(a) * beyond - self.load, a

    def solve_tangent(self, state: FloatArray, rhs: FloatArray) -> FloatArray:
        """Division by the curvature."""
        return np.asarray(rhs / np.where(np.abs(state) > 1.0, 1.0 + self.stiff, 1.0))

    def minimum(self) -> FloatArray:
        """Where the gradient is zero."""
        soft = np.abs(self.load) <= 1.0
        hard = np.sign(self.load) * (np.abs(self.load) + self.stiff) / (1.0 + self.stiff)
        return np.where(soft, self.load, hard)


def test_quadratic_energy_takes_one_step() -> None:
    """Newton's method is exact on a quadratic; the history has one entry more than steps."""
    problem = Knee(np.array([0.5, -0.3, 0.9]))
    a, _, report = minimise(problem, np.zeros(3), 1.0, NewtonSettings(tolerance=1e-12))
    assert a == pytest.approx(problem.minimum(), abs=1e-14)
    assert report.steps == 1
    assert len(report.history) == 2


@pytest.mark.parametrize("load", [0.99, 1.5, 30.0, 1e4])
def test_knee_is_found_from_zero(load: float) -> None:
    """A slope that jumps by 1e4, where whole Newton steps overshoot 1e4-fold and cycle.

    Harder than steel, whose slope rises smoothly: up to 37 steps measured, 60 allowed.
    """
    rng = np.random.default_rng(7)
    problem = Knee(load * rng.uniform(-1.0, 1.0, size=50))
    scale = float(np.linalg.norm(problem.load))
    a, _, report = minimise(problem, np.zeros(50), scale, NewtonSettings(tolerance=1e-10))
    assert a == pytest.approx(problem.minimum(), rel=1e-8)
    assert report.steps <= 60


def test_failure_carries_its_history() -> None:
    """The caller may report what happened and go on with the next point."""
    problem = Knee(np.linspace(-30.0, 30.0, 50))
    with pytest.raises(NotConverged, match=r"field: residual .* after 2 Newton steps") as caught:
        minimise(problem, np.zeros(50), 1.0, NewtonSettings(tolerance=1e-14, max_steps=2))
    assert len(caught.value.history) == 3
    assert caught.value.exit_code == 3


def test_start_that_is_the_solution_takes_no_step() -> None:
    """No factorisation is spent on a converged start."""
    problem = Knee(np.array([0.5, 2.0]))
    _, _, report = minimise(problem, problem.minimum(), 1.0, NewtonSettings())
    assert report.steps == 0


@pytest.mark.parametrize("current", [0.01, 1.0, 30.0, 1000.0])
def test_saturating_machine_converges_quadratically_from_zero(current: float) -> None:
    """Smooth round machine of S19, to 100 times the current that saturates its yoke.

    The energy is convex, so no current may fail. At the end each residual is below the square
    root of the one before in ratio: order 1.5 at least, 2 in theory away from the curve's knots.
    """
    machine = RingMachine(
        pole_pairs=2,
        rotor=(Ring("rotor_iron", 0.0395, 6),),
        bore=0.040,
        stator=(Ring("stator_iron", 0.052, 8),),
        stack_length=0.1,
        gap_layers=2,
        n_circle=24,
    )
    law = s19_tabulated()
    model = sheet_model(machine, linear_law(1000.0), law, 100)
    solution = solve_point(model, current, 0.5 * current, 0.1)
    history = solution.newton.history
    assert solution.newton.steps <= 20
    if solution.newton.steps > 1:
        assert history[-1] < 30.0 * history[-2] ** 1.5
