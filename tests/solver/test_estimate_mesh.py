"""Quartered meshes: nested, on the arcs, and second-order fields carried over exactly."""

import math

import numpy as np
import pytest

from lamwright.geometry.section import Region
from lamwright.solver.estimate_mesh import quartered, quartered_sector
from lamwright.solver.isoparametric import element_edges
from lamwright.solver.mesh import mesh_regions
from lamwright.solver.mesh_checks import element_areas, least_jacobian_share
from lamwright.solver.pattern import number_unknowns
from lamwright.solver.refine import circles_of
from lamwright.solver.types import PlanarMesh
from tests.plates import polygon, round_hole, sector
from tests.shipped import NAMES, shipped

ANGLE = math.pi / 3.0
REGION = sector(10e-3, 50e-3, ANGLE, [round_hole(30e-3 * np.exp(0.5j), 6e-3)])
CIRCLES = circles_of(e for path in (REGION.outer, *REGION.holes) for e in path.edges)


@pytest.fixture(scope="module")
def start() -> PlanarMesh:
    """A coarse sector with a hole."""
    return mesh_regions([REGION], lambda edge: 8e-3, turn_sides=ANGLE)


def test_every_element_has_four_children_that_fit(start: PlanarMesh):
    """Nested and conforming: old nodes stay, none twice, an edge has one or two elements."""
    fine = quartered(start, CIRCLES).mesh
    assert len(fine.elements) == 4 * len(start.elements)
    assert np.array_equal(fine.nodes[: len(start.nodes)], start.nodes)
    z = np.round(fine.nodes / 1e-12).astype(np.int64)
    assert len(np.unique(z, axis=0)) == len(fine.nodes)
    assert np.array_equal(np.unique(fine.elements), np.arange(len(fine.nodes)))
    edges = element_edges(fine)
    _, first, back, count = np.unique(
        edges[:, 2], return_index=True, return_inverse=True, return_counts=True
    )
    assert count.max() == 2
    ends = np.sort(edges[:, :2], axis=1)
    assert np.array_equal(ends, ends[first][back])
    assert least_jacobian_share(fine.nodes[fine.elements]).min() > 0.1


def test_children_have_their_parents_area_and_region(start: PlanarMesh):
    """Inside, four children fill their parent: areas agree to rounding where no edge is an arc."""
    fine = quartered(start, CIRCLES).mesh
    children = element_areas(fine).reshape(-1, 4).sum(axis=1)
    straight = np.abs(children / element_areas(start) - 1.0) < 1e-12
    assert straight.mean() > 0.5
    assert np.array_equal(fine.region_of_elem, np.repeat(start.region_of_elem, 4))


def test_the_outline_gets_more_exact_with_the_fourth_power(start: PlanarMesh):
    """A parabola misses an arc's segment by r^2 f^5 / 960 (derived): half the steps, 1/16 in all.

    Rates within 0.1 of four; both meshes are far from rounding (1e-4 and 1e-6 of the area).
    """
    exact = (50e-3**2 - 10e-3**2) * ANGLE / 2.0 - math.pi * 6e-3**2
    once = quartered(start, CIRCLES).mesh
    errors = [abs(element_areas(mesh).sum() - exact) for mesh in (start, once)]
    assert math.log2(errors[0] / errors[1]) == pytest.approx(4.0, abs=0.1)


def test_a_quadratic_is_carried_exactly():
    """Second-order triangles with straight sides hold every quadratic: equal to rounding."""
    plate = Region("plate", "rotor_steel", polygon(0.0, 1.0, 1.0 + 0.7j, 0.2 + 1.0j))
    mesh = mesh_regions([plate], lambda edge: 0.4)
    fine = quartered(mesh, circles_of([]))

    def quadratic(nodes: np.ndarray) -> np.ndarray:
        x, y = nodes.T
        return 1.0 + 2.0 * x - y + 3.0 * x * x - 2.0 * x * y + 0.5 * y * y

    carried = fine.carry @ quadratic(mesh.nodes)
    assert np.abs(carried - quadratic(fine.mesh.nodes)).max() < 1e-13


@pytest.mark.parametrize("name", NAMES)
def test_the_turning_circle_stays_regular(name: str):
    """Twice the edges, equally spaced, sides matching: `number_unknowns` accepts nothing else."""
    one = shipped(name)
    fine, _, _ = quartered_sector(one.sector, one.section)
    numbering = number_unknowns(fine)
    assert numbering.n_ring == 4 * one.sector.n_circle
