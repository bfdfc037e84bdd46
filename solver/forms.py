"""The magnetic energy's first and second variation as weak forms. Fast twin: `kernel.py`.

Written to be read, and to hold `kernel.residual_and_tangent` to: same numbers from another
library's element, mapping and forms (tests/solver/test_kernel.py: 1e-10). Twelve times slower.
"""

import numpy as np
import skfem
from skfem.helpers import dot, grad

from .kernel import quadrature_rule
from .types import FloatArray, PlanarMesh, ReluctivityLaw


def residual_and_tangent(
    mesh: PlanarMesh, a_elem: FloatArray, law: ReluctivityLaw, n_qp: int = 3
) -> tuple[FloatArray, FloatArray]:
    """Element residuals and tangents at the vector potential `a_elem`.

    Args:
        mesh: whose elements all follow `law`.
        a_elem: (n_elem, 6), nodal vector potential in Wb/m, equal where elements share a node.
        law: |B|^2 in T^2 -> nu in m/H and nu' in m/(H T^2).
        n_qp: quadrature points an element, 3 or 6.

    Returns:
        residual (n_elem, 6) in A; tangent (n_elem, 6, 6) in m/H, symmetric.
    """

    @skfem.LinearForm
    def residual(v, w):  # type: ignore[no-untyped-def]
        nu, _ = law(dot(grad(w.a), grad(w.a)))
        return nu * dot(grad(w.a), grad(v))

    @skfem.BilinearForm
    def tangent(u, v, w):  # type: ignore[no-untyped-def]
        nu, dnu = law(dot(grad(w.a), grad(w.a)))
        along_u, along_v = dot(grad(w.a), grad(u)), dot(grad(w.a), grad(v))
        return nu * dot(grad(u), grad(v)) + 2.0 * dnu * along_u * along_v

    points, weights = quadrature_rule(n_qp)
    basis = skfem.Basis(
        skfem.MeshTri2(mesh.nodes.T.copy(), mesh.elements.T.copy()),
        skfem.ElementTriP2(),
        quadrature=(points.T, weights),
    )
    a = np.zeros(basis.N)
    a[basis.element_dofs] = a_elem.T
    field = basis.interpolate(a)
    r = residual.elemental(basis, a=field).tolocal()
    k = tangent.elemental(basis, a=field).tolocal()
    return np.asarray(r, dtype=np.float64), np.asarray(k, dtype=np.float64)
