"""Plane stress: the kernel against scikit-fem's plain form, patch tests, loads, convergence."""

import math

import numpy as np
import pytest
import skfem
from scipy.spatial import cKDTree
from skfem.helpers import ddot, eye, sym_grad, trace

from lamwright.geometry.section import Region
from lamwright.solver.elastic import (
    ElasticMaterial,
    centrifugal_force,
    edge_force,
    elastic_body,
    free_strain_force,
    inner_stress,
    node_stress,
    von_mises,
)
from lamwright.solver.isoparametric import boundary_edges
from lamwright.solver.mesh import mesh_regions
from lamwright.solver.refine import circles_of, refined
from lamwright.solver.stiffness import internal_force
from lamwright.solver.supports import coupled_sides
from lamwright.solver.types import PlanarMesh
from tests.plates import SPEED, STEEL, at_radius, nodes_on, polygon, sector, spun_mesh, uniform

NU, E = STEEL.poissons_ratio, STEEL.youngs_modulus


@pytest.fixture(scope="module")
def ring() -> PlanarMesh:
    """A curved mesh: a quarter ring 10..20 mm."""
    return mesh_regions([sector(10e-3, 20e-3, 0.5 * math.pi)], lambda edge: 4e-3)


@skfem.BilinearForm
def plane_stress_form(u, v, _):
    """The readable twin: sigma(u) : epsilon(v), sigma = E/(1-nu^2) ((1-nu) eps + nu tr eps I)."""
    strain = sym_grad(u)
    stress = E / (1 - NU**2) * ((1 - NU) * strain + NU * eye(trace(strain), 2))
    return ddot(stress, sym_grad(v))


def test_stiffness_is_scikit_fems_plain_form_on_curved_elements(ring: PlanarMesh):
    """Same quadrature degree, same map: nodal forces of a random displacement to 1e-11."""
    mesh = skfem.MeshTri2(ring.nodes.T, ring.elements.T, sort_t=False, validate=False)
    basis = skfem.Basis(mesh, skfem.ElementVector(skfem.ElementTriP2()), intorder=4)
    moved = np.random.default_rng(3).normal(size=ring.nodes.shape)
    ours = internal_force(elastic_body(ring, STEEL), moved)
    # Their unknowns by place: two rows, x and y, for vertices and for edges.
    dofs = np.concatenate([basis.nodal_dofs, basis.facet_dofs], axis=1)
    away, node = cKDTree(ring.nodes).query(basis.doflocs[:, dofs[0]].T)
    assert away.max() < 1e-12
    flat = np.empty(basis.N)
    flat[dofs] = moved[node].T
    plain = plane_stress_form.assemble(basis) @ flat
    assert pytest.approx(plain[dofs], abs=1e-11 * np.abs(plain).max()) == ours[node].T


def test_rigid_motion_makes_no_force(ring: PlanarMesh):
    """Two shifts and a small turn: zero to rounding of K times the motion."""
    body = elastic_body(ring, STEEL)
    x, y = ring.nodes.T
    for motion in (np.stack([1 + 0 * x, 0 * x], 1), np.stack([0 * x, 1 + 0 * x], 1),
                   np.stack([-y, x], 1)):  # fmt: skip
        force = internal_force(body, motion)
        assert np.abs(force).max() < 1e-9 * E * np.abs(motion).max()


def test_uniform_strain_is_held_exactly(ring: PlanarMesh):
    """Patch test on curved elements: stresses E, nu of a linear displacement, rounding only."""
    body = elastic_body(ring, STEEL)
    x, y = ring.nodes.T
    moved = np.stack([1e-3 * x + 2e-4 * y, 4e-4 * x - 5e-4 * y], axis=1)
    exx, eyy, gxy = 1e-3, -5e-4, 6e-4
    c = E / (1 - NU**2)
    expected = [c * (exx + NU * eyy), c * (eyy + NU * exx), 0.5 * E / (1 + NU) * gxy]
    for stress in (node_stress(body, moved), inner_stress(body, moved)):
        assert stress == pytest.approx(np.broadcast_to(expected, stress.shape), rel=1e-9)


def test_free_strain_alone_makes_no_stress(ring: PlanarMesh):
    """A body that grows evenly by its free strain is free of stress and force, rounding only."""
    body = elastic_body(ring, STEEL)
    strain, moved = np.full(ring.elements.shape, 1e-3), 1e-3 * ring.nodes
    assert np.abs(node_stress(body, moved, strain)).max() < 1e-9 * E * 1e-3
    force = internal_force(body, moved) - free_strain_force(body, strain)
    assert np.abs(force).max() < 1e-9 * np.abs(free_strain_force(body, strain)).max()


def test_each_region_has_its_own_material():
    """Two halves, one twice as stiff and dense: twice the stress at equal strain, twice the pull.

    Rounding only.
    """
    left = polygon(0j, 1 + 0j, 1 + 1j, 1j)
    right = polygon(1 + 0j, 2 + 0j, 2 + 1j, 1 + 1j)
    mesh = mesh_regions(
        [Region("left", "rotor_steel", left), Region("right", "rotor_steel", right)],
        lambda edge: 0.5,
    )
    hard = ElasticMaterial(2 * E, NU, 2 * STEEL.density)
    body = elastic_body(mesh, [STEEL, hard])
    moved = mesh.nodes * [1e-3, 0.0]
    stress = node_stress(body, moved)[..., 0]
    left_stress, right_stress = (stress[mesh.elements_of(n)] for n in ("left", "right"))
    assert right_stress.min() == pytest.approx(2 * left_stress.max(), rel=1e-9)
    # rho omega^2 (int x over 0..1 + 2 int x over 1..2) = rho omega^2 (0.5 + 3).
    pull = centrifugal_force(body, 10.0)[:, 0].sum()
    assert pull == pytest.approx(STEEL.density * 100.0 * 3.5, rel=1e-12)


def test_edge_force_adds_up_to_traction_times_length(ring: PlanarMesh):
    """A uniform traction on all edges: its resultant is traction times perimeter.

    Perimeter (pi/2)(a + b) + 2 (b - a); a parabola's length through three points of a 15 degree
    arc errs by less than 1e-6.
    """
    force = edge_force(ring, boundary_edges(ring), uniform(2.0, -1.0)).sum(axis=0)
    around = 0.5 * math.pi * 30e-3 + 2 * 10e-3
    assert force == pytest.approx(np.array([2.0, -1.0]) * around, rel=1e-5)


def test_pressure_on_a_closed_edge_has_no_resultant(ring: PlanarMesh):
    """The normal integrates to zero round any closed edge, curved or not: rounding only."""
    force = edge_force(ring, boundary_edges(ring), lambda points, normals: -1e6 * normals)
    assert np.abs(force.sum(axis=0)).max() < 1e-9 * np.abs(force).sum()


def test_von_mises_of_known_states():
    """Uniaxial s, equibiaxial s, pure shear t sqrt 3: exact."""
    states = np.array([[5.0, 0.0, 0.0], [5.0, 5.0, 0.0], [0.0, 0.0, 5.0]])
    assert von_mises(states) == pytest.approx([5.0, 5.0, 5.0 * math.sqrt(3.0)], rel=1e-15)


def test_energy_growth_and_stress_converge_at_their_rates():
    """Spinning ring 15..50 mm: energy errs as h^4, a displacement as h^3, a free edge's stress h^2.

    Of the stress the scatter along the bore, as its errors at single nodes have either sign.
    Energy is int rho omega^2 r u dA; exact values by the closed form of Timoshenko & Goodier,
    art. 32. Rates are means over two halvings of all edges: theory less 0.3.
    """
    a, b, pull = 15e-3, 50e-3, STEEL.density * SPEED**2
    r = np.linspace(a, b, 20_001)
    both, inner = a**2 + b**2, (a * b / r) ** 2
    hoop = pull * (3 + NU) / 8 * (both + inner - (1 + 3 * NU) / (3 + NU) * r**2)
    radial = pull * (3 + NU) / 8 * (both - inner - r**2)
    u = r * (hoop - NU * radial) / E
    exact = 0.5 * math.pi * np.trapezoid(pull * r**2 * u, r)
    region = sector(a, b, 0.5 * math.pi)
    mesh = mesh_regions([region], lambda edge: 8e-3, turn_sides=0.5 * math.pi)
    errors = []
    for _ in range(3):
        field = spun_mesh(mesh, 0.5 * math.pi)
        energy = np.sum(centrifugal_force(field.body, SPEED) * field.moved)
        bore = field.places[nodes_on(mesh, at_radius(a))]
        scatter = [field.polar(complex(z))[1] / hoop[0] - 1.0 for z in bore]
        found = (energy / exact - 1.0, field.outward(b) / u[-1] - 1.0, np.std(scatter))
        errors.append(np.abs(found))
        every = np.arange(len(mesh.elements))
        sides = coupled_sides(mesh, 0.5 * math.pi)
        mesh = refined(mesh, every, circles_of(region.outer.edges), sides)
    rates = 0.5 * np.log2(errors[0] / errors[2])
    assert np.all(rates > [3.7, 2.7, 1.7]), rates
