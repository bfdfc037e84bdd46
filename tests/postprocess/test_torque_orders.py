"""Which orders the torque has at all: solved over a whole electrical period, nothing assumed."""

import math

import numpy as np
import pytest
from gallery_pictures import GALLERY
from shipped import shipped, shipped_model

from lamwright.app.point import model_of
from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design_file import read_machine
from lamwright.solver.chains import OperatingPoint, solve_chain
from lamwright.solver.field import MagneticModel
from lamwright.solver.mesh import mesh_section
from lamwright.solver.mesh_plan import MeshSettings
from lamwright.solver.types import FloatArray

POSITIONS = 30  # 12 el. degrees apart: no multiple of the circle's edges on these meshes


def orders(model: MagneticModel, i_d: float, i_q: float, positions: int) -> FloatArray:
    """Amplitudes of orders 0, 1, 2 ... over the mean, from positions over 360 el. degrees."""
    step = 2.0 * math.pi / positions / model.sector.pole_pairs
    points = [OperatingPoint(i_d, i_q, k * step) for k in range(positions)]
    torque = np.array([field.torque for field in solve_chain(model, points)])
    return np.asarray(2.0 * np.abs(np.fft.rfft(torque)) / positions / torque.mean())


def test_an_integer_slot_machine_has_multiples_of_six_alone() -> None:
    """24/4 demo at 1.2 times rated current over 360 el. degrees (checks B5).

    30 positions fold multiples of 6 on multiples of 6; of the others each is asked to be below
    0.1 % of the mean on a mesh 2.5 times as coarse as usual. Measured 1e-7: the mesh repeats every
    60 degrees as the machine does. The largest multiple of 6 is over 2 %.
    """
    model, one = shipped_model("demo_24s4p_arc", 2.5), shipped("demo_24s4p_arc", 2.5)
    content = orders(model, 0.65 * one.rated, one.rated, POSITIONS)
    order = np.arange(content.size)
    assert content[order % 6 != 0].max() < 1e-3
    assert content[6::6].max() > 0.02


@pytest.mark.slow
def test_a_mesh_that_does_not_repeat_has_them_alone_too() -> None:
    """27 slots and 6 poles: 60 degrees later the rotor meets other slots on another mesh.

    Others than multiples of 6 below 0.3 % of the mean, as the issue asks of whole q.
    """
    machine = read_machine(GALLERY / "lift_27s6p.toml")
    section = cross_section(machine.design)
    model = model_of(machine, section, mesh_section(section, MeshSettings(scale=1.5)))
    rated = machine.design.duty.rated_current_a
    content = orders(model, 0.6 * rated, 0.8 * rated, POSITIONS)
    order = np.arange(content.size)
    assert content[order % 6 != 0].max() < 3e-3


@pytest.mark.slow
@pytest.mark.parametrize(
    ("name", "slot_order"), [("demo_24s4p_arc", 12), ("demo_36s4p_straight", 18)]
)
def test_slot_orders_stand_where_the_slots_are(name: str, slot_order: int) -> None:
    """Of orders 6 to 36 the largest is a multiple of n_s (checks B5)."""
    model, one = shipped_model(name, 1.5), shipped(name, 1.5)
    step = math.pi / 3.0 / one.section.pole_pairs / 18
    points = [OperatingPoint(0.6 * one.rated, 0.8 * one.rated, step * k) for k in range(18)]
    torque = np.array([field.torque for field in solve_chain(model, points)])
    content = np.abs(np.fft.rfft(torque))[1:7]
    assert (6 * (1 + int(content.argmax()))) % slot_order == 0
