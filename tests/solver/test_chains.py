"""Chains of operating points: the same answers as one by one, in fewer steps."""

import math

import pytest
from shipped import shipped_model

from lamwright.solver.chains import OperatingPoint, solve_chain
from lamwright.solver.field import MagneticModel, solve_point
from lamwright.solver.types import FieldSolution


@pytest.fixture(scope="module")
def model() -> MagneticModel:
    return shipped_model("demo_24s4p_arc", 1.6, 1e-7)


TURNING = [OperatingPoint(7.0, 10.0, math.radians(0.5 * k)) for k in range(6)]
RISING = [OperatingPoint(2.0 * k, 3.0 * k, 0.1) for k in range(1, 7)]
# Nothing a start could be extrapolated along: currents and angle jump, a point comes twice.
JUMPING = [OperatingPoint(12.0, 0.0, 0.0), OperatingPoint(0.0, 12.0, 0.7)]
JUMPING += [OperatingPoint(0.0, 12.0, 0.7), OperatingPoint(0.0, 0.0, 0.7), RISING[3]]


@pytest.mark.parametrize("points", [TURNING, RISING, JUMPING], ids=["turn", "rise", "jump"])
def test_chain_gives_the_answers_of_single_points(
    model: MagneticModel, points: list[OperatingPoint]
) -> None:
    """The energy has one minimum: starts change the number of steps, not the field (1e-6)."""
    for point, solution in zip(points, solve_chain(model, points), strict=True):
        alone = solve_point(model, point.i_d, point.i_q, point.position)
        assert (solution.i_d, solution.i_q) == (point.i_d, point.i_q)
        assert solution.position == point.position
        assert solution.torque == pytest.approx(alone.torque, rel=1e-6, abs=1e-6)
        assert solution.psi_abc == pytest.approx(alone.psi_abc, rel=1e-6, abs=1e-8)


@pytest.mark.parametrize("points", [TURNING, RISING], ids=["turn", "rise"])
def test_chain_takes_fewer_steps(model: MagneticModel, points: list[OperatingPoint]) -> None:
    """From the third point on at most two thirds of the steps from zero."""
    warm = sum(s.newton.steps for s in solve_chain(model, points)[2:])
    cold = sum(solve_point(model, p.i_d, p.i_q, p.position).newton.steps for p in points[2:])
    assert warm <= 2 * cold / 3


def test_each_point_is_reported_as_it_is_done(model: MagneticModel) -> None:
    """Index and solution, in order, so that a caller can show progress and keep what it has."""
    seen: list[tuple[int, FieldSolution]] = []
    solutions = solve_chain(model, TURNING[:3], lambda k, solution: seen.append((k, solution)))
    assert [k for k, _ in seen] == [0, 1, 2]
    assert [solution for _, solution in seen] == list(solutions)


def test_chain_starts_from_a_given_solution(model: MagneticModel) -> None:
    """Chains cut from one waveform may share a first solution."""
    first = solve_point(model, 7.0, 10.0, -math.radians(0.5))
    warm = solve_chain(model, TURNING[:1], start=first)
    cold = solve_chain(model, TURNING[:1])
    assert warm[0].newton.steps < cold[0].newton.steps
    assert warm[0].torque == pytest.approx(cold[0].torque, rel=1e-6)


def test_no_points_no_solutions(model: MagneticModel) -> None:
    """An empty chain is not an error."""
    assert solve_chain(model, []) == ()
