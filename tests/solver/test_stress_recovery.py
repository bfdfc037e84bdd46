"""Stress at the nodes: exact for uniform states, close on free edges, one across coupled sides."""

import math

import numpy as np
import pytest

from lamwright.geometry.section import Region
from lamwright.solver.elastic import centrifugal_force, elastic_body, node_stress, summed
from lamwright.solver.isoparametric import boundary_edges
from lamwright.solver.mesh import mesh_regions
from lamwright.solver.refine import circles_of, refined
from lamwright.solver.stress_recovery import recovered_stress, stress_defect, turned_stress
from lamwright.solver.supports import coupled_sides
from tests.plates import (
    SPEED,
    STEEL,
    at_radius,
    fine_arcs,
    nodes_on,
    polygon,
    pulled,
    sector,
    spun,
    spun_mesh,
    uniform,
)

QUARTER = 0.5 * math.pi


def test_turned_stress():
    """Tension along x, turned by 90 degrees, is tension along y; by 45, half and half with shear.

    Invariants sx + sy and sx sy - t^2 stay for any angle; rounding only.
    """
    tension = np.array([1.0, 0.0, 0.0])
    assert turned_stress(tension, QUARTER) == pytest.approx([0.0, 1.0, 0.0], abs=1e-15)
    assert turned_stress(tension, 0.5 * QUARTER) == pytest.approx([0.5, 0.5, 0.5], abs=1e-15)
    states = np.random.default_rng(4).normal(size=(50, 3))
    turned = turned_stress(states, 0.7)
    assert turned[:, :2].sum(axis=1) == pytest.approx(states[:, :2].sum(axis=1), abs=1e-14)
    area = [s[:, 0] * s[:, 1] - s[:, 2] ** 2 for s in (states, turned)]
    assert area[1] == pytest.approx(area[0], abs=1e-13)
    assert turned_stress(turned, -0.7) == pytest.approx(states, abs=1e-14)


def test_a_uniform_state_is_recovered_exactly():
    """A pulled strip: the same stress at all nodes, free edges and corners included; 1e-9."""
    region = Region("strip", "rotor_steel", polygon(0j, 2 + 0j, 2 + 1j, 1j))
    mesh = mesh_regions([region], lambda edge: 0.3)
    field = pulled(
        mesh,
        [(lambda z: np.abs(z.real) < 1e-9, 1), (lambda z: np.abs(z.imag) < 1e-9, 1j)],
        [(lambda z: np.abs(z.real - 2.0) < 1e-9, uniform(5e6, 0.0))],
    )
    expected = np.broadcast_to([5e6, 0.0, 0.0], field.stress.shape)
    assert field.stress == pytest.approx(expected, abs=5e6 * 1e-9)
    assert np.all(stress_defect(field.body, field.moved, field.stress) < 1e-9 * 5e6)


def test_free_edges_are_free_and_nearer_to_the_truth_than_the_mean():
    """Spinning ring, coarse mesh: no radial stress on its edges; hoop errs less than the mean's.

    Exact bore hoop 57.130834 MPa (Timoshenko & Goodier, art. 32). A parabola's tangent misses the
    circle's by 1e-3 rad at 15 degree steps, hence 1e-5 of the hoop across the edge.
    """
    field = spun(sector(15e-3, 50e-3, QUARTER), QUARTER, fine_arcs(4e-3, 8e-3, 15e-3))
    mesh = field.body.mesh
    bore = nodes_on(mesh, at_radius(15e-3))
    polar = np.array([field.polar(complex(z)) for z in field.places[bore]])
    assert np.abs(polar[:, [0, 2]]).max() < 1e-5 * polar[:, 1].max()
    values = node_stress(field.body, field.moved)
    count = np.bincount(mesh.elements.ravel(), minlength=len(mesh.nodes))[:, None]
    mean = (summed(mesh.elements, values, len(mesh.nodes)) / count)[bore]
    angle = np.angle(field.places[bore])
    mean_hoop = [turned_stress(s, -a)[1] for s, a in zip(mean, angle, strict=True)]
    error = np.abs(polar[:, 1] - 57.130834e6).max()
    assert error < 0.5 * np.abs(np.array(mean_hoop) - 57.130834e6).max()
    assert error < 0.01 * 57.130834e6


def test_free_strain_is_taken_off_on_free_edges():
    """A heated free ring has no stress: neither inside nor on its edges, where E eps_t alone is."""
    field = spun(
        sector(15e-3, 50e-3, QUARTER), QUARTER, lambda edge: 8e-3, speed=0.0,
        heat=lambda nodes: np.full(len(nodes), 1e-3),
    )  # fmt: skip
    assert np.abs(field.stress).max() < 1e-9 * STEEL.youngs_modulus * 1e-3


def test_partner_nodes_of_coupled_sides_have_one_stress():
    """The same state, turned by the sector's angle; rounding only."""
    field = spun(sector(15e-3, 50e-3, QUARTER), QUARTER, lambda edge: 6e-3)
    sides = coupled_sides(field.body.mesh, QUARTER)
    first = turned_stress(field.stress[sides.first], QUARTER)
    assert field.stress[sides.second] == pytest.approx(first, abs=1e-9 * np.abs(first).max())


def test_without_free_edges_all_is_mean():
    """No free edge given: recovered stress is the plain mean of the elements, exact."""
    region = sector(15e-3, 50e-3, QUARTER)
    field = spun(region, QUARTER, lambda edge: 8e-3)
    mesh, none = field.body.mesh, np.empty((0, 3), dtype=np.int64)
    stress = recovered_stress(field.body, field.moved, none)
    count = np.bincount(mesh.elements.ravel(), minlength=len(mesh.nodes))[:, None]
    total = summed(mesh.elements, node_stress(field.body, field.moved), len(mesh.nodes))
    assert stress == pytest.approx(total / count, abs=1e-6)
    assert len(boundary_edges(mesh)) > 0


def test_the_defect_estimates_the_energy_error():
    """Spinning ring: |u - u_h|^2 = (f . u) - (f . u_h) (Galerkin), against the sum of defects^2.

    f . u of the twice refined mesh stands for the exact one (its own error is 4^-4 of this one's).
    The ratio of estimate to error should be near 1: 0.5 to 2 asked, as the estimate is asymptotic.
    """
    region = sector(15e-3, 50e-3, QUARTER)
    mesh = mesh_regions([region], lambda edge: 6e-3, turn_sides=QUARTER)
    field = spun_mesh(mesh, QUARTER)
    estimate = math.sqrt(np.sum(stress_defect(field.body, field.moved, field.stress) ** 2))
    finer = mesh
    for _ in range(2):
        every = np.arange(len(finer.elements))
        sides = coupled_sides(finer, QUARTER)
        finer = refined(finer, every, circles_of(region.outer.edges), sides)
    best = spun_mesh(finer, QUARTER)
    work = [
        np.sum(centrifugal_force(elastic_body(f.body.mesh, STEEL), SPEED) * f.moved)
        for f in (field, best)
    ]
    error = math.sqrt(work[1] - work[0])
    assert 0.5 < estimate / error < 2.0
