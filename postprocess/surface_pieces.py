"""A coenergy surface as polynomials of its cells, for one point at a time.

SciPy's tensor splines take 50 us for each derivative at a single point, however few: a run in time
asks for five of them at 1e4 points one after the other. Polynomials of the cells give all in 20 us
(measured). Twin: `coenergy_surface.linkages` and `incremental`, which a test holds it to.
Axes: n cells of i_d, m cells of i_q, 6 powers of each.
"""

import math
from bisect import bisect_right
from dataclasses import dataclass

import numpy as np
from scipy.interpolate import BSpline

from lamwright.solver.types import FloatArray

from .coenergy_surface import CoenergySurface

DEGREE = 5


@dataclass(frozen=True, slots=True, eq=False)
class SurfacePieces:
    """W' in J of a cell as sum_jk c_jk (i_d - left_d)^j (i_q - left_q)^k."""

    surface: CoenergySurface
    breaks_d: tuple[float, ...]  # (n + 1,), A
    breaks_q: tuple[float, ...]  # (m + 1,), A
    coefficients: FloatArray  # (n, m, 6, 6)

    def __call__(self, i_d: float, i_q: float) -> tuple[float, float, float, float, float]:
        """psi_d, psi_q in V s and l_dd, l_dq, l_qq in H at currents in A.

        Raises:
            ValueError: currents outside the map.
        """
        surface = self.surface
        for name, value, reach in (
            ("i_d", i_d, surface.i_d_range),
            ("i_q", i_q, surface.i_q_range),
        ):
            if not reach[0] <= value <= reach[1]:
                raise ValueError(
                    f"{name}: currents outside the map, {reach[0]:.6g} to {reach[1]:.6g} A"
                )
        mirror_d = -1.0 if surface.even_d and i_d < 0.0 else 1.0
        mirror_q = -1.0 if surface.even_q and i_q < 0.0 else 1.0
        n, x = _powers(self.breaks_d, mirror_d * i_d)
        m, y = _powers(self.breaks_q, mirror_q * i_q)
        at = (x @ self.coefficients[n, m] @ y.T / 1.5).tolist()
        return (
            mirror_d * at[1][0],
            mirror_q * at[0][1],
            at[2][0],
            mirror_d * mirror_q * at[1][1],
            at[0][2],
        )


def surface_pieces(surface: CoenergySurface) -> SurfacePieces:
    """The polynomials of a surface's cells."""
    one_way = _polynomials(surface.knots_d, surface.coefficients)  # (6, n, n_basis_q)
    both = _polynomials(surface.knots_q, np.moveaxis(one_way, -1, 0))  # (6, m, 6, n)
    return SurfacePieces(
        surface=surface,
        breaks_d=tuple(np.unique(surface.knots_d).tolist()),
        breaks_q=tuple(np.unique(surface.knots_q).tolist()),
        coefficients=np.ascontiguousarray(both.transpose(3, 1, 2, 0)),
    )


def _polynomials(knots: FloatArray, coefficients: FloatArray) -> FloatArray:
    """Coefficients (6, n_cell, ...) of rising powers of the distance from each cell's left end."""
    left = np.unique(knots)[:-1]
    spline = BSpline(knots, coefficients, DEGREE)
    rows = [
        spline(left, nu=j) / math.factorial(j)  # of the cell on the right
        for j in range(DEGREE + 1)
    ]
    return np.array(rows)


def _powers(breaks: tuple[float, ...], value: float) -> tuple[int, FloatArray]:
    """The cell of a value, and (3, 6) powers of its distance: themselves, first, second slope."""
    k = min(max(bisect_right(breaks, value) - 1, 0), len(breaks) - 2)
    x = value - breaks[k]
    x2, x3, x4 = x * x, x**3, x**4
    return k, np.array(
        [
            [1.0, x, x2, x3, x4, x4 * x],
            [0.0, 1.0, 2.0 * x, 3.0 * x2, 4.0 * x3, 5.0 * x4],
            [0.0, 0.0, 2.0, 6.0 * x, 12.0 * x2, 20.0 * x3],
        ]
    )
