"""An infinite row of equal round holes in a large plate.

Source: Schulz, Proc. Nederl. Akad. van Wetenschappen 44/45 (1941-42), as charted in Pilkey,
Peterson's Stress Concentration Factors, 3rd ed. 2008 (from memory; the chart shows the same 3.24
at d/P = 0.5). The values are those of the check values C9: finite elements of order 5, two meshes
agree to the digits given. Tolerance 0.5 % as for the strip there.
"""

import math

import numpy as np
import pytest

from lamwright.geometry.curves import Path, arc, line
from lamwright.geometry.section import Region
from lamwright.solver.mesh import mesh_regions
from lamwright.solver.stiffness import internal_force
from lamwright.solver.types import PlanarMesh
from tests.plates import (
    MPA,
    STEEL,
    Field,
    at_x,
    at_y,
    fine_arcs,
    nodes_on,
    pulled,
    summed_fields,
    uniform,
)

RADIUS, PULL = 1e-3, 100.0 * MPA
REACH = 6.0  # pitches from the row to the plate's edge: the row's trace decays as exp(-2 pi x/P)


def quarter(pitch: float) -> PlanarMesh:
    """A quarter of one pitch; the row runs along y."""
    top, end = 0.5j * pitch, complex(REACH * pitch)
    edges = (
        line(RADIUS + 0j, end),
        line(end, end + top),
        line(end + top, top),
        line(top, 1j * RADIUS),
        arc(1j * RADIUS, RADIUS + 0j, 0j, ccw=False),
    )
    sizes = fine_arcs(2 * math.pi * RADIUS / 72, 0.25 * pitch, RADIUS)
    return mesh_regions([Region("plate", "rotor_steel", Path(edges))], sizes)


def stretched(mesh: PlanarMesh, pitch: float, pull: float) -> Field:
    """Neighbours kept apart by the pitch plus `pull`, the row's middle lines straight."""
    return pulled(
        mesh, [(at_x(0.0), 1), (at_y(0.0), 1j)], [], [(at_y(0.5 * pitch), 1j, pull)]
    )  # fmt: skip


def pull_on(field: Field, pitch: float) -> float:
    """Force in N/m with which the neighbours pull at the line between the holes."""
    line_nodes = nodes_on(field.body.mesh, at_y(0.5 * pitch))
    return float(internal_force(field.body, field.moved)[line_nodes, 1].sum())


@pytest.mark.parametrize(
    ("share", "factor"), [(0.2, 3.0104), (0.3, 3.0376), (0.4, 3.1040), (0.5, 3.2479)]
)
def test_load_across_the_row(share, factor):
    """Gross factor at the hole, in the ligament; the row is free to contract along itself."""
    pitch = 2 * RADIUS / share
    mesh = quarter(pitch)
    held = pulled(
        mesh,
        [(at_x(0.0), 1), (at_y(0.0), 1j), (at_y(0.5 * pitch), 1j)],
        [(at_x(REACH * pitch), uniform(PULL, 0.0))],
    )
    loose = stretched(mesh, pitch, 1e-6)
    field = summed_fields(held, loose, -pull_on(held, pitch) / pull_on(loose, pitch))
    assert abs(pull_on(field, pitch)) < 1e-9 * PULL * REACH * pitch
    assert field.polar(1j * RADIUS)[1] / PULL == pytest.approx(factor, rel=5e-3)


@pytest.mark.parametrize(
    ("share", "factor"), [(0.2, 2.7676), (0.3, 2.5466), (0.4, 2.3261), (0.5, 2.1392)]
)
def test_load_along_the_row(share, factor):
    """Gross factor at the hole; far from the row the stress is E times the mean strain."""
    pitch = 2 * RADIUS / share
    strain = PULL / STEEL.youngs_modulus
    field = stretched(quarter(pitch), pitch, 0.5 * pitch * strain)
    far = field.stress[field.node(complex(REACH * pitch))]
    assert far == pytest.approx(np.array([0.0, PULL, 0.0]), abs=1e-3 * PULL)
    assert field.polar(RADIUS + 0j)[1] / PULL == pytest.approx(factor, rel=5e-3)
