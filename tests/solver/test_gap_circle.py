"""The field read on the turning circle: closed forms of the slotless machine, torque, sectors."""

import math

import numpy as np
import pytest
from annulus import Ring, RingMachine, sheet_model
from shipped import shipped, shipped_model

from lamwright.solver.field import solve_point
from lamwright.solver.gap_circle import (
    circle_field,
    circle_reader,
    circle_torque,
    whole_circle,
)
from lamwright.solver.steel import MU_0, linear_law


@pytest.mark.parametrize("angle_deg", [0.0, 11.3])
def test_sheet_on_the_bore_gives_its_field_on_the_circle(angle_deg: float) -> None:
    """Slotless four-pole machine, rotor and stator of linear steel; by separation of variables.

    H_theta at the circle of radius c between a rotor of mu_r = 1e9 at a (H_theta = 0 there) and
    the bore b with the sheet K: H = K (c^(p-1) - a^2p c^(-p-1)) / (b^(p-1) - a^2p b^(-p-1)), and
    r B_r = p A with A = mu0 H c / p coth(p ln(c / a)). Both within 2e-4 of the crest.
    """
    p, a, b, turns, current = 2, 0.030, 0.034, 100, 10.0
    machine = RingMachine(
        pole_pairs=p,
        rotor=(Ring("rotor_iron", a, 8),),
        bore=b,
        stator=(Ring("stator_iron", 1.2 * b, 3),),
        stack_length=0.1,
        n_circle=48,
    )
    model = sheet_model(machine, linear_law(1e9), linear_law(1e9), turns)
    position = math.radians(angle_deg)
    reader = circle_reader(model)
    field = circle_field(reader, solve_point(model, current, 0.0, position))
    c = machine.circle
    sheet = 1.5 * 0.5 * turns * current / b  # A/m, crest of three phases
    h = (
        sheet
        * (c ** (p - 1) - a ** (2 * p) / c ** (p + 1))
        / (b ** (p - 1) - a ** (2 * p) / b ** (p + 1))
    )
    potential = MU_0 * h * c / p / math.tanh(p * math.log(c / a))
    found = whole_circle(reader, field.potential)
    wave = np.sin(p * (2.0 * math.pi / found.size * np.arange(found.size) - position))
    assert found == pytest.approx(potential * wave, abs=2e-4 * potential)
    # int H N dl of sin: its amplitude by the transform, as `gap_waves` takes it. The stator's
    # steel lies outside the sheet, so that H falls from K to zero in it.
    reaction = whole_circle(reader, field.reaction)
    amplitude = 2.0 * np.abs(np.fft.rfft(reaction)[p]) / (2.0 * math.pi * c)
    assert amplitude == pytest.approx(h, rel=2e-4)


@pytest.mark.parametrize("name", ["demo_24s4p_arc", "demo_36s4p_straight"])
def test_torque_on_the_circle_is_that_of_the_gap(name: str) -> None:
    """The same Maxwell stress on one circle and averaged over the gap, at any angle.

    At the mesh's default fineness both are within 0.1 % of a mesh 2.5 times as fine (measured);
    0.2 % is what checks A8.6 asks of any two circles.
    """
    model, one = shipped_model(name), shipped(name)
    reader = circle_reader(model)
    near = None
    for position in (0.0, 0.0677):
        near = solve_point(model, 0.6 * one.rated, 0.8 * one.rated, position, near)
        torque = model.stack_length * circle_torque(reader, circle_field(reader, near))
        assert torque == pytest.approx(near.torque, rel=2e-3)


def test_reactions_sum_to_the_enclosed_current() -> None:
    """Ampere's law (A8.6): no current inside the circle, so int H_theta dl = 0 round it."""
    model, one = shipped_model("demo_24s4p_arc", 2.5), shipped("demo_24s4p_arc", 2.5)
    reader = circle_reader(model)
    reaction = circle_field(reader, solve_point(model, one.rated, 0.0, 0.1)).reaction
    around = whole_circle(reader, reaction)
    assert around.size == 4 * 2 * model.sector.n_circle
    assert abs(around.sum()) < 1e-9 * np.abs(around).sum()
    # Not by the signs of the sectors alone: half a pole pitch ahead of the crest it is not zero.
    assert abs(reaction.sum()) > 0.1 * np.abs(reaction).sum()
