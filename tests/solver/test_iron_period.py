"""The whole period of the flux density in steel, put together from 60 electrical degrees.

Held to the same field solved at the other positions: equal to the solver's tolerance.
"""

import numpy as np
import pytest

from lamwright.app.point import model_of
from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design_file import read_machine
from lamwright.solver.field import solve_point
from lamwright.solver.iron_period import (
    copper_points,
    flux_at,
    like_points,
    steel_points,
    whole_period,
)
from lamwright.solver.mesh import mesh_section
from lamwright.solver.mesh_plan import MeshSettings
from tests.shipped import DESIGNS, shipped, shipped_model

GALLERY = DESIGNS[0].parent / "gallery"

# Over 60 electrical degrees; none half an edge of the turning circle off, where rounding would
# decide to which side the gap is sheared.
POSITIONS = 5
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
    for number in (6, 13, 22):
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


@pytest.mark.slow
def test_a_rotor_sees_slow_waves_of_tooth_coils():
    """12 slots, 10 poles: a rotor point sees the same again after 5 steps, 300 degrees.

    The waveform runs on smoothly from its end to its start: no step there is larger than the
    largest elsewhere. After a period of the current its ends would not meet.
    """
    machine = read_machine(GALLERY / "servo_12s10p.toml")
    section = cross_section(machine.design)
    model = model_of(machine, section, mesh_section(section, MeshSettings(scale=2.0)))
    rotor, stator = steel_points(model, 12, section.rotor_period)
    assert (rotor.step.steps, stator.step.steps) == (5, 6)
    step = np.pi / 15.0 / 8
    fields = [solve_point(model, 1.0, 2.0, k * step) for k in range(8)]
    for part in (rotor, stator):
        waves = whole_period(part.step, flux_at(model, part, fields))
        rise = np.sqrt((np.abs(np.roll(waves, -1, axis=0) - waves) ** 2).mean(axis=1))
        assert rise[-1] < 1.05 * rise[:-1].max()


def test_points_alike_are_a_third():
    """Belts of q slots follow each other: the three of a pole see the same, a third is unlike."""
    one, model = shipped("demo_24s4p_arc", 2.0), shipped_model("demo_24s4p_arc", 2.0)
    rotor, stator = steel_points(model, 24, one.section.rotor_period)
    first = like_points(stator.step)
    assert np.unique(first).size * 3 == first.size
    assert stator.area == pytest.approx(stator.area[first], rel=1e-9)
    assert np.array_equal(like_points(rotor.step), np.arange(rotor.area.size))
