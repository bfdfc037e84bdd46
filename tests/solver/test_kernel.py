"""The element kernel and its readable twin, against closed forms and their own derivative."""

import math
from collections.abc import Callable

import numpy as np
import pytest
from annulus import Ring, ring_mesh

from lamwright.solver import forms, kernel, steel_kernel
from lamwright.solver.types import FloatArray, PlanarMesh, Quadrature, ReluctivityLaw

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


def steel(n_qp: int) -> Twin:
    def run(mesh, a_elem, law):
        quad = kernel.quadrature(mesh.nodes, mesh.elements, n_qp)
        metric = steel_kernel.metric_of(quad)
        state = steel_kernel.steel_state(metric, a_elem.T, law)
        packed = steel_kernel.steel_tangent(metric, state)
        tangent = np.empty((6, 6, len(a_elem)))
        for entry, i, j in zip(packed, kernel.PACKED_ROWS, kernel.PACKED_COLUMNS, strict=True):
            tangent[i, j] = tangent[j, i] = entry
        return steel_kernel.steel_residual(metric, state).T, tangent.transpose(2, 0, 1)

    return run


def readable(n_qp: int) -> Twin:
    return lambda mesh, a_elem, law: forms.residual_and_tangent(mesh, a_elem, law, n_qp)


TWINS = {"kernel": fast, "steel": steel, "forms": readable}


@pytest.fixture(params=[f"{name}-{n_qp}" for name in TWINS for n_qp in (3, 6)])
def twin(request: pytest.FixtureRequest) -> Twin:
    name, n_qp = request.param.split("-")
    return TWINS[name](int(n_qp))


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
@pytest.mark.parametrize("kernel_of", [fast, steel])
def test_kernel_and_twin_agree(kernel_of: Callable[[int], Twin], n_qp: int) -> None:
    """The same forms by another library's element and mapping: 1e-10 of the largest entry."""
    a_elem = np.random.default_rng(2).normal(size=MESH.nodes.shape[0])[MESH.elements]
    for ours, theirs in zip(
        kernel_of(n_qp)(MESH, a_elem, law), readable(n_qp)(MESH, a_elem, law), strict=True
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


def test_steel_kernel_takes_elements_in_any_frame():
    """A frame turned and stretched at every element: the plain kernel with the same gradients."""
    rng = np.random.default_rng(4)
    plain = kernel.quadrature(MESH.nodes, MESH.elements)
    frame = np.eye(2) + 0.3 * rng.normal(size=(MESH.elements.shape[0], 1, 2, 2))
    quad = Quadrature(np.einsum("eqdk,eqki->eqdi", frame, plain.grad), plain.weight)
    a_elem = rng.normal(size=MESH.elements.shape)
    flux = kernel.flux_state(quad, a_elem, law)
    metric = steel_kernel.metric_of(quad)
    state = steel_kernel.steel_state(metric, a_elem.T, law)
    for ours, theirs in (
        (state.b2, np.sum(flux.grad_a**2, axis=2).T),
        (steel_kernel.steel_residual(metric, state), kernel.element_residual(quad, flux).T),
        (steel_kernel.steel_tangent(metric, state), kernel.packed_tangent(quad, flux)),
    ):
        assert ours == pytest.approx(theirs, abs=1e-12 * np.abs(theirs).max())


def test_linear_material_is_linearised_where_it_is():
    """B(H) is B there: nothing to choose, and nothing changes."""
    metric = steel_kernel.metric_of(kernel.quadrature(MESH.nodes, MESH.elements))
    rng = np.random.default_rng(5)

    def linear(b2: FloatArray) -> tuple[FloatArray, FloatArray]:
        return np.full_like(b2, NU_0), np.zeros_like(b2)

    old, new = (
        steel_kernel.steel_state(metric, rng.normal(size=MESH.elements.T.shape), linear)
        for _ in range(2)
    )
    ahead, change = steel_kernel.looked_ahead(metric, old, new, linear, lambda h: h / NU_0)
    assert ahead.gradient == pytest.approx(new.gradient, rel=1e-12)
    assert np.abs(change).max() < 1e-12 * np.abs(steel_kernel.steel_residual(metric, new)).max()


def test_look_ahead_by_hand():
    """B = 1 to 2 T along x, H = 400 B + 90 B^3: H_lin = 490 + 670, B(1160) solved by hand.

    The reference's first direction is twice as long as x, the point's weight 3 m^2.
    """
    metric = steel_kernel.Metric(
        slopes=np.eye(2),
        products=np.empty((0, 3)),
        weighted=np.array([3.0 / 4.0, 0.0, 3.0]).reshape(3, 1, 1),
        per_weight=np.full((1, 1), 1.0 / 3.0),
    )
    old, new = (
        steel_kernel.steel_state(metric, np.array([[2.0 * b], [0.0]]), law) for b in (1.0, 2.0)
    )
    assert (old.b2.item(), new.b2.item()) == pytest.approx((1.0, 4.0))
    b = float(np.roots([90.0, 0.0, 400.0, -1160.0])[-1].real)  # 1.6967 T
    ahead, change = steel_kernel.looked_ahead(
        metric, old, new, law, lambda h: np.where(np.isclose(h, 1160.0), b, np.nan)
    )
    middle = 0.5 * (2.0 + b)
    assert ahead.gradient[0, :, 0] == pytest.approx([2.0 * middle, 0.0])
    linear = 400.0 * middle + 90.0 * middle**3 + (400.0 + 270.0 * middle**2) * (2.0 - middle)
    # M times H by the reference, 2 (linear - 1520): half of it by x, times the weight.
    assert change[:, 0] == pytest.approx([1.5 * (linear - (800.0 + 720.0)), 0.0])
