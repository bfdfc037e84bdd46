"""A field solved the plain way: one mesh, held nodes, SciPy's solver, no symmetry, no tricks.

Used where a closed form needs other boundaries than a machine's, and to hold the sector model to
the full circle.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from scipy.sparse import csc_matrix
from scipy.sparse.linalg import spsolve

from lamwright.solver.kernel import (
    PACKED_COLUMNS,
    PACKED_ROWS,
    FluxState,
    element_residual,
    flux_state,
    packed_tangent,
    quadrature,
    quadrature_places,
)
from lamwright.solver.newton import NewtonSettings, minimise
from lamwright.solver.steel import SteelLaw
from lamwright.solver.types import FloatArray, IntArray, NewtonReport, PlanarMesh, Quadrature


@dataclass(frozen=True, eq=False)
class Material:
    """Elements of one law."""

    elements: IntArray  # (n_elem,)
    law: SteelLaw


@dataclass(frozen=True, eq=False)
class PlainEnergy:
    """Energy of the field on a mesh less that of the loads, by its derivatives."""

    mesh: PlanarMesh
    materials: tuple[Material, ...]
    quads: tuple[Quadrature, ...]
    load: FloatArray  # (n_node,), A
    is_free: FloatArray  # (n_node,), 1 where the potential is unknown

    def residual(self, a: FloatArray) -> tuple[FloatArray, tuple[FluxState, ...]]:
        """Gradient (n_node,) in A, 0 at held nodes, and the materials' states."""
        r, states = -self.load, []
        for material, quad in zip(self.materials, self.quads, strict=True):
            nodes = self.mesh.elements[material.elements]
            states.append(flux_state(quad, a[nodes], material.law))
            r = r + np.bincount(
                nodes.ravel(), element_residual(quad, states[-1]).ravel(), minlength=r.size
            )
        return r * self.is_free, tuple(states)

    def solve_tangent(self, state: tuple[FluxState, ...], rhs: FloatArray) -> FloatArray:
        """Solution of the tangent system for a right side (n_node,)."""
        n = rhs.size
        lower = csc_matrix((n, n))
        for material, quad, own in zip(self.materials, self.quads, state, strict=True):
            nodes = self.mesh.elements[material.elements].T
            rows, columns = nodes[PACKED_ROWS].ravel(), nodes[PACKED_COLUMNS].ravel()
            packed = packed_tangent(quad, own)
            packed[PACKED_ROWS == PACKED_COLUMNS] *= 0.5  # the mirror image brings the rest
            lower = lower + csc_matrix((packed.ravel(), (rows, columns)), shape=(n, n))
        free = np.flatnonzero(self.is_free)
        whole = csc_matrix(lower + lower.T)[free][:, free]
        solution = np.zeros(n)
        solution[free] = spsolve(csc_matrix(whole), rhs[free])
        return solution


@dataclass(frozen=True, eq=False)
class PlainField:
    """A solved field, and what a test reads off it."""

    mesh: PlanarMesh
    a: FloatArray  # (n_node,), Wb/m
    energy: float  # J/m
    coenergy: float  # J/m
    report: NewtonReport

    def flux_density_at(self, elements: IntArray, n_qp: int = 6) -> tuple[FloatArray, FloatArray]:
        """Places (n, 2) in m and B_x, B_y (n, 2) in T at the elements' quadrature points."""
        nodes = self.mesh.elements[elements]
        quad = quadrature(self.mesh.nodes, nodes, n_qp)
        grad_a = np.einsum("eqdi,ei->eqd", quad.grad, self.a[nodes])
        b = np.stack([grad_a[..., 1], -grad_a[..., 0]], axis=-1)
        places = quadrature_places(self.mesh.nodes, nodes, n_qp)
        return places.reshape(-1, 2), b.reshape(-1, 2)


def solve_plain(
    mesh: PlanarMesh,
    materials: Sequence[Material],
    load: FloatArray,
    held: dict[float, IntArray],
    scale: float,
    n_qp: int = 6,
) -> PlainField:
    """Field with given nodal loads (n_node,) in A and nodes held at potentials in Wb/m."""
    a = np.zeros(mesh.nodes.shape[0])
    is_free = np.ones_like(a)
    for potential, nodes in held.items():
        a[nodes], is_free[nodes] = potential, 0.0
    quads = tuple(
        quadrature(mesh.nodes, mesh.elements[material.elements], n_qp) for material in materials
    )
    problem = PlainEnergy(mesh, tuple(materials), quads, load, is_free)
    a, states, report = minimise(problem, a, scale, NewtonSettings(tolerance=1e-8))
    energy = coenergy = 0.0
    for material, quad, state in zip(materials, quads, states, strict=True):
        b2 = np.sum(state.grad_a**2, axis=-1)
        energy += float(np.sum(quad.weight * material.law.energy_density(b2)))
        coenergy += float(np.sum(quad.weight * material.law.coenergy_density(b2)))
    return PlainField(mesh, a, energy, coenergy, report)
