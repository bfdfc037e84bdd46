"""Start and stop: elastic, shakedown, alternating flow; where each begins by Melan's theorem."""

import numpy as np
import pytest

from lamwright.geometry.curves import Path, arc, line
from lamwright.geometry.section import Region
from lamwright.solver.elastic import edge_force, elastic_body
from lamwright.solver.mesh import mesh_regions
from lamwright.solver.plastic import elastic_answer, load_path
from lamwright.solver.plastic_kernel import on_load, plastic_body
from lamwright.solver.return_mapping import equivalent, linear_hardening, perfectly_plastic, split
from lamwright.solver.start_stop import NO_FLOW, start_stop
from lamwright.solver.supports import unsupported, with_fixed
from tests.plates import MPA, STEEL, at_x, at_y, edges_on, fine_arcs, nodes_on, uniform

YIELD = 350.0 * MPA
HOLE, HALF, LONG = 1e-3, 5e-3, 12e-3


def strip(curve):
    """A quarter of a strip with a hole, pulled; factor 1 is yield on the gross section."""
    quarter = Path(
        (
            line(HOLE + 0j, LONG + 0j),
            line(LONG + 0j, LONG + 1j * HALF),
            line(LONG + 1j * HALF, 1j * HALF),
            line(1j * HALF, 1j * HOLE),
            arc(1j * HOLE, HOLE + 0j, 0j, ccw=False),
        )
    )
    sizes = fine_arcs(0.15e-3, 1.2e-3, HOLE)
    mesh = mesh_regions([Region("plate", "rotor_steel", quarter)], sizes)
    supports = with_fixed(unsupported(mesh), nodes_on(mesh, at_x(0.0)), 0)
    supports = with_fixed(supports, nodes_on(mesh, at_y(0.0)), 1)
    pull = edge_force(mesh, edges_on(mesh, at_x(LONG)), uniform(YIELD, 0.0))
    return plastic_body(elastic_body(mesh, STEEL), supports, curve), pull


@pytest.fixture(scope="module")
def pulled_strip():
    """Perfectly plastic, with the factor of first yield."""
    plastic, pull = strip(perfectly_plastic(YIELD))
    return plastic, pull, elastic_answer(plastic, on_load(plastic, pull)).first_yield


@pytest.mark.parametrize(
    ("share", "regime"),
    [(0.95, "elastic"), (1.5, "shakedown"), (1.95, "shakedown"), (2.2, "alternating")],
)
def test_twice_first_yield_parts_shakedown_from_alternating_flow(share, regime, pulled_strip):
    """A load from 0 shakes down where the elastic range is within 2 x yield everywhere.

    Necessary by Melan's theorem; sufficient here because the residual stress of one overload
    does it (check values C3). The limit load is at 2.6 x first yield, so no limit is met.
    """
    plastic, pull, first = pulled_strip
    found = start_stop(plastic, pull, share * first)
    assert found.regime == regime
    if regime == "alternating":
        assert found.cycles[-1].flow > 100.0 * NO_FLOW
        assert found.cycles[-1].net < 0.1 * found.cycles[-1].flow


def test_residual_stress_of_shakedown_is_melans_proof(pulled_strip):
    """After it, residual plus elastic stress is within yield at rest and at full load."""
    plastic, pull, first = pulled_strip
    found = start_stop(plastic, pull, 1.8 * first)
    elastic = elastic_answer(plastic, on_load(plastic, pull)).stress
    for factor in (0.0, 1.8 * first):
        level = equivalent(split(found.state.stress + factor * elastic), "von Mises")
        assert level.max() <= YIELD * (1.0 + 1e-6)
    again = load_path(plastic, pull, (1.8 * first, 0.0), start=found.state)
    assert np.max(again.stops[-1].hardened - found.state.hardened) < NO_FLOW


def test_hardening_ends_alternating_flow():
    """Isotropic hardening widens the elastic range until the cycle fits into it."""
    plastic, pull = strip(linear_hardening(YIELD, 40e9))
    first = elastic_answer(plastic, on_load(plastic, pull)).first_yield
    assert start_stop(plastic, pull, 2.2 * first).regime == "shakedown"
