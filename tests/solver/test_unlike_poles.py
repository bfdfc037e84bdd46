"""Unlike poles, and keyways in some poles only: where they are alike, one pole says the same."""

from dataclasses import replace

import numpy as np
import pytest

from lamwright.app.point import model_of
from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.design_details import HoleDesign, KeywayDesign
from lamwright.solver.field import solve_point
from lamwright.solver.mesh import mesh_section
from lamwright.solver.rotor_stress import rotor_stress
from tests.shipped import shipped

FIGURES = ("psi_d", "psi_q", "torque", "coenergy")


def test_every_second_pole_stated_alike_changes_nothing():
    """24/4 demo: two periodic poles against one antiperiodic pole on the same mesh, unfolded.

    The discrete fields are the same one, so Newton's residual (1e-4, some 1e-6 of a figure) is
    all that may differ; measured 1e-12.
    """
    machine = shipped("demo_24s4p_arc").machine
    rotor = machine.design.rotor
    alike = rotor.model_copy(update={"alternate_barrier": rotor.barrier})
    fields = []
    for part, poles in ((rotor, 1), (alike, 2)):
        own = replace(machine, design=machine.design.model_copy(update={"rotor": part}))
        section = cross_section(own.design)
        assert section.sector_poles == poles
        model = model_of(own, section, mesh_section(section))
        fields.append(solve_point(model, 8.0, 8.0, 0.03))
    for name in FIGURES:
        one, two = (getattr(field, name) for field in fields)
        assert two == pytest.approx(one, rel=1e-6)


def test_one_keyway_in_the_bore_is_nearly_one_in_each_pole():
    """24/4 demo, a steel key in one pole or in all four: the shaft's flux is small.

    So is what the groove does to ribs far outside: 1 % asked, measured 3e-5 of the field's
    figures and 0.5 % of the peak stress, whose own error is estimated at 2 % and 1 %.
    """
    machine = shipped("demo_24s4p_arc").machine
    fields, peaks = [], []
    for count in (4, 1):
        key = KeywayDesign(count=count, width_mm=4.0, depth_mm=2.0, key_relative_permeability=500.0)
        rotor = machine.design.rotor.model_copy(update={"keyway": key})
        own = replace(machine, design=machine.design.model_copy(update={"rotor": rotor}))
        section = cross_section(own.design)
        assert section.sector_poles == section.rotor_period == 4 // count
        fields.append(solve_point(model_of(own, section, mesh_section(section)), 8.0, 8.0, 0.03))
        peaks.append(rotor_stress(section, own.rotor_steel, 750.0).peak)
    for name in FIGURES:
        one, four = (getattr(field, name) for field in reversed(fields))
        assert one == pytest.approx(four, rel=0.01)
        assert one != four
    assert peaks[1] == pytest.approx(peaks[0], rel=0.01)


def test_half_a_hole_on_either_side_of_two_unlike_poles_is_meshed():
    """Nodes of both sides match one to one; the arc of half a hole is no part of a side.

    Two poles with a key in the first; their sides are one line through the shaft, so the nodes'
    radii are compared. In stress all ribs of both poles are there.
    """
    machine = shipped("demo_24s4p_arc").machine
    key = KeywayDesign(count=2, width_mm=4.0, depth_mm=2.0)
    hole = HoleDesign(place_radius_mm=25.0, angle_deg=45.0, diameter_mm=4.0)
    rotor = machine.design.rotor.model_copy(update={"keyway": key, "hole": (hole,)})
    section = cross_section(machine.design.model_copy(update={"rotor": rotor}))
    mesh = mesh_section(section).rotor
    places = mesh.nodes @ np.array([1.0, 1.0j])
    right = np.sort(places[(abs(places.imag) < 1e-9) & (places.real > 1e-9)].real)
    left = np.sort(-places[(abs(places.imag) < 1e-9) & (places.real < -1e-9)].real)
    assert right.size > 30
    assert right == pytest.approx(left, abs=1e-9)
    stress = rotor_stress(section, machine.rotor_steel, 750.0)
    assert stress.rib_loads.shape == (12, 3)
