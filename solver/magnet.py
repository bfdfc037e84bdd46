"""Permanent magnets in the field: straight recoil line, one direction for each block.

    B = mu_0 mu_r H + B_r,  H = nu (B - B_r)

The part of H that no field makes goes to the right side of the weak form, and its energy is
counted from B = B_r, where H = 0 (derived; textbook matter):

    load_i = int nu B_r . curl N_i,          curl N = (dN/dy, -dN/dx)
    w = nu |B - B_r|^2 / 2,  w' = H . B - w = nu (|B|^2 - |B_r|^2) / 2

so that energy and coenergy sum up to that of the currents, and the coenergy's slope at constant
currents is the torque, magnets or none.
Axes: n_node nodes of the rotor, n_dof unknowns, n_elem elements, n_qp quadrature points.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from lamwright.geometry.design import MagnetCard
from lamwright.geometry.magnet_card import REFERENCE_C
from lamwright.geometry.section import Region

from .kernel import quadrature
from .pattern import Numbering
from .steel import NU_0
from .types import FloatArray, PlanarMesh


@dataclass(frozen=True, slots=True)
class MagnetLaw:
    """A magnet at its temperature: the straight part of its demagnetisation curve and its end."""

    remanence: float  # T
    recoil_permeability: float  # relative, of the straight part
    knee_field: float  # A/m, opposing field strength at which the straight part ends

    @property
    def reluctivity(self) -> float:
        """Slope H by B in m/H."""
        return NU_0 / self.recoil_permeability

    @property
    def knee(self) -> float:
        """Flux density along the magnetisation at which the straight part ends, in T."""
        return self.remanence - self.knee_field / self.reluctivity


@dataclass(frozen=True, slots=True, eq=False)
class MagnetSource:
    """What the magnets of one pole add to the field's equations."""

    load: FloatArray  # (n_dof,), A
    still_energy: float  # J/m, stored per metre of stack at B = 0

    def scaled(self, ratio: float) -> "MagnetSource":
        """The source with `ratio` times the remanence."""
        return MagnetSource(ratio * self.load, ratio**2 * self.still_energy)


def magnet_law(card: MagnetCard, temperature_c: float) -> MagnetLaw:
    """The card's magnet at a temperature in C: remanence and knee change in proportion to it.

    Source: common practice of magnet data sheets, no source; good for some 100 K about 20 C.
    """
    warmer = temperature_c - REFERENCE_C  # K
    remanence = 1.0 + 0.01 * card.remanence_coefficient_percent_per_k.value * warmer
    knee = 1.0 + 0.01 * card.knee_coefficient_percent_per_k.value * warmer
    return MagnetLaw(
        remanence=card.remanence_t.value * remanence,
        recoil_permeability=card.recoil_relative_permeability.value,
        knee_field=1e3 * card.knee_field_ka_per_m.value * knee,
    )


def magnet_source(
    rotor: PlanarMesh, regions: Sequence[Region], numbering: Numbering, law: MagnetLaw | None
) -> MagnetSource:
    """Load and energy of all magnets of the rotor; zero where there is none.

    Args:
        rotor: mesh.
        regions: of the rotor, for their magnetisation.
        numbering: of the model, the rotor's nodes first.
        law: of the magnets; may be left out where there is none.

    Raises:
        ValueError: for magnets without a law.
    """
    nodal, energy = np.zeros(len(rotor.nodes)), 0.0
    direction = {r.name: r.magnetisation for r in regions if r.material == "magnet"}
    for name, along in direction.items():
        if law is None:
            raise ValueError(f"{name}: a magnet needs a magnet law")
        elements = rotor.elements[rotor.region_of_elem == rotor.region_names.index(name)]
        quad = quadrature(rotor.nodes, elements)
        integral = np.einsum("eq,eqdi->edi", quad.weight, quad.grad)  # int grad N, m
        strength = law.reluctivity * law.remanence  # A/m
        load = strength * (along.real * integral[:, 1] - along.imag * integral[:, 0])
        nodal += np.bincount(elements.ravel(), load.ravel(), nodal.size)
        energy += 0.5 * strength * law.remanence * float(quad.weight.sum())
    n_dof, first = numbering.n_dof, slice(None, nodal.size)
    summed = np.bincount(numbering.dof[first], numbering.sign[first] * nodal, n_dof + 1)[:-1]
    return MagnetSource(np.asarray(summed, dtype=np.float64), energy)
