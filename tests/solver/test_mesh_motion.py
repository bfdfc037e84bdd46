"""A mesh that follows its outline: it goes where the outline goes, and the transpose is one."""

import numpy as np
import pytest
from shipped import NAMES, shipped

from lamwright.geometry.cross_section import cross_section
from lamwright.geometry.remedies import value_of, with_value
from lamwright.solver.design_motion import (
    draw_lamination,
    draw_rotor,
    draw_stator,
    moved_mesh,
    part_motion,
    shape_keys,
    size_motion,
)
from lamwright.solver.gap import circle_nodes
from lamwright.solver.mesh import mesh_lamination, mesh_section
from lamwright.solver.mesh_checks import least_jacobian_share
from lamwright.solver.mesh_motion import edge_table, outline_nodes, places_on
from lamwright.solver.mesh_plan import MeshSettings

COARSE = 1.6


@pytest.mark.parametrize("name", NAMES)
def test_nodes_lie_where_their_shares_say(name):
    """Every node between two regions is found on an edge, to the welding of outlines (1 nm)."""
    one = shipped(name, COARSE)
    for mesh, draw in ((one.sector.rotor, draw_rotor), (one.sector.stator, draw_stator)):
        table = edge_table(draw(one.machine.design))
        on = outline_nodes(mesh, table)
        place = places_on(table, on.edge, on.share)
        assert np.abs(mesh.nodes[on.node] - np.column_stack([place.real, place.imag])).max() < 2e-9


@pytest.mark.parametrize("name", NAMES)
def test_moved_nodes_lie_on_the_moved_outline(name):
    """A step of 1 um or 0.001 degree along a key's motion: off by the outline's curvature only.

    The second derivative of a place by a key is at most some 1 / mm: 1e-6^2 * 1e3 = 1e-9 m.
    """
    one = shipped(name, COARSE)
    design = one.machine.design
    step = 1e-3  # mm or degree
    for mesh, draw in ((one.sector.rotor, draw_rotor), (one.sector.stator, draw_stator)):
        motion = part_motion(mesh, design, draw)
        for key in shape_keys(design):
            velocity = motion.velocity(design, key)
            moved = mesh.nodes[motion.on.node] + step * velocity
            after = edge_table(draw(with_value(design, key, value_of(design, key) + step)))
            place = places_on(after, motion.on.edge, motion.on.share)
            assert np.hypot(*(moved - np.column_stack([place.real, place.imag])).T).max() < 2e-9


@pytest.mark.parametrize("key", ["stator.bore_diameter_mm", "rotor.gap_mm"])
def test_the_circle_stays_even(key):
    """Nodes on the turning circle stay evenly spaced on its new radius, in both parts."""
    one = shipped(NAMES[0], COARSE)
    design, amount = one.machine.design, 0.05
    radius = one.sector.circle_radius + amount * size_motion(design, key).circle_radius
    moved = type(one.sector)(
        rotor=one.sector.rotor,
        stator=one.sector.stator,
        pole_pairs=one.sector.pole_pairs,
        circle_radius=radius,
        n_circle=one.sector.n_circle,
    )
    for mesh, draw in ((one.sector.rotor, draw_rotor), (one.sector.stator, draw_stator)):
        part = part_motion(mesh, design, draw)
        motion = part.extension.extended(part.velocity(design, key))
        circle_nodes(moved_mesh(mesh, motion, amount).nodes, moved)  # raises if uneven


@pytest.mark.parametrize("name", NAMES)
def test_no_element_turns_over(name):
    """A twentieth of a millimetre or a fifth of a degree of any key leaves all elements upright.

    A round end moves by 1.3 mm per degree: half a degree turned one over beside a rib of 0.6 mm.
    """
    one = shipped(name, COARSE)
    design = one.machine.design
    for mesh, draw in ((one.sector.rotor, draw_rotor), (one.sector.stator, draw_stator)):
        part = part_motion(mesh, design, draw)
        for key in shape_keys(design):
            motion = part.extension.extended(part.velocity(design, key))
            for amount in (-0.05, 0.05) if key.endswith("_mm") else (-0.2, 0.2):
                moved = moved_mesh(mesh, motion, amount)
                assert least_jacobian_share(moved.nodes[moved.elements]).min() > 0.05


def test_gathering_is_the_transpose_of_extending():
    """For any g and b, g . E b = E^T g . b to rounding."""
    one = shipped(NAMES[1], COARSE)
    part = part_motion(one.sector.rotor, one.machine.design, draw_rotor)
    rng = np.random.default_rng(4)
    g = rng.normal(size=one.sector.rotor.nodes.shape)
    b = rng.normal(size=(part.on.node.size, 2))
    forward = float(np.sum(g * part.extension.extended(b)))
    assert float(np.sum(part.extension.gathered(g) * b)) == pytest.approx(forward, rel=1e-10)


def test_an_extension_carries_a_shift_exactly():
    """An outline that is shifted shifts the mesh: rows of a Laplace matrix sum to nothing."""
    one = shipped(NAMES[0], COARSE)
    mesh = mesh_lamination(one.section)
    part = part_motion(mesh, one.machine.design, draw_lamination)
    motion = part.extension.extended(np.tile([0.3, -0.2], (part.on.node.size, 1)))
    assert motion == pytest.approx(np.tile([0.3, -0.2], (len(mesh.nodes), 1)), rel=1e-9)


def test_an_outline_that_changes_in_kind_is_told():
    """A slot corner of radius 0 has no fillet: beside it the outline has other edges."""
    key = "stator.slot_corner_radius_mm"
    design = with_value(shipped(NAMES[0], COARSE).machine.design, key, 0.0)
    mesh = mesh_section(cross_section(design), MeshSettings(scale=2.0)).stator
    part = part_motion(mesh, design, draw_stator)
    with pytest.raises(ValueError, match=r"slot_corner_radius_mm = 0: the outline is another one"):
        part.velocity(design, key)


def test_every_length_and_angle_is_a_key():
    """Those of stator, rotor and barriers; none of counts, currents or names."""
    keys = shape_keys(shipped("demo_36s4p_straight", COARSE).machine.design)
    assert "stator.wedge_angle_deg" in keys
    assert "rotor.barrier[3].radial_rib_offset_mm" in keys
    assert "rotor.barrier[2].arm_angle_deg" in keys  # acts by its default
    assert "rotor.barrier[1].radial_rib_mm" not in keys  # the first has no radial rib
    assert "rotor.barrier[1].fillet_mm" not in keys
    assert not [key for key in keys if "slots" in key or "radial_ribs" in key]
    assert len(keys) == len(set(keys))
