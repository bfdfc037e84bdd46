"""How far each magnet is driven down its demagnetisation curve.

A magnet keeps its magnetisation as long as it stays on the straight part of its curve, down to
the knee. What counts is the flux density along the magnetisation, B . m, at the quadrature points
of the field; the field itself is solved with the straight line, so beyond the knee it is what an
unharmed magnet would have, and the share of the area tells where it would not stay unharmed.
Source: derived (B = mu_0 mu_r H + B_r, knee at H = -H_k).
Axes: n_elem elements, n_qp quadrature points.
"""

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from lamwright.geometry.section import Region
from lamwright.solver.kernel import quadrature
from lamwright.solver.magnet import MagnetLaw
from lamwright.solver.types import FloatArray, PlanarMesh

POINTS = 6  # quadrature points of an element
LOW_SHARE = 0.01  # of a magnet's area


@dataclass(frozen=True, slots=True)
class MagnetState:
    """One magnet in one field."""

    name: str  # of its region
    area: float  # m^2
    share_below: float  # of the area, 0 to 1, below the knee
    flux_low: float  # T, along the magnetisation; 99 % of the area have as much or more
    flux_mean: float  # T
    grain: float  # of the area, the most that a point of the mesh stands for


def magnet_states(
    rotor: PlanarMesh, regions: Sequence[Region], a_rotor: FloatArray, law: MagnetLaw
) -> tuple[MagnetState, ...]:
    """The state of every magnet in a field.

    Args:
        rotor: mesh.
        regions: of the rotor, for their magnetisation.
        a_rotor: (n_node,), A_z in Wb/m.
        law: of the magnets.
    """
    return tuple(
        _state(rotor, region, a_rotor, law) for region in regions if region.material == "magnet"
    )


def worst_states(states: Sequence[tuple[MagnetState, ...]]) -> tuple[MagnetState, ...]:
    """Of each magnet the state with most below the knee; of equal ones that of the lowest flux."""
    return tuple(
        max(own, key=lambda state: (state.share_below, -state.flux_low))
        for own in zip(*states, strict=True)
    )


def worst_places(states: Sequence[tuple[MagnetState, ...]]) -> tuple[int, ...]:
    """Where among the fields each magnet is worst, by the rule of `worst_states`."""
    worst = worst_states(states)
    return tuple(
        next(k for k, own in enumerate(states) if own[m] is state) for m, state in enumerate(worst)
    )


def opposing_angle(no_load_psi_d: float, no_load_psi_q: float) -> float:
    """Current angle gamma in rad whose field opposes the magnets' linkage (V s)."""
    return math.atan2(-no_load_psi_q, -no_load_psi_d)


def _state(rotor: PlanarMesh, region: Region, a_rotor: FloatArray, law: MagnetLaw) -> MagnetState:
    elements = rotor.elements[rotor.region_of_elem == rotor.region_names.index(region.name)]
    quad = quadrature(rotor.nodes, elements, POINTS)
    grad_a = np.einsum("eqdi,ei->eqd", quad.grad, a_rotor[elements])
    along = region.magnetisation
    flux = along.real * grad_a[..., 1] - along.imag * grad_a[..., 0]  # B = (dA/dy, -dA/dx)
    area = float(quad.weight.sum())
    order = np.argsort(flux, axis=None)
    covered = np.cumsum(quad.weight.ravel()[order])
    # At a corner of the magnet the field has no bound, so the very least would be the mesh's.
    low = order[np.searchsorted(covered, LOW_SHARE * area)]
    return MagnetState(
        name=region.name,
        area=area,
        share_below=float(quad.weight[flux < law.knee].sum()) / area,
        flux_low=float(flux.flat[low]),
        flux_mean=float(np.sum(quad.weight * flux)) / area,
        grain=float(quad.weight.max()) / area,
    )
