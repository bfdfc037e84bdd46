"""Values at any point of a curved mesh."""

import math

import numpy as np
import pytest

from lamwright.geometry.curves import circle
from lamwright.geometry.section import Region
from lamwright.solver.locate import locate, values_at
from lamwright.solver.mesh import mesh_regions
from lamwright.solver.types import PlanarMesh
from tests.plates import sector


@pytest.fixture(scope="module")
def disc() -> PlanarMesh:
    """A disc of 1 m, coarse."""
    return mesh_regions([Region("disc", "rotor_steel", circle(0j, 1.0))], lambda edge: 0.4)


def test_a_linear_field_is_met_at_any_point(disc: PlanarMesh):
    """The elements hold linear fields: rounding and Newton's last step only, 1e-12."""
    rng = np.random.default_rng(6)
    z = np.sqrt(rng.uniform(0.0, 0.999, 300)) * np.exp(2j * math.pi * rng.uniform(size=300))
    points = np.column_stack([z.real, z.imag])
    field = np.column_stack([disc.nodes @ [2.0, -3.0] + 1.0, disc.nodes[:, 0]])
    found = values_at(disc, field, points)
    expected = np.column_stack([points @ [2.0, -3.0] + 1.0, points[:, 0]])
    assert found == pytest.approx(expected, abs=1e-12)


def test_nodes_are_found_at_their_own_places(disc: PlanarMesh):
    """Each node, the rim's included, gets its own value; 1e-10 where corners meet the circle."""
    values = np.random.default_rng(7).normal(size=(len(disc.nodes), 1))
    assert values_at(disc, values, disc.nodes) == pytest.approx(values, abs=1e-10)


def test_the_true_rim_counts_as_inside(disc: PlanarMesh):
    """A point of the circle lies beyond the parabola by 1e-5 of the step: still found."""
    z = np.exp(1j * np.linspace(0.0, 6.28, 101))
    radius = np.hypot(*disc.nodes.T)[:, None]
    found = values_at(disc, radius, np.column_stack([z.real, z.imag]))
    assert found == pytest.approx(np.ones((101, 1)), abs=1e-3)


def test_holes_and_far_points_are_refused():
    """Between the elements of a ring there is none: a point in its bore or beyond is refused."""
    ring = mesh_regions([sector(10e-3, 20e-3, 1.0)], lambda edge: 3e-3)
    for place in ([5e-3, 2e-3], [30e-3, 0.0], [9e-3, 1e-3]):
        with pytest.raises(ValueError, match="outside the mesh"):
            locate(ring, np.array([place]))
