"""Waves of the gap: what symmetry continues is what is solved, and what was put in comes out."""

import math
from dataclasses import dataclass, replace
from functools import cache

import numpy as np
import pytest
from annulus import Ring, RingMachine, ring_section, sheet_model
from gallery_pictures import GALLERY
from shipped import shipped, shipped_model

from lamwright.app.point import model_of
from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design_file import read_machine
from lamwright.geometry.section import CrossSection
from lamwright.postprocess.gap_waves import field_on_circle, gap_waves, sixth_turn, whole_period
from lamwright.postprocess.torque import PERIOD_EL, waveform_positions
from lamwright.solver.chains import OperatingPoint, solve_chain
from lamwright.solver.field import MagneticModel, solve_point
from lamwright.solver.gap_circle import (
    CircleField,
    circle_field,
    circle_reader,
    circle_torque,
    whole_circle,
)
from lamwright.solver.mesh import mesh_section
from lamwright.solver.mesh_plan import MeshSettings
from lamwright.solver.steel import linear_law


@dataclass(frozen=True, eq=False)
class Solved:
    """A machine's model and one field a slot-ripple period at the least."""

    section: CrossSection
    model: MagneticModel
    current: float


@cache
def gallery(name: str) -> Solved:
    machine = read_machine(GALLERY / f"{name}.toml")
    section = cross_section(machine.design)
    model = model_of(machine, section, mesh_section(section, MeshSettings(scale=2.5)))
    return Solved(section, model, machine.design.duty.rated_current_a)


@pytest.mark.parametrize("name", ["lift_27s6p", "mill_48s4p", "servo_12s10p"])
def test_the_turned_field_is_the_one_solved_sixty_degrees_on(name: str) -> None:
    """Fractional slots, unlike poles, magnets with tooth coils: positions 20 and 80, 140 el. deg.

    Nothing is assumed of the mesh: the turned machine stands on other nodes. Within 1 % of the
    crest on a mesh 2.5 times as coarse as usual.
    """
    one = gallery(name)
    reader = circle_reader(one.model)
    p = one.section.pole_pairs
    turn = sixth_turn(one.section.slots, 2 * p, one.section.rotor_period)
    fields = []
    near = None
    for k in range(3):
        position = (math.radians(20.0) + k * PERIOD_EL) / p
        near = solve_point(one.model, 0.6 * one.current, 0.8 * one.current, position, near)
        fields.append(circle_field(reader, near))
    first = whole_circle(reader, fields[0].potential)[None]
    continued = whole_period(first, turn, one.section.slots)
    crest = np.abs(first).max()
    for k, field in enumerate(fields):
        solved = whole_circle(reader, field.potential)
        assert np.abs(continued[k] - solved).max() < 0.01 * crest


@pytest.mark.parametrize(
    ("slots", "poles", "period", "expected"),
    [
        (24, 4, 1, (2, 1.0, 6)),  # q = 2: two slots are 60 degrees
        (36, 4, 1, (3, 1.0, 6)),
        (27, 6, 1, (6, -1.0, 6)),  # q = 3/2: six slots are 240 degrees
        (12, 10, 1, (2, -1.0, 6)),  # two slots are 300 degrees, 240 too many: see below
    ],
)
def test_slots_that_stand_for_sixty_degrees(slots, poles, period, expected) -> None:
    """Slots k are 60 degrees and whole poles: k 360 p / slots = 60 + 180 j (by hand)."""
    turn = sixth_turn(slots, poles, period)
    if (slots, poles) != (12, 10):
        assert (turn.slots, turn.sign, turn.sixths) == expected
    angle = turn.slots * 180.0 * poles / slots - 60.0
    poles_ahead, rest = divmod(angle, 180.0)
    assert rest == pytest.approx(0.0, abs=1e-9)
    assert turn.sign == (-1.0 if int(poles_ahead) % 2 else 1.0)


def test_a_machine_without_the_symmetry_is_refused() -> None:
    """15 slots and 4 like poles: 5/4 of a slot would be needed; no multiple is whole."""
    with pytest.raises(ValueError, match="does not repeat every 60 electrical degrees"):
        sixth_turn(10, 4, 2)


def test_slotless_machine_has_one_wave_born_on_each_side() -> None:
    """Sheet of order p on the bore, round rotor: order p at time order 1 and nothing else.

    The rotor's wave is the stator's mirrored at its surface: at infinite permeability
    beta / alpha = (a / c)^2p (H_theta = 0 at a), c the circle's radius. 1e-3.
    """
    p, a, b = 2, 0.030, 0.034
    machine = RingMachine(
        pole_pairs=p,
        rotor=(Ring("rotor_iron", a, 8),),
        bore=b,
        stator=(Ring("stator_iron", 1.2 * b, 3),),
        stack_length=0.1,
        n_circle=48,
    )
    model = sheet_model(machine, linear_law(1e9), linear_law(1e9), 100)
    section = replace(ring_section(machine), slots=12)
    reader = circle_reader(model)
    points = [OperatingPoint(6.0, 8.0, x) for x in waveform_positions(p, 4)]
    fields = [circle_field(reader, s) for s in solve_chain(model, points)]
    waves = gap_waves(reader, fields, section)
    row, column = list(waves.time_orders).index(1.0), p - 1
    alpha, beta = waves.stator_born[row, column], waves.rotor_born[row, column]
    assert beta / alpha == pytest.approx((a / machine.circle) ** (2 * p), rel=1e-3)
    rest = np.abs(waves.stator_born) * waves.space_orders
    assert rest[row, column] > 0.0
    rest[row, column] = 0.0
    assert rest.max() < 1e-3 * p * abs(alpha)


def test_waves_give_the_field_that_they_were_read_from() -> None:
    """24/4 demo: B_r and B_theta from the waves make the torque of the circle, T = r^2 L/mu0 int.

    The sum over evenly spaced points is exact for the product's orders: rounding only.
    """
    model, one = shipped_model("demo_24s4p_arc", 2.5), shipped("demo_24s4p_arc", 2.5)
    reader = circle_reader(model)
    points = [OperatingPoint(7.0, 9.0, x) for x in waveform_positions(2, 3)]
    fields = [circle_field(reader, s) for s in solve_chain(model, points)]
    waves = gap_waves(reader, fields, one.section)
    radial, tangential = field_on_circle(waves, 4 * waves.space_orders[-1])
    torque = 2.0 * math.pi * waves.radius**2 / 4e-7 / math.pi * np.mean(radial * tangential, axis=1)
    expected = [circle_torque(reader, field) for field in fields]
    assert torque[:3] == pytest.approx(expected, rel=1e-9)


def test_positions_that_are_no_period_are_refused() -> None:
    """Half a period would make wrong orders without a sign of it."""
    model, one = shipped_model("demo_24s4p_arc", 2.5), shipped("demo_24s4p_arc", 2.5)
    reader = circle_reader(model)
    zero = np.zeros(reader.node.size)
    fields = [CircleField(x, zero, zero) for x in waveform_positions(2, 6)[:3]]
    with pytest.raises(ValueError, match="not equally spaced over 60 electrical degrees"):
        gap_waves(reader, fields, one.section)
