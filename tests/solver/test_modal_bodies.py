"""Rotor and stator laminations as bodies that vibrate: periods, what is held, what is heavier."""

import math

import numpy as np
import pytest

from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.curves import area
from lamwright.solver.mesh import mesh_lamination
from lamwright.solver.mesh_plan import MeshSettings
from lamwright.solver.modal import element_mass, lowest_modes
from lamwright.solver.modal_bodies import rotor_period, stator_period
from tests.outlines import plain_design
from tests.plates import STEEL


@pytest.fixture(scope="module")
def section():
    return cross_section(plain_design())


@pytest.fixture(scope="module")
def rotor_mesh(section):
    return mesh_lamination(section, MeshSettings(scale=2.0))


@pytest.fixture(scope="module")
def stator(section):
    """The bare stator's period and its three lowest modes."""
    period = stator_period(section, STEEL)
    return period, lowest_modes(period, 3)


def test_a_held_bore_raises_what_it_holds(section, rotor_mesh):
    """Rayleigh: a support lowers no mode. Free modes take part in no rigid motion, held ones do.

    Of 4 periods: one pole each.
    """
    free, held = (
        rotor_period(section, rotor_mesh, STEEL, is_held=is_held) for is_held in (False, True)
    )
    assert free.periods == held.periods == 4
    loose, tight = lowest_modes(free, 6), lowest_modes(held, 6)
    oval = [min(m.frequency for m in modes if m.index == 2) for modes in (loose, tight)]
    assert oval[0] < oval[1]
    assert max(m.turned_share + m.shaken_share for m in loose) < 1e-9
    assert max(m.turned_share for m in tight) > 0.3
    bore = np.hypot(*rotor_mesh.nodes.T) < section.shaft_radius + 1e-9
    assert np.abs(tight[0].shape[bore]).max() == 0.0


def test_the_stator_is_one_slot_pitch(section, stator):
    """24 like slots: 24 periods; the iron's mass is that of the drawing's area."""
    period, _ = stator
    assert period.periods == 24
    iron = [r for r in section.stator if r.material == "stator_steel"]
    assert len(iron) == 1
    drawn = area(iron[0].outer) * section.sectors
    mass = 24 * float(element_mass(period.body).sum())
    assert mass == pytest.approx(STEEL.density * drawn, rel=1e-4)


def test_the_stators_ring_turns_oval_first(section, stator):
    """A yoke is a ring: 2, 3, 4 waves in this order, nearly pure.

    The first lies between the yoke loaded with the teeth's mass and the yoke alone, which teeth
    only stiffen at their roots; both by Hoppe 1871, whose ring is thin: 10 % is left for that.
    """
    period, modes = stator
    assert [mode.waves for mode in modes] == [2, 3, 4]
    assert all(mode.wave_share > 0.99 for mode in modes)
    copper = [r for r in section.stator if r.material == "copper"]
    root = max(abs(edge.start) for region in copper for edge in region.outer.edges)
    h = section.stator_outer_radius - root
    mean = section.stator_outer_radius - 0.5 * h
    mass = 24 * float(element_mass(period.body).sum()) / (2.0 * math.pi * mean)  # kg/m^2
    bending = STEEL.youngs_modulus * h**3 / (12.0 * mean**4)
    low, high = (
        math.sqrt(bending / m / 5.0) * 6.0 / (2.0 * math.pi) for m in (mass, STEEL.density * h)
    )
    assert 0.9 * low < modes[0].frequency < 1.1 * high


def test_heavier_teeth_lower_all_modes(section, stator):
    """F falls as mass grows, by less than sqrt(factor), as the yoke is not heavier (Rayleigh)."""
    wound = lowest_modes(stator_period(section, STEEL, 1.5), 3)
    for light, heavy in zip(stator[1], wound, strict=True):
        assert light.frequency / math.sqrt(1.5) < heavy.frequency < light.frequency
