"""The whole period of the flux density in steel, put together from 60 electrical degrees.

Held to the same field solved at the other positions: equal to the solver's tolerance.
"""

import numpy as np
import pytest

from lamwright.solver.field import solve_point
from lamwright.solver.iron_period import (
    copper_points,
    flux_at,
    like_points,
    steel_points,
    whole_period,
)
from tests.shipped import shipped, shipped_model

POSITIONS = 4  # over 60 electrical degrees
EXACT = 1e-10  # relative residual of the fields
# T of 2 T: what that residual leaves at the worst point, 1e-11 to 2e-7 measured on five machines
# with whole and fractional q, with and without magnets.
TOLERANCE = 1e-6


def _held_to_solved_positions(name: str) -> None:
    one, model = shipped(name, 2.0), shipped_model(name, 2.0, EXACT)
    slots, period = one.machine.design.stator.slots, one.section.rotor_period
    step = np.pi / 3.0 / one.section.pole_pairs / POSITIONS
    i_d, i_q = 0.5 * one.rated, 0.8 * one.rated
    parts = (*steel_points(model, slots, period), copper_points(model, slots, period))
    fields = [solve_point(model, i_d, i_q, k * step) for k in range(POSITIONS)]
    found = [whole_period(part.step, flux_at(model, part, fields)) for part in parts]
    for number in (5, 11, 18):
        solved = [solve_point(model, i_d, i_q, number * step)]
        for part, waves in zip(parts, found, strict=True):
            assert waves.shape[0] == part.step.steps * POSITIONS
            own = flux_at(model, part, solved)[0]
            assert np.abs(waves[number % waves.shape[0]] - own).max() < TOLERANCE
            assert np.abs(own).max() > 0.01


def test_the_period_is_that_of_the_solved_positions():
    """Whole q, like poles: the stator's field moves on by q slots, the rotor's repeats."""
    _held_to_solved_positions("demo_24s4p_arc")


@pytest.mark.slow
def test_the_period_holds_with_magnets():
    """Two layers, q = 3, magnets."""
    _held_to_solved_positions("demo_36s4p_magnet")


def test_points_alike_are_a_third():
    """Belts of q slots follow each other: the three of a pole see the same, a third is unlike."""
    one, model = shipped("demo_24s4p_arc", 2.0), shipped_model("demo_24s4p_arc", 2.0)
    rotor, stator = steel_points(model, 24, one.section.rotor_period)
    first = like_points(stator.step)
    assert np.unique(first).size * 3 == first.size
    assert stator.area == pytest.approx(stator.area[first], rel=1e-9)
    assert np.array_equal(like_points(rotor.step), np.arange(rotor.area.size))
