"""Three libraries behind one interface give the same solution of the same system."""

import sys

import numpy as np
import pytest
from scipy.sparse import csc_matrix, diags_array, eye_array, kron, tril

from lamwright.solver import linear
from lamwright.solver.linear import CholmodSolver, Method, QdldlSolver, SuperLuSolver, analyse
from lamwright.solver.types import FloatArray, IntArray

METHODS: tuple[Method, ...] = ("cholmod", "qdldl", "superlu")
N = 24


def grid_laplacian(contrast: float) -> csc_matrix:
    """Five-point Laplacian of a 24 x 24 grid with one half stiffer: condition 1e3 x contrast."""
    line = diags_array([-1.0, 2.0, -1.0], offsets=[-1, 0, 1], shape=(N, N))
    whole = kron(line, eye_array(N)) + kron(eye_array(N), line)
    scale = diags_array(np.where(np.arange(N * N) < N * N // 2, 1.0, contrast**0.5))
    return csc_matrix(scale @ whole @ scale)


def lower_of(matrix: csc_matrix) -> tuple[IntArray, IntArray, FloatArray]:
    lower = csc_matrix(tril(matrix))
    lower.sort_indices()
    return lower.indptr.astype(np.int64), lower.indices.astype(np.int64), lower.data


@pytest.mark.parametrize("method", METHODS)
def test_solution_satisfies_the_system(method: Method) -> None:
    """Residual within condition x rounding, 1e6 x 1e-16; new values need no new analysis."""
    rhs = np.random.default_rng(5).normal(size=N * N)
    indptr, indices, _ = lower_of(grid_laplacian(1.0))
    solver = analyse(indptr, indices, method)
    for contrast in (1.0, 1000.0, 7.0):
        matrix = grid_laplacian(contrast)
        solver.factorise(lower_of(matrix)[2])
        assert np.abs(matrix @ solver.solve(rhs) - rhs).max() < 1e-10 * np.abs(rhs).max()


def test_libraries_agree() -> None:
    """The same system by three factorisations: equal to condition x rounding."""
    rhs = np.random.default_rng(6).normal(size=N * N)
    indptr, indices, values = lower_of(grid_laplacian(100.0))
    solutions = []
    for method in METHODS:
        solver = analyse(indptr, indices, method)
        solver.factorise(values)
        solutions.append(solver.solve(rhs))
    for other in solutions[1:]:
        assert other == pytest.approx(solutions[0], abs=1e-10 * np.abs(solutions[0]).max())


@pytest.mark.parametrize("method", METHODS)
def test_arguments_are_left_alone(method: Method) -> None:
    """Neither values nor right side are overwritten by a library that works in place."""
    rhs = np.ones(N * N)
    indptr, indices, values = lower_of(grid_laplacian(1.0))
    kept = values.copy()
    solver = analyse(indptr, indices, method)
    solver.factorise(values)
    first = solver.solve(rhs)
    assert np.array_equal(values, kept)
    assert np.all(rhs == 1.0)
    assert np.array_equal(solver.solve(rhs), first)


def test_falls_back_where_a_library_is_missing(monkeypatch: pytest.MonkeyPatch) -> None:
    """CHOLMOD, then qdldl, then SuperLU, which SciPy always brings."""
    indptr, indices, _ = lower_of(grid_laplacian(1.0))
    assert isinstance(analyse(indptr, indices), CholmodSolver)
    monkeypatch.setitem(sys.modules, "cvxopt", None)
    assert isinstance(analyse(indptr, indices), QdldlSolver)
    monkeypatch.setitem(sys.modules, "qdldl", None)
    assert isinstance(analyse(indptr, indices), SuperLuSolver)
    with pytest.raises(ImportError, match="cvxopt"):
        linear.analyse(indptr, indices, "cholmod")
