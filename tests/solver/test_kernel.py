"""The element kernel and its readable twin, against closed forms and their own derivative."""

import math
from collections.abc import Callable

import numpy as np
import pytest
from annulus import Ring, ring_mesh

from lamwright.solver import forms, kernel
from lamwright.solver.types import FloatArray, PlanarMesh, ReluctivityLaw

NU_0, NU_2 = 400.0, 90.0  # invented law nu = NU_0 + NU_2 |B|^2, m/H and m/(H T^2)
# A quarter disc of radius 1 m: straight rays, curved rim, triangles of all sizes.
MESH = ring_mesh(0.0, (Ring("rotor_iron", 1.0, 4),), math.pi / 2.0, 6)

Twin = Callable[[PlanarMesh, FloatArray, ReluctivityLaw], tuple[FloatArray, FloatArray]]


def law(b2: FloatArray) -> tuple[FloatArray, FloatArray]:
    return NU_0 + NU_2 * b2, np.full_like(b2, NU_2)


def fast(n_qp: int) -> Twin:
    def run(mesh, a_elem, law):
        return kernel.residual_and_tangent(
            kernel.quadrature(mesh.nodes, mesh.elements, n_qp), a_elem, law
        )

    return run


def readable(n_qp: int) -> Twin:
    return lambda mesh, a_elem, law: forms.residual_and_tangent(mesh, a_elem, law, n_qp)


@pytest.fixture(params=["kernel-3", "kernel-6", "forms-3", "forms-6"])
def twin(request: pytest.FixtureRequest) -> Twin:
    name, n_qp = request.param.split("-")
    return (fast if name == "kernel" else readable)(int(n_qp))


@pytest.mark.parametrize("b_t", [0.0, 0.3, 1.8])
def test_uniform_field_gives_h_b_and_its_slope(twin: Twin, b_t: float) -> None:
    """A = b y, H = nu0 b + nu2 b^3 (derived): A.r = H b S and A.K.A = b^2 S dH/db, area S.

    Second-order elements hold a linear A exactly and the area is the mesh's own: rounding only.
    """
    a_elem = (b_t * MESH.nodes[:, 1])[MESH.elements]
    r, k = twin(MESH, a_elem, law)
    area = kernel.quadrature(MESH.nodes, MESH.elements, 3).weight.sum()
    assert np.sum(a_elem * r) == pytest.approx(area * (NU_0 * b_t + NU_2 * b_t**3) * b_t, rel=1e-12)
    a_k_a = np.einsum("ei,eij,ej->", a_elem, k, a_elem)
    assert a_k_a == pytest.approx(area * b_t**2 * (NU_0 + 3 * NU_2 * b_t**2), rel=1e-12)


def test_tangent_is_the_derivative_of_the_residual(twin: Twin) -> None:
    """Central differences: error eps^2 times the third variation, here 1e-8 of K v."""
    a, v = np.random.default_rng(1).normal(size=(2, MESH.nodes.shape[0]))
    eps = 1e-4
    ahead, behind = (twin(MESH, (a + s * v)[MESH.elements], law)[0] for s in (eps, -eps))
    exact = np.einsum("eij,ej->ei", twin(MESH, a[MESH.elements], law)[1], v[MESH.elements])
    assert (ahead - behind) / (2 * eps) == pytest.approx(exact, abs=1e-7 * np.abs(exact).max())


@pytest.mark.parametrize("n_qp", [3, 6])
def test_kernel_and_twin_agree(n_qp: int) -> None:
    """The same forms by another library's element and mapping: 1e-10 of the largest entry."""
    a_elem = np.random.default_rng(2).normal(size=MESH.nodes.shape[0])[MESH.elements]
    for ours, theirs in zip(
        fast(n_qp)(MESH, a_elem, law), readable(n_qp)(MESH, a_elem, law), strict=True
    ):
        assert ours == pytest.approx(theirs, abs=1e-10 * np.abs(theirs).max())


@pytest.mark.parametrize(("n_qp", "degree"), [(3, 2), (6, 4)])
def test_quadrature_is_exact_up_to_its_degree(n_qp: int, degree: int) -> None:
    """Over the triangle int xi^a eta^b = a! b! / (a + b + 2)! (derived); tables of 15 digits."""
    points, weights = kernel.quadrature_rule(n_qp)
    for a in range(degree + 1):
        for b in range(degree + 1 - a):
            exact = math.factorial(a) * math.factorial(b) / math.factorial(a + b + 2)
            assert np.sum(weights * points[:, 0] ** a * points[:, 1] ** b) == pytest.approx(
                exact, rel=1e-13
            )


def test_shape_integrals_sum_to_the_curved_area() -> None:
    """Sum of int N_i = area; parabolic edges of 15 degrees miss pi/4 by about (sweep/2)^4 / 45."""
    total = kernel.shape_integrals(MESH.nodes, MESH.elements).sum()
    assert total == pytest.approx(math.pi / 4.0, rel=2e-5)
    assert total == pytest.approx(
        kernel.quadrature(MESH.nodes, MESH.elements, 6).weight.sum(), rel=1e-13
    )


def test_linear_material_is_linearised_where_it_is():
    """B(H) is B there: nothing to choose, and nothing changes."""
    quad = kernel.quadrature(MESH.nodes, MESH.elements)
    rng = np.random.default_rng(5)

    def linear(b2: FloatArray) -> tuple[FloatArray, FloatArray]:
        return np.full_like(b2, NU_0), np.zeros_like(b2)

    old, new = (
        kernel.flux_state(quad, rng.normal(size=MESH.elements.shape), linear) for _ in range(2)
    )
    ahead, change = kernel.looked_ahead(old, new, linear, lambda h: h / NU_0)
    assert ahead.grad_a == pytest.approx(new.grad_a, rel=1e-13)
    assert np.abs(change).max() < 1e-12 * NU_0 * np.abs(new.grad_a).max()


def test_look_ahead_by_hand():
    """B = 1 to 2 T along x, H = 400 B + 90 B^3: H_lin = 490 + 670, B(1160) solved by hand."""
    one = np.array([[[1.0, 0.0]]])
    old, new = (kernel.FluxState(g, *law((g**2).sum(axis=2))) for g in (one, 2.0 * one))
    b = float(np.roots([90.0, 0.0, 400.0, -1160.0])[-1].real)  # 1.6967 T
    ahead, change = kernel.looked_ahead(old, new, law, lambda h: np.full_like(h, b))
    middle = 0.5 * (2.0 + b)
    assert ahead.grad_a[0, 0] == pytest.approx([middle, 0.0])
    linear = 400.0 * middle + 90.0 * middle**3 + (400.0 + 270.0 * middle**2) * (2.0 - middle)
    assert change[0, 0] == pytest.approx([linear - (800.0 + 720.0), 0.0])
