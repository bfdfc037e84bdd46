"""Chains of operating points: the same answers as one by one, in fewer steps."""

import math

import pytest
from shipped import shipped_model

from lamwright.solver.chains import OperatingPoint, fanned, linkage_slope, solve_chain
from lamwright.solver.field import MagneticModel, solve_point
from lamwright.solver.types import FieldSolution


@pytest.fixture(scope="module")
def model() -> MagneticModel:
    return shipped_model("demo_24s4p_arc", 1.6, 1e-7)


TURNING = [OperatingPoint(7.0, 10.0, math.radians(0.5 * k)) for k in range(6)]
RISING = [OperatingPoint(2.0 * k, 3.0 * k, 0.1) for k in range(1, 7)]
# No neighbours: currents and angle jump, a point comes twice, currents are switched off.
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


@pytest.mark.parametrize("direction", [(1.0, 0.0), (0.0, 1.0), (-10.0, 7.0)])
def test_linkage_slope_is_that_of_solutions_beside(
    model: MagneticModel, direction: tuple[float, float]
) -> None:
    """Against central differences of the field itself, saturated, at an uneven position.

    Steps of 1 % of the current leave 1e-4 of curvature, Newton's tolerance of 1e-7 less.
    """
    i_d, i_q, position, step = 7.0, 10.0, 0.123, 0.005
    at = solve_point(model, i_d, i_q, position)
    found = linkage_slope(model, at, *direction)
    after, before = (
        solve_point(model, i_d + s * direction[0], i_q + s * direction[1], position, at)
        for s in (step, -step)
    )
    size = max(abs(value) for value in found)
    for value, name in zip(found, ("psi_d", "psi_q"), strict=True):
        difference = (getattr(after, name) - getattr(before, name)) / (2.0 * step)
        assert value == pytest.approx(difference, abs=1e-3 * size)


def test_mutual_inductance_is_the_same_both_ways(model: MagneticModel) -> None:
    """Reciprocity, d psi_d / d i_q = d psi_q / d i_d: second derivatives of the energy; exact."""
    at = solve_point(model, 7.0, 10.0, 0.123)
    l_d, l_qd = linkage_slope(model, at, 1.0, 0.0)
    l_dq, _ = linkage_slope(model, at, 0.0, 1.0)
    assert l_dq == pytest.approx(l_qd, abs=1e-9 * l_d)


def test_fanned_chains_cover_every_position_once_and_lead_away() -> None:
    """Each position is nearest to its chain's start; each step leads farther from it."""
    positions = [0.1 * k for k in range(30)]
    solved = [0.0, 0.75, 1.5, 2.25]
    chains = fanned(positions, solved)
    assert sorted(k for _, chain in chains for k in chain) == list(range(30))
    lengths = [len(chain) for _, chain in chains]
    assert lengths == sorted(lengths, reverse=True)
    for start, chain in chains:
        away = [positions[k] - solved[start] for k in chain]
        assert [abs(d) for d in away] == sorted(abs(d) for d in away)
        assert len({d < 0.0 for d in away}) == 1
        for k, d in zip(chain, away, strict=True):
            assert abs(d) <= min(abs(positions[k] - other) for other in solved) + 1e-12
