"""What Newton's iteration sees of a machine at one operating point: residual and tangent system.

Either of all unknowns, as the adjoint and the error bars want it, or of those that are kept when
linear ones have gone (`condensed`), which is what the iteration itself runs on. The residuals of
both are alike: rows that are gone hold exactly.
"""

from dataclasses import dataclass

import numpy as np
from scipy.sparse import csc_matrix, csr_matrix

from .condensed import SteelPlaces
from .linear import SparseSolver
from .model import Iron
from .pattern import Pattern, summed
from .steel_kernel import SteelState, looked_ahead, steel_residual, steel_state, steel_tangent
from .types import FloatArray


@dataclass(frozen=True, slots=True, eq=False)
class LinearPart:
    """The linear elements' matrix at one position, and how the whole tangent is solved."""

    pattern: Pattern  # that of steel included
    values: FloatArray  # (n_slot,)
    diagonal: FloatArray  # (n_dof,)
    below: csc_matrix  # what is below the diagonal and not 0: half of the pattern is steel's alone
    above: csr_matrix  # its transpose, on the same values
    solver: SparseSolver

    def times(self, a: FloatArray) -> FloatArray:
        """Linear part of the residual, (n_dof,) in A."""
        product: FloatArray = self.diagonal * a
        product += self.below @ a
        product += self.above @ a
        return product


def linear_part(pattern: Pattern, values: FloatArray, solver: SparseSolver) -> LinearPart:
    """The linear part from the entries (n_slot,) of its lower triangle by columns."""
    starts = pattern.indptr
    is_filled = values != 0.0
    is_filled[starts[:-1]] = False  # the diagonal comes first in its column
    filled = np.flatnonzero(is_filled)
    entries = values[filled], pattern.indices[filled], np.searchsorted(filled, starts)
    shape = (starts.size - 1, starts.size - 1)
    return LinearPart(
        pattern=pattern,
        values=values,
        diagonal=values[starts[:-1]],
        below=csc_matrix(entries, shape=shape),
        above=csr_matrix(entries, shape=shape),
        solver=solver,
    )


@dataclass(frozen=True, slots=True, eq=False)
class PointEnergy:
    """Energy of the field less that of the currents, by its derivatives."""

    iron: Iron
    places: SteelPlaces
    linear: LinearPart
    load: FloatArray  # (n_dof,), A

    def residual(self, a: FloatArray) -> tuple[FloatArray, SteelState]:
        """Residual (n_dof,) in A and the state of the steel."""
        iron = self.iron
        a_elem = np.append(a, 0.0).take(self.places.dof.T)
        a_elem *= iron.sign.T
        state = steel_state(iron.metric, a_elem, iron.law)
        r = summed(self.places.residual_scatter, steel_residual(iron.metric, state))
        r += self.linear.times(a)
        r -= self.load
        return r, state

    def look_ahead(
        self, linear: SteelState, state: SteelState, residual: FloatArray
    ) -> tuple[SteelState, FloatArray]:
        """Where to linearise the steel next, see `steel_kernel.looked_ahead`."""
        iron = self.iron
        ahead, change = looked_ahead(iron.metric, linear, state, iron.law, iron.inverse)
        return ahead, residual + summed(self.places.residual_scatter, change)

    def solve_tangent(self, state: SteelState, rhs: FloatArray) -> FloatArray:
        """Solution of the tangent system for a right side (n_dof,)."""
        values = summed(self.places.scatter, steel_tangent(self.iron.metric, state))
        values += self.linear.values
        self.linear.solver.factorise(values)
        return self.linear.solver.solve(rhs)

    def solve_held(self, rhs: FloatArray) -> FloatArray:
        """Solution (n_dof,) of the tangent system factorised last."""
        return self.linear.solver.solve(rhs)
