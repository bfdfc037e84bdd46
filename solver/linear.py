"""Sparse symmetric positive definite systems: one interface of three methods, three libraries.

`analyse` fixes the pattern, `factorise` takes new values of the same pattern, `solve` a right
side. CHOLMOD (through cvxopt) is the default: on one pole its supernodal factorisation takes a
third of SuperLU's time and the analysis is kept. qdldl comes next, then SuperLU, which SciPy
always brings. Values are those of the lower triangle by columns, so that they can be written in
place; qdldl does not notice a changed pattern (it returns garbage), which is why no solver here
accepts anything but values.

CHOLMOD's order of elimination (minimum degree, Amestoy, Davis & Duff 1996) is found on the
triangles' corners alone, a quarter of the unknowns; a mid-side unknown goes before the first of its
two ends. Analysis 8 instead of 19 ms, factors as good (15 k unknowns, measured). Tried without
gain there: circle last, which would serve all rotor positions with one analysis (factors 19 instead
of 13 ms); all linear regions condensed (19 instead of 16 ms; `condensed` takes what elimination
begins with). More such trials stand in tests/benchmarks/README.md.
"""

from typing import Literal, Protocol

import numpy as np
from scipy.sparse import csc_matrix

from .types import FloatArray, IntArray

Method = Literal["auto", "cholmod", "qdldl", "superlu"]


class SparseSolver(Protocol):
    """An analysed pattern."""

    def factorise(self, values: FloatArray) -> None:
        """Factorise the matrix with these values of its lower triangle by columns."""

    def solve(self, rhs: FloatArray) -> FloatArray:
        """Solution for one right side (n,) with the last factorised values."""


def analyse(
    indptr: IntArray,
    indices: IntArray,
    method: Method = "auto",
    ends: IntArray | None = None,
) -> SparseSolver:
    """Solver for a pattern.

    Args:
        indptr: (n + 1,) starts of the columns of the lower triangle.
        indices: (n_entry,) rows, rising inside a column, the diagonal first.
        method: which library; `auto` takes the first that loads.
        ends: (n, 2), the two corners of every mid-side unknown (n where held), a corner twice
            itself; helps CHOLMOD to order.
    """
    if method in ("auto", "cholmod"):
        try:
            return CholmodSolver(indptr, indices, ends)
        except ImportError:
            if method == "cholmod":
                raise
    if method in ("auto", "qdldl"):
        try:
            return QdldlSolver(indptr, indices)
        except ImportError:
            if method == "qdldl":
                raise
    return SuperLuSolver(indptr, indices)


class CholmodSolver:
    """Supernodal Cholesky of CHOLMOD (Chen, Davis, Hager & Rajamanickam 2008) through cvxopt.

    It gets the matrix in the order of elimination and its upper triangle, which it need not permute
    and transpose any more: 0.93 of the time of a factorisation (15 k unknowns, measured).
    """

    def __init__(self, indptr: IntArray, indices: IntArray, ends: IntArray | None = None) -> None:
        """Analyse the pattern: fill-reducing ordering and elimination tree."""
        from cvxopt import amd, cholmod, matrix, spmatrix

        n = indptr.size - 1
        columns = np.repeat(np.arange(n), np.diff(indptr))
        if ends is None:
            graph = spmatrix(1.0, matrix(indices), matrix(columns), (n, n))
            self._order = np.array(amd.order(graph, uplo="L")).ravel()
        else:
            self._order = _order_by_corners(columns, indices, ends)
        turn = np.empty(n, dtype=np.int64)
        turn[self._order] = np.arange(n)
        self._turn = turn
        first = np.minimum(turn[indices], turn[columns])
        last = np.maximum(turn[indices], turn[columns])
        # By columns, then rows. No two entries are alike, so that one key does: 0.8 instead of
        # 3.1 ms of two for 35 k entries.
        self._gather = np.argsort(last * n + first)
        first, last = first[self._gather], last[self._gather]
        self._cholmod = cholmod
        self._matrix = spmatrix(1.0, matrix(first), matrix(last), (n, n))
        # The library takes no arrays: these are written through their views.
        self._values, self._side = matrix(0.0, (indices.size, 1)), matrix(0.0, (n, 1))
        self._values_view = np.asarray(self._values)[:, 0]
        self._side_view = np.asarray(self._side)[:, 0]
        # Else CHOLMOD would try its own order too. The options belong to the whole process.
        before = dict(cholmod.options)
        cholmod.options["nmethods"] = 1
        try:
            self._factor = cholmod.symbolic(self._matrix, matrix(np.arange(n)), uplo="U")
        finally:
            cholmod.options.clear()
            cholmod.options.update(before)

    def factorise(self, values: FloatArray) -> None:
        """Factorise the matrix with these values of its lower triangle by columns."""
        # With `clip` numpy writes in place; the numbers are in range. 0.5 of the time of indexing.
        values.take(self._gather, out=self._values_view, mode="clip")
        self._matrix.V = self._values
        self._cholmod.numeric(self._matrix, self._factor)

    def solve(self, rhs: FloatArray) -> FloatArray:
        """Solution for one right side (n,) with the last factorised values."""
        rhs.take(self._order, out=self._side_view, mode="clip")
        self._cholmod.solve(self._factor, self._side)
        return self._side_view.take(self._turn)


def corner_turns(columns: IntArray, rows: IntArray, ends: IntArray) -> IntArray:
    """When each corner is eliminated by minimum degree on the corners alone, (n + 1,).

    Middles, and what is held, never are: n.

    Args:
        columns: (n_entry,), of the lower triangle.
        rows: likewise.
        ends: (n, 2), as in `analyse`.
    """
    from cvxopt import amd, matrix, spmatrix

    n = ends.shape[0]
    is_corner = ends[:, 0] == np.arange(n)
    corner = np.flatnonzero(is_corner)
    number = np.cumsum(is_corner) - 1
    kept = is_corner[rows] & is_corner[columns]
    graph = spmatrix(
        1.0, matrix(number[rows[kept]]), matrix(number[columns[kept]]), (corner.size, corner.size)
    )
    turn = np.full(n + 1, n, dtype=np.int64)
    turn[corner[np.array(amd.order(graph, uplo="L")).ravel()]] = np.arange(corner.size)
    return turn


def _order_by_corners(columns: IntArray, rows: IntArray, ends: IntArray) -> IntArray:
    """Elimination order (n,): minimum degree on the corners, middles before their first end."""
    is_corner = ends[:, 0] == np.arange(ends.shape[0])
    key = 2 * corner_turns(columns, rows, ends)[ends].min(axis=1) + is_corner
    return np.argsort(key, kind="stable").astype(np.int64)


class QdldlSolver:
    """LDL' of qdldl: simplicial, permissive licence, wheels everywhere."""

    def __init__(self, indptr: IntArray, indices: IntArray) -> None:
        """Turn the pattern to the upper triangle by columns, which qdldl wants."""
        import qdldl

        n = indptr.size - 1
        numbered = csc_matrix((np.arange(indices.size) + 1, indices, indptr), shape=(n, n))
        self._upper = csc_matrix(numbered.T, dtype=np.float64)
        self._upper.sort_indices()
        self._gather = np.asarray(self._upper.data - 1, dtype=np.int64)
        self._qdldl = qdldl
        self._solver: qdldl.Solver | None = None

    def factorise(self, values: FloatArray) -> None:
        """Factorise the matrix with these values of its lower triangle by columns."""
        self._upper.data = values[self._gather]
        if self._solver is None:  # the library has no analysis without values
            self._solver = self._qdldl.Solver(self._upper, upper=True)
        else:
            self._solver.update(self._upper, upper=True)

    def solve(self, rhs: FloatArray) -> FloatArray:
        """Solution for one right side (n,) with the last factorised values."""
        assert self._solver is not None, "factorise first"
        return np.asarray(self._solver.solve(rhs), dtype=np.float64)


class SuperLuSolver:
    """LU of SuperLU in its symmetric mode: always there, no analysis kept."""

    def __init__(self, indptr: IntArray, indices: IntArray) -> None:
        """Prepare the gather from the lower triangle to the full matrix."""
        n = indptr.size - 1
        numbered = csc_matrix((np.arange(indices.size) + 1, indices, indptr), shape=(n, n))
        diagonal = csc_matrix((numbered.diagonal(), (np.arange(n), np.arange(n))), shape=(n, n))
        self._full = csc_matrix(numbered + numbered.T - diagonal, dtype=np.float64)
        self._gather = np.asarray(self._full.data - 1, dtype=np.int64)

    def factorise(self, values: FloatArray) -> None:
        """Factorise the matrix with these values of its lower triangle by columns."""
        from scipy.sparse.linalg import splu

        self._full.data = values[self._gather]
        self._factor = splu(
            self._full,
            permc_spec="MMD_AT_PLUS_A",
            diag_pivot_thresh=0.0,
            options={"SymmetricMode": True},
        )

    def solve(self, rhs: FloatArray) -> FloatArray:
        """Solution for one right side (n,) with the last factorised values."""
        return np.asarray(self._factor.solve(rhs), dtype=np.float64)
