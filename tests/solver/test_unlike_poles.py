"""A rotor of two unlike poles in the field: where they are alike, one pole says the same."""

from dataclasses import replace

import pytest

from lamwright.app.point import model_of
from lamwright.geometry.cross_section import cross_section
from lamwright.solver.field import solve_point
from lamwright.solver.mesh import mesh_section
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
