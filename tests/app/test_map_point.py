"""One pair of currents at all positions: raw fields are reciprocal, skew is a mean of its steps."""

import math

import numpy as np
import pytest
from shipped import shipped_model

from lamwright.app.map_grid import MapGrid
from lamwright.app.map_point import MapTask, map_desk, solved_point
from lamwright.postprocess.skew import step_point, turned_back
from lamwright.postprocess.torque import waveform_positions
from lamwright.solver.chains import OperatingPoint
from lamwright.solver.field import solve_point

STEP = 0.2  # A
MIDDLE = (6.5, 10.0)  # A, near rated current and most torque
TOLERANCE = 1e-6  # of Newton's residual: linkages to 1e-8


@pytest.fixture(scope="module")
def model():
    return shipped_model("demo_24s4p_arc", 2.0, TOLERANCE)


@pytest.fixture(scope="module")
def waves(model):
    """Linkages, torque, coenergy (3, 3, 4, n_pos) about the middle, by a single desk."""
    axes = [middle + STEP * np.array([-1.0, 0.0, 1.0]) for middle in MIDDLE]
    grid = MapGrid(*axes, waveform_positions(2, 4))
    desk = map_desk(model, MapTask(grid, (0.0,)))
    rows = [[solved_point(desk, 0, (d, q)).waves for q in range(3)] for d in range(3)]
    return np.array(rows)


def test_raw_linkages_are_reciprocal_at_every_position(waves):
    """D psi_d/d i_q = d psi_q/d i_d by central differences.

    They err by STEP^2/6 of third slopes, 1e-5 H here (halving STEP quarters it), and by 1e-8 of
    0.46 V s over 2 STEP; cross inductances are some 4e-3 H.
    """
    across = (waves[1, 2, 0] - waves[1, 0, 0]) / (2.0 * STEP)
    along = (waves[2, 1, 1] - waves[0, 1, 1]) / (2.0 * STEP)
    assert across == pytest.approx(along, abs=1e-5)
    assert np.abs(across).min() > 2e-3


def test_raw_linkages_are_the_slopes_of_the_coenergy(waves):
    """W'(i + h) - W'(i - h) = 3/2 of psi di by Simpson's rule, whose error goes with h^5."""
    for axis, part in ((0, 0), (1, 1)):
        line = np.moveaxis(waves, axis, 0)[:, 1]
        psi, rise = line[:, part], line[2, 3] - line[0, 3]
        work = 1.5 * STEP / 3.0 * (psi[0] + 4.0 * psi[1] + psi[2])
        assert rise == pytest.approx(work, rel=1e-5)


def test_the_chain_gives_what_single_points_give(model, waves):
    """Foreseen or from zero, the field is the same (1e-6)."""
    position = waveform_positions(2, 4)[2]
    alone = solve_point(model, MIDDLE[0] + STEP, MIDDLE[1] + STEP, float(position))
    found = waves[2, 2, :, 2]
    assert found == pytest.approx(
        [alone.psi_d, alone.psi_q, alone.torque, alone.coenergy], rel=1e-6
    )


def test_skew_is_the_mean_of_its_steps(model):
    """Each step sees the current from its own d axis; linkages are turned back and averaged."""
    offsets = (-math.radians(1.5), math.radians(1.5))
    positions = waveform_positions(2, 3)
    grid = MapGrid(np.array([6.0]), np.array([9.0]), positions)
    desk = map_desk(model, MapTask(grid, offsets, lambda _, fields: np.array([fields[0].torque])))
    record = solved_point(desk, 0, (0, 0))
    rotor = OperatingPoint(6.0, 9.0, float(positions[1]))
    pairs, torques = [], []
    for offset in offsets:
        point = step_point(rotor, offset, 2)
        field = solve_point(model, point.i_d, point.i_q, point.position)
        pairs.append(turned_back(field.psi_d, field.psi_q, -2 * offset))
        torques.append(field.torque)
    assert record.waves[:2, 1] == pytest.approx(np.mean(pairs, axis=0), rel=1e-6)
    assert record.waves[2, 1] == pytest.approx(np.mean(torques), rel=1e-6)
    assert record.harvest == pytest.approx([record.waves[2, 0]], rel=1e-12)
