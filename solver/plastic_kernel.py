"""An elastic-plastic body on its supports: internal forces and tangent at given displacements.

    r_i = int B_i' sigma(epsilon - epsilon_p) dA - f_i,   K = int B' (d sigma / d epsilon) B dA

per metre of thickness; sigma comes from `return_mapping`, small strains. The gradients B are turned
once into the frames of the supports, so that all is in the unknowns themselves. Element matrices of
elements that do not flow are kept. Second-order triangles with six points do not lock: plane stress
leaves the thickness free.
Cost measured, one core, 2 513 elements: a residual 8 ms, a tangent with its factor 28 ms.
Axes: n_elem, n_qp = 6, n_node, n_unknown, 12 displacements of an element, 3 strains xx yy xy.
"""

from dataclasses import dataclass, replace

import numpy as np

from .elastic import ElasticBody, stress_of_strain
from .linear import SparseSolver, analyse
from .return_mapping import (
    INSIDE,
    Criterion,
    Returned,
    YieldCurve,
    equivalent,
    joined,
    returned,
    split,
    tangent,
)
from .stiffness import element_stiffness, frame_matrices, on_unknowns
from .supports import Supports, leaves_motion, scattered
from .types import FloatArray, IntArray

# Share of the elastic stiffness that the tangent of flowing points keeps: this times the relative
# residual, within these limits (Levenberg's damping). Perfectly plastic points have a direction
# without stiffness, a corner of Tresca's hexagon has none at all. Only the way depends on it, not
# where it ends. Limit load of a solid disc, 2 900 elements: with 1e-7 throughout von Mises took
# 7.6 s and Tresca did not settle; so damped 1.6 and 34 s.
DAMPING = 0.1
LEAST_DAMPING, MOST_DAMPING = 1e-7, 1e-3


@dataclass(frozen=True, slots=True, eq=False)
class PlasticState:
    """What a body remembers."""

    plastic_strain: FloatArray  # (n_elem, n_qp, 3)
    hardened: FloatArray  # (n_elem, n_qp), equivalent plastic strain
    stress: FloatArray  # (n_elem, n_qp, 3), Pa
    moved: FloatArray  # (n_unknown,), m, in the frames of the supports
    factor: float  # of loads and prescribed displacements


@dataclass(frozen=True, slots=True, eq=False)
class PlasticBody:
    """A body with its supports, its yield law and the pattern of its matrix."""

    body: ElasticBody
    supports: Supports
    curve: YieldCurve
    criterion: Criterion
    number: IntArray  # (n_node, 2), unknowns of the nodes, -1 where held
    strain_of: FloatArray  # (n_elem, n_qp * 3, 12), strains of the displacements in the frames
    elastic: FloatArray  # (n_elem, 12, 12), N/m per metre, in the frames
    taken: IntArray  # (n_kept,), entries of all element matrices that the lower triangle takes
    place: IntArray  # (n_kept,), where they go
    n_entry: int
    solver: SparseSolver

    @property
    def n_unknown(self) -> int:
        """Unknown displacements."""
        return int(self.number.max()) + 1

    def displacement(self, state: PlasticState) -> FloatArray:
        """Displacement (n_node, 2) in m, in x and y."""
        moved = scattered(self.supports, self.number, state.moved, held=False)
        return moved + state.factor * scattered(
            self.supports, self.number, np.zeros(self.n_unknown)
        )


def plastic_body(
    body: ElasticBody,
    supports: Supports,
    curve: YieldCurve,
    criterion: Criterion = "von Mises",
) -> PlasticBody:
    """The body prepared; prescribed displacements of `supports` are scaled as loads are.

    Raises:
        ValueError: where the supports leave a rigid motion free.
    """
    mesh = body.mesh
    if leaves_motion(supports, mesh):
        raise ValueError("the supports leave a rigid motion of the body free")
    n_elem = len(mesh.elements)
    grad = body.quad.grad  # (n_elem, n_qp, 2, 6)
    b = np.zeros((n_elem, 6, 3, 6, 2))
    b[:, :, 0, :, 0] = b[:, :, 2, :, 1] = grad[:, :, 0]
    b[:, :, 1, :, 1] = b[:, :, 2, :, 0] = grad[:, :, 1]
    strain_of = b.reshape(n_elem, 18, 12)
    elastic = element_stiffness(body)
    frame = supports.frame[mesh.elements]
    turned = np.flatnonzero(np.any(frame != 1.0, axis=1))
    turn = frame_matrices(frame[turned])
    strain_of[turned] = strain_of[turned] @ turn
    elastic[turned] = turn.transpose(0, 2, 1) @ elastic[turned] @ turn
    number = supports.unknowns
    n = int(number.max()) + 1
    dofs = number[mesh.elements].reshape(-1, 12)
    row, column = np.broadcast_arrays(dofs[:, :, None], dofs[:, None, :])
    taken = np.flatnonzero(((column >= 0) & (row >= column)).ravel())
    key, place = np.unique(column.ravel()[taken] * n + row.ravel()[taken], return_inverse=True)
    indptr = np.searchsorted(key, n * np.arange(n + 1))
    solver = analyse(indptr.astype(np.int64), (key % n).astype(np.int64))
    return PlasticBody(
        body=body,
        supports=supports,
        curve=curve,
        criterion=criterion,
        number=number,
        strain_of=strain_of,
        elastic=np.ascontiguousarray(elastic),
        taken=taken,
        place=place,
        n_entry=len(key),
        solver=solver,
    )


def virgin(plastic: PlasticBody) -> PlasticState:
    """The unloaded body."""
    shape = (*plastic.body.quad.weight.shape, 3)
    zero = np.zeros(shape)
    return PlasticState(zero, zero[..., 0], zero, np.zeros(plastic.n_unknown), 0.0)


def on_load(plastic: PlasticBody, force: FloatArray) -> FloatArray:
    """Forces (n_unknown,) in N/m on the unknowns from nodal forces (n_node, 2) in x and y."""
    local = (force @ [1.0, 1.0j]) * np.conj(plastic.supports.frame)
    parts = np.stack([local.real, local.imag], axis=1)
    return on_unknowns(plastic.number, parts, plastic.n_unknown)


def element_motion(plastic: PlasticBody, moved: FloatArray, factor: float) -> FloatArray:
    """Displacements (n_elem, 12) in m of the elements' nodes, in their frames."""
    value = factor * plastic.supports.value[plastic.supports.master]
    local = np.where(plastic.number >= 0, moved[plastic.number], value)
    return np.asarray(local[plastic.body.mesh.elements].reshape(-1, 12))


def strains(plastic: PlasticBody, motion: FloatArray) -> FloatArray:
    """Strains (n_elem, n_qp, 3) of the elements' displacements (n_elem, 12)."""
    return np.asarray((plastic.strain_of @ motion[:, :, None]).reshape(len(motion), -1, 3))


@dataclass(frozen=True, slots=True, eq=False)
class Trial:
    """The body at displacements that may not be in equilibrium."""

    stress: FloatArray  # (n_elem, n_qp, 3), Pa
    hardened: FloatArray  # (n_elem, n_qp)
    strain: FloatArray  # (n_elem, n_qp, 3), total
    flows: IntArray  # (n_flow,), flat indices of the points that flow in this step
    trial: FloatArray  # (n_flow, 3), m d t, Pa
    back: Returned | None  # of those points


def stressed(plastic: PlasticBody, before: PlasticState, moved: FloatArray, factor: float) -> Trial:
    """Stresses after one step from the state `before` to displacements `moved` (n_unknown,)."""
    strain = strains(plastic, element_motion(plastic, moved, factor))
    trial = stress_of_strain(plastic.body, strain - before.plastic_strain)
    parts = split(trial).reshape(-1, 3)
    hardened = before.hardened.ravel()
    level = equivalent(parts, plastic.criterion)
    flows = np.flatnonzero(level > INSIDE * plastic.curve.at(hardened)[0])
    stress, after = trial.reshape(-1, 3).copy(), hardened.copy()
    back = None
    if flows.size:
        moduli = _moduli(plastic.body, flows)
        back = returned(parts[flows], hardened[flows], *moduli, plastic.curve, plastic.criterion)
        stress[flows], after[flows] = joined(back.stress), back.hardened
    return Trial(
        stress=stress.reshape(strain.shape),
        hardened=after.reshape(strain.shape[:2]),
        strain=strain,
        flows=flows,
        trial=parts[flows],
        back=back,
    )


def internal_force(plastic: PlasticBody, stress: FloatArray) -> FloatArray:
    """Forces (n_unknown,) in N/m that hold the stresses (n_elem, n_qp, 3)."""
    dofs = plastic.number[plastic.body.mesh.elements].reshape(-1, 12)
    return on_unknowns(dofs, element_force(plastic, stress), plastic.n_unknown)


def element_force(plastic: PlasticBody, stress: FloatArray) -> FloatArray:
    """The same (n_elem, 12), element by element, in the frames."""
    pull = (plastic.body.quad.weight[..., None] * stress).reshape(len(stress), 1, 18)
    return np.asarray((pull @ plastic.strain_of)[:, 0])


def factorise(plastic: PlasticBody, at: Trial, residual: float = 0.0) -> None:
    """Factorise the tangent at `at`, damped by a relative `residual`, in the body's solver."""
    damping = min(max(DAMPING * residual, LEAST_DAMPING), MOST_DAMPING)
    matrices = plastic.elastic
    if at.back is not None:
        matrices = matrices.copy()
        n_qp = plastic.body.quad.weight.shape[1]
        chosen = np.unique(at.flows // n_qp)
        law = _elastic_law(plastic.body, chosen)  # (n, 3, 3)
        points = np.repeat(law[:, None], n_qp, axis=1)
        element = np.searchsorted(chosen, at.flows // n_qp)
        slope = tangent(
            at.back,
            at.trial,
            *_moduli(plastic.body, at.flows),
            plastic.curve,
            plastic.criterion,
        )
        points[element, at.flows % n_qp] = slope + damping * law[element]
        points *= plastic.body.quad.weight[chosen][..., None, None]
        b = plastic.strain_of[chosen]
        db = (points @ b.reshape(len(chosen), n_qp, 3, 12)).reshape(b.shape)
        matrices[chosen] = b.transpose(0, 2, 1) @ db
    values = np.bincount(plastic.place, matrices.ravel()[plastic.taken], plastic.n_entry)
    plastic.solver.factorise(np.asarray(values, dtype=np.float64))


def state_of(
    plastic: PlasticBody, before: PlasticState, at: Trial, moved: FloatArray, factor: float
) -> PlasticState:
    """The state that a step from `before` ends in; points that did not flow keep their strain."""
    e, nu = plastic.body.youngs_modulus[:, None], plastic.body.poissons_ratio[:, None]
    sx, sy, t = (at.stress[..., k] for k in range(3))
    elastic = np.stack([sx - nu * sy, sy - nu * sx, 2.0 * (1.0 + nu) * t], axis=-1)
    left = (at.strain - elastic / e[..., None]).reshape(-1, 3)
    plastic_strain = before.plastic_strain.reshape(-1, 3).copy()
    plastic_strain[at.flows] = left[at.flows]
    return PlasticState(
        plastic_strain.reshape(at.strain.shape), at.hardened, at.stress, moved, factor
    )


def _moduli(body: ElasticBody, points: IntArray) -> tuple[FloatArray, FloatArray]:
    """A and G (n,) in Pa at flat indices of points."""
    element = points // body.quad.weight.shape[1]
    e, nu = body.youngs_modulus[element], body.poissons_ratio[element]
    return 0.5 * e / (1.0 - nu), 0.5 * e / (1.0 + nu)


def _elastic_law(body: ElasticBody, elements: IntArray) -> FloatArray:
    """Plane stress law (n, 3, 3) in Pa of some elements."""
    chosen = replace(
        body,
        youngs_modulus=body.youngs_modulus[elements],
        poissons_ratio=body.poissons_ratio[elements],
    )
    unit = np.broadcast_to(np.eye(3), (len(elements), 3, 3))  # three strains, one a point
    return stress_of_strain(chosen, unit)
