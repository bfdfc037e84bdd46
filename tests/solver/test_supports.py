"""Supports by elimination: coupled sides against the whole, rollers, prescribed motion, faults."""

import math

import numpy as np
import pytest

from lamwright.geometry.curves import circle
from lamwright.geometry.section import Region
from lamwright.solver.elastic import centrifugal_force, edge_force, elastic_body, von_mises
from lamwright.solver.isoparametric import boundary_edges
from lamwright.solver.mesh import mesh_regions
from lamwright.solver.stiffness import displacement, internal_force, supported
from lamwright.solver.supports import (
    coupled_sides,
    unsupported,
    with_coupled_sides,
    with_fixed,
    with_radial,
    with_roller,
)
from lamwright.solver.types import PlanarMesh
from tests.plates import (
    NODE_TOL,
    SPEED,
    STEEL,
    at_radius,
    balanced_supports,
    edges_on,
    fine_arcs,
    nodes_on,
    polygon,
    pulled,
    round_hole,
    sector,
    spun,
)


def test_a_coupled_sector_is_a_part_of_the_whole_disc():
    """Six eccentric holes, unlike left and right: no mirror line, so only coupled sides fit.

    The sector against the whole disc, both on their own meshes: growth to 1e-4, peak to 0.5 %.
    """
    angle, rim, turn = math.pi / 3.0, 50e-3, np.exp(1j * math.pi / 3.0)
    spots = [(30e-3 * np.exp(0.3j), 5e-3), (38e-3 * np.exp(0.75j), 3e-3)]
    sizes = fine_arcs(0.5e-3, 3e-3, 5e-3)
    holes = [round_hole(complex(z), r) for z, r in spots]
    part = spun(sector(10e-3, rim, angle, holes), angle, sizes)
    every = [round_hole(complex(z * turn**k), r) for k in range(6) for z, r in spots]
    region = Region("disc", "rotor_steel", circle(0j, rim), (*every, round_hole(0j, 10e-3)))
    mesh = mesh_regions([region], sizes)
    spin = centrifugal_force(elastic_body(mesh, STEEL), SPEED)
    whole = pulled(mesh, balanced_supports(rim), [], extra=spin)
    # The whole is held at a rim point; its growth is seen from the bore's middle, which moves.
    place = whole.places
    bore = nodes_on(mesh, at_radius(10e-3))
    drift = whole.moved[bore].mean(axis=0) @ np.array([1.0, 1.0j])
    edge = nodes_on(mesh, at_radius(rim))
    moved = whole.moved @ np.array([1.0, 1.0j]) - drift
    growth = ((moved * np.conj(place)).real / rim)[edge].max()
    part_edge = nodes_on(part.body.mesh, at_radius(rim))
    part_growth = np.sum(part.moved * part.body.mesh.nodes, axis=1)[part_edge].max() / rim
    assert part_growth == pytest.approx(growth, rel=1e-4)
    peaks = [von_mises(field.stress).max() for field in (part, whole)]
    assert peaks[0] == pytest.approx(peaks[1], rel=5e-3)


def test_the_coupling_is_met_and_its_forces_are_in_balance():
    """U on the second side is u on the first turned; so are the forces, with the opposite sign.

    Rounding of the solver: 1e-9 of the largest.
    """
    angle = 2.0 * math.pi / 5.0
    field = spun(sector(10e-3, 50e-3, angle, [round_hole(30e-3 * np.exp(0.4j), 4e-3)]), angle,
                 fine_arcs(1e-3, 4e-3, 10e-3))  # fmt: skip
    mesh = field.body.mesh
    sides = coupled_sides(mesh, angle)
    turn = np.exp(1j * angle)
    moved = field.moved @ np.array([1.0, 1.0j])
    assert moved[sides.second] == pytest.approx(moved[sides.first] * turn, abs=1e-15)
    force = internal_force(field.body, field.moved) - centrifugal_force(field.body, SPEED)
    f = force @ np.array([1.0, 1.0j])
    largest = np.abs(centrifugal_force(field.body, SPEED)).max()
    assert np.abs(f[sides.first] + f[sides.second] / turn).max() < 1e-6 * largest
    inside = np.setdiff1d(np.arange(len(f)), np.concatenate([sides.first, sides.second]))
    assert np.abs(f[inside]).max() < 1e-6 * largest


def test_rollers_on_slanted_lines_give_the_coupled_solution():
    """A sector with a mirror line may be solved on half of it: rollers on 0 and 36 degrees.

    Against coupled sides over 72 degrees, on different meshes: growth to 1e-4.
    """
    half = math.pi / 5.0
    mesh = mesh_regions([sector(10e-3, 50e-3, half)], fine_arcs(1e-3, 3e-3, 10e-3))
    body = elastic_body(mesh, STEEL)
    supports = unsupported(mesh)
    for angle in (0.0, half):
        turned = (mesh.nodes @ np.array([1.0, 1.0j])) * np.exp(-1j * angle)
        line = np.flatnonzero(np.abs(turned.imag) < NODE_TOL)
        supports = with_roller(supports, line, 1j * np.exp(1j * angle))
    moved = displacement(body, centrifugal_force(body, SPEED), supports)
    rim = nodes_on(mesh, at_radius(50e-3))
    growth = np.sum(moved * mesh.nodes, axis=1)[rim] / 50e-3
    coupled = spun(sector(10e-3, 50e-3, 2 * half), 2 * half, fine_arcs(1e-3, 3e-3, 10e-3))
    assert growth == pytest.approx(np.full(len(rim), coupled.outward(50e-3)), rel=1e-4)


def test_prescribed_motion_is_met_and_its_dual_is_not_moved():
    """Bore moved 5 um outward: met to rounding; without `held` it stays where it was."""
    angle = 0.5 * math.pi
    mesh = mesh_regions([sector(15e-3, 50e-3, angle)], lambda edge: 5e-3, turn_sides=angle)
    sides = coupled_sides(mesh, angle)
    bore = nodes_on(mesh, at_radius(15e-3))
    supports = with_coupled_sides(with_radial(unsupported(mesh), mesh, bore, 5e-6), mesh, sides)
    body = supported(elastic_body(mesh, STEEL), with_fixed(supports, sides.first[:1], 1))
    pull = centrifugal_force(body.body, SPEED)
    for held, expected in ((True, 5e-6), (False, 0.0)):
        moved = body.displacement(pull, held=held)
        outward = np.sum(moved * mesh.nodes, axis=1)[bore] / 15e-3
        assert outward == pytest.approx(np.full(len(bore), expected), abs=1e-18)
    # Superposition: the difference is the motion alone.
    alone = body.displacement(np.zeros_like(pull))
    both = body.displacement(pull) - body.displacement(pull, held=False)
    assert both == pytest.approx(alone, abs=1e-9 * np.abs(alone).max())


def test_reactions_balance_the_load():
    """A cantilever under its end load: the wall's forces are minus the load, rounding only."""
    mesh = mesh_regions(
        [Region("bar", "rotor_steel", polygon(0j, 0.1 + 0j, 0.1 + 0.01j, 0.01j))],
        lambda edge: 5e-3,
    )
    body = elastic_body(mesh, STEEL)
    wall = np.flatnonzero(np.abs(mesh.nodes[:, 0]) < NODE_TOL)
    supports = with_fixed(with_fixed(unsupported(mesh), wall, 0), wall, 1)
    end = edges_on(mesh, lambda z: np.abs(z.real - 0.1) < NODE_TOL)
    load = edge_force(mesh, end, lambda points, normals: np.tile([0.0, -1e5], (len(points), 1)))
    reaction = internal_force(body, displacement(body, load, supports)) - load
    assert reaction[wall].sum(axis=0) == pytest.approx([0.0, 1e3], rel=1e-8, abs=1e-5)
    assert len(boundary_edges(mesh)) > len(end)


def square() -> PlanarMesh:
    """A square of 1 m."""
    region = Region("bar", "rotor_steel", polygon(0j, 1 + 0j, 1 + 1j, 1j))
    return mesh_regions([region], lambda edge: 0.5)


def test_a_loose_body_is_refused():
    """Held along x only, along x and y at one node, or in a ring that may turn: all refused."""
    mesh = square()
    corner = np.array([0])
    along_x = with_fixed(unsupported(mesh), np.array([0, 1, 2]), 0)
    hinged = with_fixed(with_fixed(unsupported(mesh), corner, 0), corner, 1)
    for supports in (unsupported(mesh), along_x, hinged):
        with pytest.raises(ValueError, match="rigid motion"):
            supported(elastic_body(mesh, STEEL), supports)
    ring = mesh_regions([sector(10e-3, 20e-3, 1.0)], lambda edge: 3e-3, turn_sides=1.0)
    sides = coupled_sides(ring, 1.0)
    with pytest.raises(ValueError, match="rigid motion"):
        supported(elastic_body(ring, STEEL), with_coupled_sides(unsupported(ring), ring, sides))


def test_unlike_sides_are_refused():
    """A mesh whose sides carry different nodes cannot be coupled."""
    mesh = mesh_regions(
        [sector(10e-3, 20e-3, 1.0)], lambda edge: 1e-3 if abs(edge.start.imag) < 1e-9 else 3e-3
    )
    with pytest.raises(ValueError, match="do not carry the same nodes"):
        coupled_sides(mesh, 1.0)
