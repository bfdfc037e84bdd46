"""Eddy currents of bars in one slot, solved: the check of every simpler AC copper loss.

A slot with parallel sides in iron of infinite permeability, open at the top, holds bars above each
other, all in series. Per metre of slot, phasors with e^{j omega t}, amplitude 1 A a bar:

    -1/mu0 laplace A + j omega sigma A = sigma U_k in bar k,   int_k sigma (U_k - j omega A) = 1 A

On sides and bottom H along the iron is 0 (natural); across the top it is that of all bars' current,
evenly spread over the slot's width. Elements are second-order squares on a grid that follows the
bars, graded towards their faces; the U_k are unknowns of their own (A, U formulation; derived).
"""

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from .steel import MU_0
from .types import FloatArray

LAYERS = 12  # elements over a bar's height, thinner towards its faces
ACROSS = (4, 8)  # elements beside a bar, across a bar
TINY = 1e-9  # m, far under any element


@dataclass(frozen=True, slots=True)
class BarSlot:
    """Bars above each other in a slot, SI; each in the middle of the slot's width."""

    width: float  # of the slot
    bar_width: float
    bar_height: float
    bars: int
    spacing: float  # insulation between bars, and under the lowest
    above: float  # from the topmost bar to the slot's top
    resistivity: float


@dataclass(frozen=True, slots=True, eq=False)
class BarLosses:
    """What each bar loses, from the bottom up."""

    factor: FloatArray  # (bars,), loss over that of a direct current of the same rms value
    field: FloatArray  # (bars,), T, mean amplitude across the slot over the bar, at 1 A


def bar_losses(slot: BarSlot, frequency: float) -> BarLosses:
    """Losses of all bars at a frequency in Hz; at 0 the static field."""
    from scipy.sparse import csc_matrix
    from scipy.sparse.linalg import splu
    from skfem import Basis, BilinearForm, ElementQuad2, FacetBasis, LinearForm, MeshQuad
    from skfem.helpers import dot, grad

    x, y, floors = _grid_lines(slot)
    mesh = MeshQuad.init_tensor(x, y)
    basis = Basis(mesh, ElementQuad2())
    middle = mesh.p[:, mesh.t].mean(axis=1)
    inside = np.abs(middle[0] - 0.5 * slot.width) < 0.5 * slot.bar_width
    parts = [
        Basis(mesh, basis.elem, elements=np.flatnonzero(inside & _between(middle[1], floor, slot)))
        for floor in floors
    ]
    stiffness = BilinearForm(lambda u, v, _: dot(grad(u), grad(v)) / MU_0)
    mass = BilinearForm(lambda u, v, _: u * v)
    load = LinearForm(lambda v, _: 1.0 * v)
    sigma, omega = 1.0 / slot.resistivity, 2.0 * np.pi * frequency
    eddy = sigma * sum(mass.assemble(part) for part in parts)
    columns = [sigma * load.assemble(part) for part in parts]
    rim = mesh.facets_satisfying(lambda p: p[1] > y[-1] - TINY)
    # Ampere's law round the slot: H_x = dA/dy / mu0 = -(all bars' current) / width at the top.
    top = -len(parts) / slot.width * load.assemble(FacetBasis(mesh, basis.elem, facets=rim))
    area = slot.bar_width * slot.bar_height
    # A is free by a constant, which the U_k take up: one node is held.
    kept = np.arange(1, basis.N)
    matrix = csc_matrix(stiffness.assemble(basis) + 1j * omega * eddy)[kept][:, kept]
    sides = np.zeros((basis.N, 1 + len(parts)), dtype=np.complex128)
    sides[kept] = splu(matrix, permc_spec="MMD_AT_PLUS_A").solve(
        np.stack([top, *columns], axis=1)[kept].astype(np.complex128)
    )
    # Currents of the bars: sigma area U - j omega columns . A = 1, A = sides (1, U).
    linked = 1j * omega * np.stack(columns) @ sides
    u = np.linalg.solve(sigma * area * np.eye(len(parts)) - linked[:, 1:], 1.0 + linked[:, 0])
    a = sides @ np.append(1.0, u)
    factor, field = [], []
    for part, voltage in zip(parts, u, strict=True):
        own = part.interpolate(a)
        e = voltage - 1j * omega * np.asarray(own)
        factor.append(sigma**2 * area * float(np.sum(np.abs(e) ** 2 * part.dx)))
        field.append(float(abs(np.sum(np.asarray(own.grad)[1] * part.dx))) / area)
    return BarLosses(np.array(factor), np.array(field))


def _between(height: FloatArray, floor: float, slot: BarSlot) -> npt.NDArray[np.bool_]:
    return (height > floor) & (height < floor + slot.bar_height)


def _grid_lines(slot: BarSlot) -> tuple[FloatArray, FloatArray, list[float]]:
    """Grid lines across and along the slot's depth from its bottom, and the bars' undersides."""
    side = 0.5 * (slot.width - slot.bar_width)
    beside = np.linspace(0.0, side, ACROSS[0] + 1)
    x = [beside, np.linspace(side, slot.width - side, ACROSS[1] + 1), slot.width - beside]
    # Cosine steps: thin elements at the faces, where current crowds.
    steps = 0.5 - 0.5 * np.cos(np.pi * np.arange(LAYERS + 1) / LAYERS)
    floors = [slot.spacing + n * (slot.bar_height + slot.spacing) for n in range(slot.bars)]
    top = floors[-1] + slot.bar_height + slot.above
    y = [np.array([0.0, top]), *(floor + slot.bar_height * steps for floor in floors)]
    return _merged(x), _merged(y), floors


def _merged(parts: list[FloatArray]) -> FloatArray:
    """All lines in order, each once."""
    lines = np.sort(np.concatenate(parts))
    merged: FloatArray = lines[np.append(True, np.diff(lines) > TINY)]
    return merged
