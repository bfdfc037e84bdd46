"""Checks of curved triangles on elements whose answers are known in closed form."""

import math

import numpy as np
import pytest

from lamwright.solver.mesh_checks import element_areas, least_angles, least_jacobian_share
from lamwright.solver.types import PlanarMesh


def one_element(rise: float) -> PlanarMesh:
    """The right triangle (0,0) (1,0) (0,1), its lowest side bent outward by `rise`."""
    nodes = np.array([[0, 0], [1, 0], [0, 1], [0.5, -rise], [0.5, 0.5], [0, 0.5]], dtype=float)
    return PlanarMesh(nodes, np.arange(6)[None, :], np.zeros(1, dtype=np.int64), ("one",))


@pytest.mark.parametrize("rise", [0.0, 0.1, -0.1])
def test_area_with_a_parabolic_side(rise):
    """Half the unit square and a parabola's segment, 2/3 of chord times rise (Archimedes)."""
    expected = 0.5 + 2.0 / 3.0 * rise
    assert element_areas(one_element(rise))[0] == pytest.approx(expected, rel=1e-14)


def test_element_folds_where_the_side_passes_a_quarter():
    """At the first corner det J = 1 + 4 rise (derived: the side leaves at slope -4 rise).

    So it is turned over from rise = -1/4 on, where the side is tangent to the upright one.
    """
    for rise, is_valid in ((-0.24, True), (-0.26, False), (0.24, True)):
        mesh = one_element(rise)
        assert (least_jacobian_share(mesh.nodes[mesh.elements])[0] > 0.0) == is_valid


def test_a_fold_between_the_nodes_is_found():
    """The bound holds everywhere: it is no larger than the least of many sampled values."""
    rng = np.random.default_rng(3)
    places = rng.dirichlet([1.0, 1.0, 1.0], 400)
    straight = one_element(0.0).nodes
    for _ in range(30):
        nodes = (straight + 0.15 * rng.normal(size=(6, 2)))[None]
        sampled = determinants(nodes[0], places)
        mean = 2.0 * abs(element_areas_of(nodes))
        assert least_jacobian_share(nodes)[0] * mean <= sampled.min() + 1e-12


def determinants(nodes: np.ndarray, places: np.ndarray) -> np.ndarray:
    """Det J by central differences of the mapping, exact for quadratics but for rounding."""
    eps = 1e-4
    columns = []
    for direction in (np.array([-1.0, 1.0, 0.0]), np.array([-1.0, 0.0, 1.0])):
        ahead, behind = (
            mapped(nodes, places + eps * direction),
            mapped(nodes, places - eps * direction),
        )
        columns.append((ahead - behind) / (2.0 * eps))
    (a, c), (b, d) = columns[0].T, columns[1].T
    return a * d - b * c


def mapped(nodes: np.ndarray, places: np.ndarray) -> np.ndarray:
    l0, l1, l2 = places.T
    shapes = [l0 * (2 * l0 - 1), l1 * (2 * l1 - 1), l2 * (2 * l2 - 1)]
    shapes += [4 * l0 * l1, 4 * l1 * l2, 4 * l0 * l2]
    return np.array(shapes).T @ nodes


def element_areas_of(nodes: np.ndarray) -> float:
    mesh = PlanarMesh(nodes[0], np.arange(6)[None, :], np.zeros(1, dtype=np.int64), ("one",))
    return float(element_areas(mesh)[0])


def test_least_angle_of_a_right_triangle():
    assert least_angles(one_element(0.1))[0] == pytest.approx(math.pi / 4.0, rel=1e-14)
