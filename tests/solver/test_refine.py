"""Local refinement: conforming, nested, on the arcs, matching on coupled sides, no thin angles."""

import math

import numpy as np
import pytest

from lamwright.geometry.curves import circle
from lamwright.geometry.section import Region
from lamwright.solver.isoparametric import element_edges
from lamwright.solver.mesh import mesh_regions
from lamwright.solver.mesh_checks import element_areas, least_angles, least_jacobian_share
from lamwright.solver.refine import Circles, circles_of, refined
from lamwright.solver.supports import coupled_sides
from lamwright.solver.types import PlanarMesh
from tests.plates import polygon, round_hole, sector

ANGLE = math.pi / 3.0
REGION = sector(10e-3, 50e-3, ANGLE, [round_hole(30e-3 * np.exp(0.5j), 6e-3)])
CIRCLES = circles_of(e for path in (REGION.outer, *REGION.holes) for e in path.edges)


@pytest.fixture(scope="module")
def start() -> PlanarMesh:
    """A coarse sector with a hole."""
    return mesh_regions([REGION], lambda edge: 8e-3, turn_sides=ANGLE)


def marked_near(mesh: PlanarMesh, place: complex, reach: float) -> np.ndarray:
    """Elements with a corner within `reach` of a place."""
    z = mesh.nodes[mesh.elements[:, :3]] @ np.array([1.0, 1.0j])
    return np.flatnonzero(np.any(np.abs(z - place) < reach, axis=1))


def refined_often(mesh: PlanarMesh, rounds: int) -> PlanarMesh:
    """Refined round the hole's inner point and round a point on the side, again and again."""
    for k in range(rounds):
        sides = coupled_sides(mesh, ANGLE)
        for place in (24e-3 * np.exp(0.5j), 20e-3 + 0j):
            sides = coupled_sides(mesh, ANGLE)
            mesh = refined(mesh, marked_near(mesh, place, 6e-3 / 2**k), CIRCLES, sides)
    return mesh


def test_every_edge_has_two_elements_or_is_on_the_outline(start: PlanarMesh):
    """Conforming: a middle node joins the same two corners in each of its one or two elements."""
    mesh = refined_often(start, 4)
    edges = element_edges(mesh)
    ends = np.sort(edges[:, :2], axis=1)
    _, first, count = np.unique(edges[:, 2], return_index=True, return_counts=True)
    assert count.max() == 2
    of_middle = {int(edges[k, 2]): tuple(ends[k]) for k in first}
    assert all(of_middle[int(m)] == tuple(e) for m, e in zip(edges[:, 2], ends, strict=True))
    # No node is stored twice, none is left out, no corner is another edge's middle.
    z = np.round(mesh.nodes / 1e-12).astype(np.int64)
    assert len(np.unique(z, axis=0)) == len(mesh.nodes)
    assert np.array_equal(np.unique(mesh.elements), np.arange(len(mesh.nodes)))
    assert not np.intersect1d(mesh.elements[:, :3], mesh.elements[:, 3:]).size


def test_area_becomes_that_of_the_true_outline(start: PlanarMesh):
    """Area of sector less hole: the coarse arcs' error falls with each refinement of all."""
    exact = 0.5 * ANGLE * (50e-3**2 - 10e-3**2) - math.pi * 6e-3**2
    mesh, errors = start, []
    for _ in range(3):
        errors.append(abs(element_areas(mesh).sum() / exact - 1.0))
        every = np.arange(len(mesh.elements))
        mesh = refined(mesh, every, CIRCLES, coupled_sides(mesh, ANGLE))
    # Second-order arcs err as the fourth power of the step (derived): 16 a halving, 12 asked.
    assert errors[1] < errors[0] / 12.0
    assert errors[2] < errors[1] / 12.0


def test_nodes_of_the_outline_lie_on_their_arcs(start: PlanarMesh):
    """Every boundary edge off the sides has its three nodes on one of the circles, 1e-12 m."""
    mesh = refined_often(start, 3)
    edges = element_edges(mesh)
    met = np.bincount(edges[:, 2], minlength=len(mesh.nodes))
    outline = edges[met[edges[:, 2]] == 1]
    z = mesh.nodes[outline] @ np.array([1.0, 1.0j])
    on_side = np.all(np.abs(z.imag) < 1e-12, axis=1) | np.all(
        np.abs((z * np.exp(-1j * ANGLE)).imag) < 1e-12, axis=1
    )
    off = np.abs(np.abs(z[:, :, None] - CIRCLES.centre) - CIRCLES.radius).max(axis=1)
    assert np.all(off.min(axis=1)[~on_side] < 1e-12)


def test_coupled_sides_keep_matching(start: PlanarMesh):
    """Refined at one side only, both sides get the same new nodes: `coupled_sides` accepts them."""
    mesh = refined_often(start, 4)
    sides = coupled_sides(mesh, ANGLE)
    assert len(sides.first) > len(coupled_sides(start, ANGLE).first)


def test_angles_stay_bounded_and_elements_valid(start: PlanarMesh):
    """Six rounds at the same places: no angle below half of the least at the start."""
    mesh = refined_often(start, 6)
    assert len(mesh.elements) > 2 * len(start.elements)
    assert least_angles(mesh).min() > 0.5 * least_angles(start).min()
    assert least_jacobian_share(mesh.nodes[mesh.elements]).min() > 0.1


def test_old_nodes_stay_and_marked_elements_are_quartered(start: PlanarMesh):
    """Nested: old nodes keep number and place; one marked element becomes four."""
    mesh = refined(start, np.array([0]), CIRCLES)
    assert np.array_equal(mesh.nodes[: len(start.nodes)], start.nodes)
    corners = start.elements[0, :3]
    inner = {tuple(sorted(e)) for e in mesh.elements[:, :3].tolist()}
    assert tuple(sorted(start.elements[0, 3:].tolist())) in inner
    assert all(any(c in e for e in inner) for c in corners.tolist())


def test_arcs_between_regions_are_kept():
    """A shaft in a hub: the joint is no boundary, yet new middles of its edges go on its circle."""
    hub = Region("hub", "rotor_steel", circle(0j, 2.0), (round_hole(0j, 1.0),))
    shaft = Region("shaft", "shaft", circle(0j, 1.0))
    circles = circles_of([*hub.outer.edges, *shaft.outer.edges])
    mesh = mesh_regions([hub, shaft], lambda edge: 1.0)
    finer = refined(mesh, np.arange(len(mesh.elements)), circles)
    inner = element_areas(finer)[finer.elements_of("shaft")].sum()
    before = element_areas(mesh)[mesh.elements_of("shaft")].sum()
    assert abs(inner - math.pi) < abs(before - math.pi) / 12.0


def test_a_mesh_without_arcs_is_refined_straight():
    """A square of straight elements keeps its area to rounding."""
    region = Region("square", "rotor_steel", polygon(0j, 1 + 0j, 1 + 1j, 1j))
    mesh = mesh_regions([region], lambda edge: 0.5)
    none = Circles(np.empty(0, dtype=np.complex128), np.empty(0))
    finer = refined(mesh, np.array([0, 3]), none)
    assert element_areas(finer).sum() == pytest.approx(1.0, rel=1e-14)
    assert np.all(element_areas(finer) > 0.0)
