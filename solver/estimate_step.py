"""Two Newton steps on the quartered mesh, without a matrix and without a factorisation there.

The coarse solution, carried over exactly, leaves a residual on the finer mesh. The correction
K d = -r is solved by conjugate gradients, preconditioned by a Jacobi sweep and the coarse mesh's
own factor (two levels, added: Bramble, Pasciak & Xu 1990, from memory). One step alone claims up
to twice the change of the linkages: where the steel saturates in a corner it overshoots. With the
second, linkages and torque are within 20 % of the fully converged finer solution's change
(measured, tests/solver/test_estimate_step.py), which is enough for an error. Cost measured, one
core: 40 ms to prepare 18 000 elements, then 0.12 s a position. The model of a finer mesh with twice
as many takes 1.3 s to prepare and 3 s to solve.

Axes: n_node nodes of the finer mesh, rotor first; n_dof its unknowns; n_elem its elements in the
order steel, rotor's gap, others; 21 entries of the lower triangle of an element matrix.
"""

from collections.abc import Callable
from dataclasses import dataclass, field

import numpy as np
from scipy.sparse import block_diag, csr_matrix

from lamwright.geometry.section import CrossSection
from lamwright.geometry.winding import WindingTable

from .cache import Cache
from .estimate_mesh import SparseRows, quartered_sector
from .field import at_position, whole_energy
from .gap import rotor_place, sheared
from .integrals import dq_values, gap_torque, phase_currents
from .kernel import (
    PACKED_COLUMNS,
    PACKED_ROWS,
    FluxState,
    element_residual,
    flux_state,
    packed_tangent,
    quadrature,
    quadrature_places,
)
from .magnet import magnet_source
from .model import (
    MagneticModel,
    joined_parts,
    linear_reluctivity,
    linear_tangent,
    linkage_functional,
    material_of_elem,
    representatives,
)
from .pattern import Numbering, node_values, number_unknowns, turned_numbering
from .steel import NU_0
from .types import FieldSolution, FloatArray, IntArray, Quadrature, SectorMesh

# Of the preconditioned residual, first and second step.
CG_TOLERANCES = (0.05, 0.1)
CG_STEPS = 40  # 20 are the most seen


@dataclass(frozen=True, slots=True, eq=False)
class FineLevel:
    """The quartered mesh of a model: all that no position changes."""

    model: MagneticModel  # the coarse one
    sector: SectorMesh
    numbering: Numbering
    nodes: FloatArray  # (n_node, 2), m
    elements: IntArray  # (n_elem, 6)
    n_rotor_iron: int
    n_iron: int
    n_gap: int
    iron_quad: Quadrature
    others: FloatArray  # (21, n_others), linear tangents
    stator_gap: IntArray  # (n_stator_gap,), elements
    linkage: FloatArray  # (3, n_dof)
    magnet: FloatArray  # (n_dof,), load of the magnets
    representative: IntArray  # (n_dof,), a node with sign + for every unknown
    carry: SparseRows  # (n_dof, n_node of the coarse mesh)
    gaps: Cache = field(repr=False)


@dataclass(frozen=True, slots=True)
class Change:
    """What the finer mesh adds to the figures of one solution, whole machine."""

    torque: float  # N m
    psi_d: float  # V s
    psi_q: float  # V s
    steps: int  # of the conjugate gradients


@dataclass(frozen=True, slots=True, eq=False)
class _Gap:
    """The gap at one position."""

    rotor: FloatArray  # (21, n_gap), tangents of the rotor's half
    elements: IntArray  # both halves
    quad: Quadrature
    places: FloatArray


@dataclass(frozen=True, slots=True, eq=False)
class _Operator:
    """Element matrices at work on the unknowns."""

    dof: IntArray  # (6, n_elem)
    sign: FloatArray  # (6, n_elem)
    matrix: FloatArray  # (6, 6, n_elem), symmetric
    n_dof: int

    def times(self, a: FloatArray) -> FloatArray:
        """K a, (n_dof,)."""
        x = self.sign * np.append(a, 0.0)[self.dof]
        # One pass; over the lower triangle it takes 42 with temporaries, three times the time.
        return self.summed(np.einsum("ije,je->ie", self.matrix, x))

    def diagonal(self) -> FloatArray:
        """Diagonal of K, but for elements that hold both nodes of a tie."""
        return _binned(self.dof, np.einsum("iie->ie", self.matrix), self.n_dof)

    def summed(self, elements: FloatArray) -> FloatArray:
        """Element vectors (6, n_elem) summed to (n_dof,)."""
        return _binned(self.dof, self.sign * elements, self.n_dof)


@dataclass(frozen=True, slots=True, eq=False)
class _Equations:
    """The field equations of the finer mesh at one position and load."""

    level: FineLevel
    load: FloatArray  # (n_dof,), A
    steel: _Operator  # without matrices
    linear: _Operator

    def residual(self, a: FloatArray) -> tuple[FloatArray, FluxState]:
        """Residual (n_dof,) in A and the state of the steel."""
        quad, steel = self.level.iron_quad, self.steel
        a_elem = (steel.sign * np.append(a, 0.0)[steel.dof]).T
        state = flux_state(quad, a_elem, lambda b2: _law(self.level, b2))
        r = steel.summed(element_residual(quad, state).T)
        r += self.linear.times(a)
        r -= self.load
        return r, state

    def tangent(self, state: FluxState) -> _Operator:
        """Derivative of the residual."""
        steel = _unpacked(packed_tangent(self.level.iron_quad, state))
        return _Operator(
            dof=np.concatenate([self.steel.dof, self.linear.dof], axis=1),
            sign=np.concatenate([self.steel.sign, self.linear.sign], axis=1),
            matrix=np.concatenate([steel, self.linear.matrix], axis=2),
            n_dof=self.steel.n_dof,
        )


def fine_level(model: MagneticModel, section: CrossSection, winding: WindingTable) -> FineLevel:
    """Quarter the mesh of `model` and prepare it for all positions.

    Args:
        model: solved on its own mesh.
        section: the pole that the mesh is of.
        winding: conductors of all slots.
    """
    sector, rotor, stator = quartered_sector(model.sector, section)
    numbering = number_unknowns(sector)
    nodes, elements = joined_parts(sector)
    materials = np.repeat(material_of_elem(model.sector, section), 4)
    is_gap = np.zeros(materials.size, dtype=bool)
    is_gap[sector.rotor.elements_of("gap_rotor")] = True
    is_iron = np.isin(materials, ("rotor_steel", "stator_steel"))
    iron, gap, others = (np.flatnonzero(g) for g in (is_iron, is_gap, ~is_iron & ~is_gap))
    nu = np.repeat(linear_reluctivity(model.sector, section, model.settings), 4)[others]
    order = np.concatenate([iron, gap, others])
    stator_gap = sector.rotor.elements.shape[0] + sector.stator.elements_of("gap_stator")
    representative = representatives(numbering, sector)
    carry = csr_matrix(block_diag([rotor.carry, stator.carry], format="csr"))
    return FineLevel(
        model=model,
        sector=sector,
        numbering=numbering,
        nodes=nodes,
        elements=elements[order],
        n_rotor_iron=int(np.sum(materials[iron] == "rotor_steel")),
        n_iron=iron.size,
        n_gap=gap.size,
        iron_quad=quadrature(nodes, elements[iron], model.settings.iron_points),
        others=linear_tangent(quadrature(nodes, elements[others]), nu),
        stator_gap=elements[stator_gap],
        linkage=linkage_functional(sector, winding, numbering),
        magnet=magnet_source(sector.rotor, section.rotor, numbering, model.settings.magnet).load,
        representative=representative,
        carry=carry[representative],
        gaps=Cache(2),
    )


def changes(level: FineLevel, solution: FieldSolution) -> Change:
    """What two Newton steps on the finer mesh change; arguments as in `finer_field`."""
    return finer_field(level, solution)[0]


def finer_field(level: FineLevel, solution: FieldSolution) -> tuple[Change, FloatArray]:
    """What two Newton steps on the finer mesh change, and A_z (n_node,) in Wb/m after them.

    Args:
        level: of the model that the solution is of.
        solution: converged on the coarse mesh.
    """
    model = level.model
    place = rotor_place(model.sector, model.axis_a + solution.position)
    dof, sign = turned_numbering(level.numbering, 2 * place.shift)
    gap = level.gaps.get(place.rest, lambda: _gap_at(level, place.rest))
    a_coarse = np.concatenate([solution.a_rotor, solution.a_stator])
    a = np.asarray(level.carry @ a_coarse)
    theta_e = model.sector.pole_pairs * solution.position
    currents = phase_currents(solution.i_d, solution.i_q, theta_e)
    load = currents @ level.linkage + level.magnet
    equations = _equations(level, gap, dof, sign, load)
    coarse = _coarse_solver(level, solution)
    count = 0
    for tolerance in CG_TOLERANCES:
        residual, state = equations.residual(a)
        step, steps = _solved(equations.tangent(state), coarse, -residual, tolerance)
        a += step
        count += steps
    per_machine = model.sector.sectors * model.stack_length
    psi_d, psi_q = dq_values(per_machine * (level.linkage @ a), theta_e)
    a_node = node_values(dof, sign, a)
    thickness = model.bore_radius - model.rim_radius
    torque = gap_torque(gap.quad, gap.places, a_node[gap.elements], thickness)
    change = Change(
        torque=per_machine * torque - solution.torque,
        psi_d=psi_d - solution.psi_d,
        psi_q=psi_q - solution.psi_q,
        steps=count,
    )
    return change, a_node


def _gap_at(level: FineLevel, rest: float) -> _Gap:
    """The gap when the rotor's half is sheared by `rest` rad."""
    model = level.model
    rotor = level.elements[level.n_iron : level.n_iron + level.n_gap]
    nodes = level.nodes.copy()
    touched = np.unique(rotor)
    nodes[touched] = sheared(nodes[touched], rest, model.rim_radius, model.sector.circle_radius)
    elements = np.concatenate([rotor, level.stator_gap])
    quad = quadrature(nodes, elements, 6)
    own = Quadrature(quad.grad[: level.n_gap], quad.weight[: level.n_gap])
    return _Gap(
        rotor=linear_tangent(own, np.full(level.n_gap, NU_0)),
        elements=elements,
        quad=quad,
        places=quadrature_places(nodes, elements, 6),
    )


def _equations(
    level: FineLevel, gap: _Gap, dof: IntArray, sign: FloatArray, load: FloatArray
) -> _Equations:
    n_iron, n_dof = level.n_iron, level.numbering.n_dof
    iron, others = level.elements[:n_iron].T, level.elements[n_iron:].T
    linear = _unpacked(np.concatenate([gap.rotor, level.others], axis=1))
    none = np.zeros((6, 6, 0))
    return _Equations(
        level=level,
        load=load,
        steel=_Operator(dof[iron], sign[iron], none, n_dof),
        linear=_Operator(dof[others], sign[others], linear, n_dof),
    )


def _law(level: FineLevel, b2: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Reluctivity and slope for |B|^2 (n_qp, n_iron)."""
    iron = level.model.iron
    if iron.rotor_law is iron.stator_law:
        return iron.rotor_law(b2)
    rotor = iron.rotor_law(b2[:, : level.n_rotor_iron])
    stator = iron.stator_law(b2[:, level.n_rotor_iron :])
    nu, dnu = (np.concatenate(pair, axis=1) for pair in zip(rotor, stator, strict=True))
    return nu, dnu


def _coarse_solver(level: FineLevel, solution: FieldSolution) -> Callable[[FloatArray], FloatArray]:
    """The coarse mesh's tangent, inverted, between residual and unknowns of the finer mesh."""
    model = level.model
    place = at_position(model, solution.position)
    n_coarse = model.numbering.n_dof
    coarse = whole_energy(model, place, np.zeros(n_coarse))
    a_coarse = np.concatenate([solution.a_rotor, solution.a_stator])[model.representative]
    state = coarse.residual(a_coarse)[1]
    coarse.solve_tangent(state, np.zeros(n_coarse))

    def solved(r: FloatArray) -> FloatArray:
        gathered = np.asarray(level.carry.T @ r)
        own = _binned(place.dof, place.sign * gathered, n_coarse)
        nodal = node_values(place.dof, place.sign, place.linear.solver.solve(own))
        return np.asarray(level.carry @ nodal)

    return solved


def _solved(
    operator: _Operator,
    coarse: Callable[[FloatArray], FloatArray],
    rhs: FloatArray,
    tolerance: float,
) -> tuple[FloatArray, int]:
    """Solution of K x = rhs by conjugate gradients, and the number of steps."""
    inverse = 1.0 / operator.diagonal()

    def precondition(r: FloatArray) -> FloatArray:
        z: FloatArray = inverse * r + coarse(r)
        return z

    x, r = np.zeros_like(rhs), rhs.copy()
    z = precondition(r)
    p, rz = z.copy(), float(r @ z)
    enough = tolerance**2 * rz
    count = 0
    while rz > enough and count < CG_STEPS:
        count += 1
        kp = operator.times(p)
        alpha = rz / float(p @ kp)
        x += alpha * p
        r -= alpha * kp
        z = precondition(r)
        rz, before = float(r @ z), rz
        p = z + (rz / before) * p
    return x, count


def _unpacked(packed: FloatArray) -> FloatArray:
    """Element matrices (6, 6, n_elem) from their lower triangles (21, n_elem)."""
    entry = np.empty((6, 6), dtype=np.int64)
    entry[PACKED_ROWS, PACKED_COLUMNS] = entry[PACKED_COLUMNS, PACKED_ROWS] = np.arange(21)
    return packed[entry]


def _binned(dof: IntArray, values: FloatArray, n_dof: int) -> FloatArray:
    """Values summed by unknown, (n_dof,); those of held nodes are dropped."""
    sums = np.bincount(dof.ravel(), values.ravel(), n_dof + 1)
    return np.asarray(sums[:n_dof], dtype=np.float64)
