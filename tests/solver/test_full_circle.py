"""One pole with antiperiodic sides against the whole circle solved the plain way."""

import math

import numpy as np
import pytest
from plain_field import Material, solve_plain
from scipy.sparse import coo_matrix
from scipy.sparse.csgraph import connected_components
from scipy.spatial import cKDTree
from shipped import Shipped, shipped, shipped_model

from lamwright.solver.field import solve_point
from lamwright.solver.gap import rotor_place
from lamwright.solver.integrals import dq_values, gap_torque, phase_currents
from lamwright.solver.kernel import quadrature, quadrature_places, shape_integrals
from lamwright.solver.steel import linear_law
from lamwright.solver.types import FloatArray, IntArray, PlanarMesh

WELD = 1e-9  # m


def whole_machine(one: Shipped, angle: float) -> tuple[PlanarMesh, IntArray]:
    """Every pole's copies of both meshes, welded; the pole of every element.

    The rotor's d axis stands at `angle`, a whole number of the circle's edges.
    """
    poles, pitch = 2 * one.section.pole_pairs, math.pi / one.section.pole_pairs
    points, elements, region, pole = [], [], [], []
    names = one.sector.rotor.region_names + one.sector.stator.region_names
    count = 0
    for part, turn, first in (
        (one.sector.rotor, angle, 0),
        (one.sector.stator, 0.0, len(one.sector.rotor.region_names)),
    ):
        for k in range(poles):
            points.append((part.nodes @ [1, 1j]) * np.exp(1j * (turn + k * pitch)))
            elements.append(part.elements + count)
            region.append(part.region_of_elem + first)
            pole.append(np.full(part.elements.shape[0], k))
            count += part.nodes.shape[0]
    z = np.concatenate(points)
    pairs = cKDTree(np.stack([z.real, z.imag], axis=-1)).query_pairs(WELD, output_type="ndarray")
    links = coo_matrix((np.ones(len(pairs)), (pairs[:, 0], pairs[:, 1])), shape=(z.size, z.size))
    n_node, node = connected_components(links, directed=False)
    welded = np.zeros(n_node, dtype=complex)
    welded[node] = z
    mesh = PlanarMesh(
        nodes=np.stack([welded.real, welded.imag], axis=-1),
        elements=node[np.concatenate(elements)].astype(np.int64),
        region_of_elem=np.concatenate(region).astype(np.int64),
        region_names=names,
    )
    return mesh, np.concatenate(pole)


def linkage(one: Shipped, mesh: PlanarMesh, pole: IntArray) -> FloatArray:
    """Linkage per metre of every phase as a functional (3, n_node), from all slots' conductors."""
    per_pole = one.winding.slots // one.winding.poles
    functional = np.zeros((3, mesh.nodes.shape[0]))
    for s in range(one.winding.slots):
        for layer in range(one.winding.layers):
            side = mesh.elements_of(f"slot_{s % per_pole}_layer_{layer}")
            side = side[pole[side] == s // per_pole]
            integrals = shape_integrals(mesh.nodes, mesh.elements[side])
            mean = np.bincount(
                mesh.elements[side].ravel(), integrals.ravel(), mesh.nodes.shape[0]
            ) / np.sum(integrals)
            functional += np.outer(one.winding.conductors[s, layer], mean)
    return functional


@pytest.mark.parametrize(("name", "edges"), [("demo_24s4p_arc", 7), ("demo_36s6p_arc", 31)])
def test_sector_is_the_full_circle(name: str, edges: int) -> None:
    """Same mesh, no symmetry used: equal to 1e-6; 1e-3 is asked for.

    What is left is the number of quadrature points in curved gap elements (6 on all here, 3 in the
    sector model outside the rotor's gap) and both residual tolerances.
    """
    one, model = shipped(name, 2.5), shipped_model(name, 2.5, 1e-8)
    p = one.section.pole_pairs
    angle = edges * math.pi / (p * one.sector.n_circle)
    position = angle - one.winding.axis_a
    assert rotor_place(one.sector, angle).rest == 0.0
    i_d, i_q = 0.6 * one.rated, 0.9 * one.rated
    solution = solve_point(model, i_d, i_q, position)

    mesh, pole = whole_machine(one, angle)
    functional = linkage(one, mesh, pole)
    steel = np.flatnonzero(
        np.isin(mesh.region_of_elem, [k for k, n in enumerate(mesh.region_names) if "iron" in n])
    )
    air = np.setdiff1d(np.arange(mesh.elements.shape[0]), steel)
    outside = np.flatnonzero(
        np.hypot(*mesh.nodes.T) > one.section.stator_outer_radius * (1.0 - 1e-9)
    )
    load = phase_currents(i_d, i_q, p * position) @ functional
    whole = solve_plain(
        mesh,
        (Material(steel, model.iron.rotor_law), Material(air, linear_law(1.0))),
        load,
        {0.0: outside},
        scale=float(np.linalg.norm(load)),
        n_qp=3,
    )
    length = one.section.stack_length
    psi = length * (functional @ whole.a)
    assert psi == pytest.approx(solution.psi_abc, abs=1e-6 * np.abs(psi).max())
    psi_d, psi_q = dq_values(psi, p * position)
    assert (psi_d, psi_q) == pytest.approx((solution.psi_d, solution.psi_q), rel=1e-6)
    assert length * whole.energy == pytest.approx(solution.energy, rel=1e-6)
    assert length * whole.coenergy == pytest.approx(solution.coenergy, rel=1e-6)

    gap = mesh.elements[mesh.elements_of("gap_")]
    torque = gap_torque(
        quadrature(mesh.nodes, gap, 6),
        quadrature_places(mesh.nodes, gap, 6),
        whole.a[gap],
        one.section.gap,
    )
    assert length * torque == pytest.approx(solution.torque, rel=1e-5)
