"""Error estimates of peaks: the dual load is a derivative, the estimate bounds the true error."""

import math

import numpy as np
import pytest

from lamwright.geometry.curves import circle, reversed_path
from lamwright.solver.elastic import centrifugal_force, elastic_body, node_stress, von_mises
from lamwright.solver.isoparametric import boundary_edges
from lamwright.solver.mesh import mesh_regions
from lamwright.solver.refine import circles_of, refined
from lamwright.solver.stiffness import SupportedBody, supported
from lamwright.solver.stress_estimate import PeakEstimate, _peak_load, estimate_peaks
from lamwright.solver.stress_recovery import recovered_stress, stress_defect
from lamwright.solver.supports import coupled_sides, unsupported, with_coupled_sides, with_fixed
from lamwright.solver.types import FloatArray, PlanarMesh
from tests.plates import SPEED, STEEL, sector

ANGLE = math.pi / 3.0
REGION = sector(15e-3, 50e-3, ANGLE, [reversed_path(circle(32e-3 * np.exp(0.4j), 5e-3))])
CIRCLES = circles_of(e for path in (REGION.outer, *REGION.holes) for e in path.edges)


def solved(mesh: PlanarMesh) -> tuple[SupportedBody, FloatArray, PlanarMesh]:
    """The spun sector on a mesh: body, displacement, mesh."""
    body = elastic_body(mesh, STEEL)
    sides = coupled_sides(mesh, ANGLE)
    supports = with_coupled_sides(unsupported(mesh), mesh, sides)
    held = supported(body, with_fixed(supports, sides.first[:1], 1))
    return held, held.displacement(centrifugal_force(body, SPEED)), mesh


def estimated(mesh: PlanarMesh, carried: dict[int, float] | None = None) -> PeakEstimate:
    """Peaks of two zones: near the hole, and the rest."""
    held, moved, _ = solved(mesh)
    sides = coupled_sides(mesh, ANGLE)
    edges = boundary_edges(mesh)
    both = np.concatenate([sides.first, sides.second])
    edges = edges[~np.isin(edges[:, 2], both)]
    stress = recovered_stress(held.body, moved, edges, sides)
    defect = stress_defect(held.body, moved, stress)
    z = mesh.nodes @ np.array([1.0, 1.0j])
    zone = np.where(np.abs(z - 32e-3 * np.exp(0.4j)) < 8e-3, 0, 1)
    return estimate_peaks(held, stress, defect, zone, edges, sides, carried)


@pytest.fixture(scope="module")
def coarse() -> PlanarMesh:
    """A coarse mesh of a sector with a hole."""
    return mesh_regions([REGION], lambda edge: 4e-3, turn_sides=ANGLE)


def test_dual_load_is_the_derivative_of_the_von_mises_stress(coarse: PlanarMesh):
    """Central differences along random displacements err by eps^2 times a large curvature: 1e-6."""
    held, moved, mesh = solved(coarse)
    body, rng = held.body, np.random.default_rng(5)

    def mean_at(node: int, u: FloatArray) -> FloatArray:
        element, place = np.nonzero(mesh.elements == node)
        return np.asarray(node_stress(body, u)[element, place].mean(axis=0))

    for node in (3, 40, 100):
        load = _peak_load(body, node, mean_at(node, moved))
        way = rng.normal(size=moved.shape) * np.abs(moved).max()
        eps = 1e-6
        ends = [von_mises(mean_at(node, moved + s * eps * way)) for s in (1.0, -1.0)]
        by_difference = (ends[0] - ends[1]) / (2 * eps)
        assert np.sum(load * way) == pytest.approx(by_difference, rel=1e-6)


def test_the_estimate_bounds_the_true_error_and_falls_with_it(coarse: PlanarMesh):
    """Against peaks after three halvings of all edges: the estimate is above the error, not wild.

    Safe side: it must bound; 60 times the error is the most seen where signs cancel by luck, so
    only falling by 2.5 a halving (theory 4, the dual being singular 2 to 4) is asked besides.
    """
    mesh, found = coarse, []
    for _ in range(4):
        found.append(estimated(mesh))
        every = np.arange(len(mesh.elements))
        mesh = refined(mesh, every, CIRCLES, coupled_sides(mesh, ANGLE))
    best = found[-1].peak
    for estimate in found[:2]:
        assert np.all(np.abs(estimate.peak / best - 1.0) < estimate.error)
    assert np.all(found[1].error < found[0].error / 2.5)
    assert np.all(found[2].error < found[1].error / 2.5)


def test_shares_add_up_and_carried_errors_are_kept(coarse: PlanarMesh):
    """Shares sum to the error; a zone carried over keeps its number and peak and has no share."""
    whole, part = estimated(coarse), estimated(coarse, {1: 0.123})
    assert whole.share.sum(axis=0) == pytest.approx(whole.error)
    assert np.all(whole.share >= 0.0)
    assert part.error == pytest.approx([whole.error[0], 0.123])
    assert not np.any(part.share[:, 1])
    assert np.array_equal(part.peak, whole.peak)
